import type { Layout } from '../derive/layout.ts'
import type { Step } from '../derive/step.ts'
import type { Given } from '../figures/operation.ts'
import { madSd, median } from '../stats/robust.ts'
import { fromSi, valueUnit } from '../units.ts'

/** Flows by stream (as the tag measures: kg/s or m³/s) and temperatures by temperature tag, K, in the layout's order; null where not known. */
export interface WorkingReadings {
  readonly flow: readonly (number | null)[]
  readonly tempK: readonly (number | null)[]
}

export interface PresentState {
  /** The last steps in production, newest last. */
  recent: WorkingReadings[]
  /** By segment: the medians when its baseline was made. */
  baseline: (WorkingReadings | null)[]
}

/** A baseline is made of so many steps; the working point of now is the median of the last ten minutes of them. */
const steps = { kept: 60, now: 20 }
/** A temperature that moves by more than this (robust sd over the steps) is not that of a working point, K. */
const steadyK = 2

/** Median over steps of each column; null where no step has it, or a temperature spreads by more than `spreadK`. */
function medians(list: readonly WorkingReadings[], spreadK: number): WorkingReadings | null {
  const first = list[0]
  if (first === undefined) return null
  const column = (pick: (r: WorkingReadings) => number | null | undefined, most: number): number | null => {
    const values = list.map(pick).filter((v): v is number => v !== null && v !== undefined)
    return values.length === 0 || madSd(values) > most ? null : median(values)
  }
  return {
    flow: first.flow.map((_, i) => column((r) => r.flow[i], Number.POSITIVE_INFINITY)),
    tempK: first.tempK.map((_, i) => column((r) => r.tempK[i], spreadK)),
  }
}

/**
 * What the skid runs at, and ran at when each clean baseline was made: medians of step means of usable readings in production. Bounded;
 * state plain JSON. It is what plans and derived figures of a live run rest on in place of assumptions.
 */
export function createPresent(layout: Layout, saved?: PresentState) {
  const { skid } = layout
  const tempTags = skid.tags.flatMap((t, i) => (t.quantity === 'temperature' ? [i] : []))
  const s: PresentState = saved ?? { recent: [], baseline: layout.segments.map(() => null) }

  /** In the unit of each tag, as a person would give them. */
  function given(flows: WorkingReadings | null, temperatures: WorkingReadings | null): Given {
    const inTagUnit = (tag: number, si: number | null | undefined): number | null => {
      const spec = skid.tags[tag]
      return spec === undefined || si === null || si === undefined ? null : fromSi(si, valueUnit(spec))
    }
    return {
      flows: Object.fromEntries(layout.streams.map((st, i) => [st.id, inTagUnit(st.tag, flows?.flow[i])])),
      temperatures: Object.fromEntries(
        tempTags.map((tag, i) => [skid.tags[tag]?.tag ?? '', inTagUnit(tag, temperatures?.tempK[i])]),
      ),
    }
  }
  const last = (spreadK: number): WorkingReadings | null => medians(s.recent.slice(-steps.now), spreadK)

  return {
    state: s,
    /** One step in production. */
    take(step: Step): void {
      s.recent.push({ flow: step.flow, tempK: tempTags.map((t) => step.tempK[t] ?? null) })
      if (s.recent.length > steps.kept) s.recent.shift()
    },
    /** A segment's baseline has just been made of the steps before. */
    baselined(segment: number): void {
      s.baseline[segment] = medians(s.recent, steadyK)
    },
    /** The present working point; null before production. */
    now: (): Given | null => (s.recent.length === 0 ? null : given(last(steadyK), last(steadyK))),
    /** That of a segment's clean baseline; null without one. */
    atBaseline: (segment: number): Given | null => {
      const at = s.baseline[segment] ?? null
      return at === null ? null : given(at, at)
    },
    /** For a flush of this segment: flows of its clean baseline (a deposit may have throttled those of now), temperatures of now, steady or not. */
    forFlush(segment: number): Given {
      const now = last(Number.POSITIVE_INFINITY)
      return given(s.baseline[segment] ?? now, now)
    },
  }
}
export type Present = ReturnType<typeof createPresent>
