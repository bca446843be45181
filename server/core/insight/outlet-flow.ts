import type { FlowSample } from '../rtd/outlet-window.ts'

export interface OutletFlowState {
  /** Flow from each instant to the next; the last one ends at `endMs`. */
  samples: { tMs: number; flowM3S: number | null }[]
  endMs: number
}

/** A week of 30-s steps in full; of what is older, neighbours are joined two by two, so the cost does not grow with the run. */
const keptSamples = 20_160

/** The flow that left the skid at one outlet, by steps. A stretch without steps is unknown, never the flow before it. Plain JSON. */
export function createOutletFlow(saved?: OutletFlowState) {
  const s: OutletFlowState = saved ?? { samples: [], endMs: Number.NEGATIVE_INFINITY }

  function put(tMs: number, flowM3S: number | null): void {
    if (s.samples.at(-1)?.flowM3S !== flowM3S || s.samples.length === 0) s.samples.push({ tMs, flowM3S })
  }

  /** Joins pairs of the older half by their volume; one with an unknown flow stays as it is. */
  function thin(): void {
    const half = s.samples.length >> 1
    const out: OutletFlowState['samples'] = []
    for (let i = 0; i < half; i += 2) {
      const a = s.samples[i]!
      const b = s.samples[i + 1]!
      const end = s.samples[i + 2]?.tMs ?? s.endMs
      if (a.flowM3S === null || b.flowM3S === null || i + 1 >= half) out.push(a, ...(i + 1 >= half ? [] : [b]))
      else out.push({ tMs: a.tMs, flowM3S: (a.flowM3S * (b.tMs - a.tMs) + b.flowM3S * (end - b.tMs)) / (end - a.tMs) })
    }
    s.samples = [...out, ...s.samples.slice(half)]
  }

  return {
    state: s,
    /** One step that ended at endMs. */
    take(endMs: number, stepMs: number, flowM3S: number | null): void {
      const fromMs = endMs - stepMs
      if (s.samples.length > 0 && s.endMs < fromMs) put(s.endMs, null)
      put(fromMs, flowM3S)
      s.endMs = endMs
      if (s.samples.length > keptSamples) thin()
    },
    /** As `outletWindow` reads them: the last one closes the record. */
    samples: (): readonly FlowSample[] => (s.samples.length === 0 ? [] : [...s.samples, { tMs: s.endMs, flowM3S: null }]),
  }
}
