import type { BankEvent } from '../bank/bank-state.ts'
import type { Rival } from '../bank/verdicts.ts'
import type { Layout } from '../derive/layout.ts'
import type { Cause } from '../report.ts'

export interface Finding {
  readonly cause: Cause
  readonly for: string[]
  readonly against: string[]
  readonly notExcluded: string[]
}

/** Nats by which an explanation must fall short before it counts as excluded. */
const excludedBy = 6

/** What another explanation is called in the record. */
function nameOf(layout: Layout, r: Rival): string {
  switch (r.kind) {
    case 'deposit':
      return `deposit in ${layout.segments[r.of]!.spec.id}`
    case 'step':
    case 'settling':
      return `a single step in ${layout.segments[r.of]!.spec.id}`
    case 'tap-ramp':
    case 'tap-step':
      return `zero of ${layout.taps[r.of]!.name} off`
    case 'stream':
      return `viscosity or flow reading of stream ${layout.streams[r.of]!.id}`
  }
}

/** Cause and evidence of a verdict of the bank: every explanation that was weighed is listed, excluded or not. */
export function findingOf(layout: Layout, e: BankEvent): Finding {
  const { rivals } = e
  const short = (r: Rival) => e.likelihood - Math.max(0, r.likelihood)
  const against = rivals
    .filter((r) => short(r) >= excludedBy)
    .map((r) => `${nameOf(layout, r)}: fits worse by ${short(r).toFixed(0)} nats`)
  const notExcluded = rivals.filter((r) => short(r) < excludedBy).map((r) => nameOf(layout, r))
  const likely = `log likelihood ratio ${e.likelihood.toFixed(1)} over ${e.ageSteps} steps`
  switch (e.kind) {
    case 'deposit': {
      const seg = layout.segments[e.segment]!
      const alone = rivals.filter((r) => r.kind === 'tap-ramp').every((r) => r.likelihood < e.likelihood - 4)
      return {
        cause: seg.spec.kind === 'filter' ? 'filter' : 'fouling',
        for: [
          `resistance of ${seg.spec.id} rises steadily while flow and viscosity are accounted for`,
          likely,
          ...(alone ? ['neighbouring segments do not mirror it'] : []),
        ],
        against,
        notExcluded: [...notExcluded, ...endTapDoubt(layout, e.segment)],
      }
    }
    case 'blockage':
      return {
        cause: layout.segments[e.segment]!.spec.kind === 'filter' ? 'filter' : 'blockage',
        for: [
          `resistance of ${layout.segments[e.segment]!.spec.id} rose at once by ${(100 * Math.expm1(e.size)).toFixed(0)} % and stays`,
          likely,
        ],
        against,
        notExcluded: [...notExcluded, ...endTapDoubt(layout, e.segment)],
      }
    case 'step':
      return { cause: 'unknown', for: [likely], against, notExcluded }
    case 'instrument':
      return {
        cause: 'sensor',
        for: [
          e.neighbours
            ? `neighbours of ${e.tag} move apart by the same ${(e.sizePa / 100).toFixed(0)} mbar`
            : `ΔP of ${layout.segments[e.segment]!.spec.id} shifted by ${(e.sizePa / 100).toFixed(0)} mbar with nothing else moving`,
          likely,
        ],
        against,
        notExcluded: e.neighbours
          ? notExcluded
          : [...notExcluded, `a true step of resistance in ${layout.segments[e.segment]!.spec.id}`],
      }
    case 'stream':
      return {
        cause: 'composition',
        for: [
          `all segments that carry ${layout.streams[e.stream]!.id} changed by one factor of viscosity, ${(100 * Math.expm1(e.size)).toFixed(1)} %`,
          likely,
        ],
        against,
        notExcluded: [...notExcluded, `flow reading of stream ${layout.streams[e.stream]!.id}`],
      }
  }
}

/** A drift of a tap that only this segment sees looks like a deposit to any method. */
function endTapDoubt(layout: Layout, segment: number): string[] {
  const g = layout.segments[segment]!
  const doubts: string[] = []
  for (const tap of [g.tapIn, g.tapOut]) {
    if (tap === null) continue
    const t = layout.taps[tap]!
    if (t.inletOf.length + t.outletOf.length === 1) doubts.push(`slow drift of ${t.name}, which no other segment checks`)
  }
  if (g.dpTag !== null) doubts.push(`slow drift of ${layout.skid.tags[g.dpTag]!.tag}, which no other reading checks`)
  return doubts
}
