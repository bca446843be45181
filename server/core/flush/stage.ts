import type { FlushCriterion, FlushStep } from '../report.ts'
import { mlMinFromM3s } from '../units.ts'
import type { FlushSettings } from './input.ts'
import type { FlushPath } from './legs.ts'
import type { FlushLiquids } from './liquids.ts'

/** What every step builder works from. */
export interface Stage {
  readonly path: FlushPath
  readonly liquids: FlushLiquids
  readonly settings: FlushSettings
  readonly active: readonly string[]
  /** Active reagent on the whole path before the flush, mol; null where a part is not computed. */
  readonly activeMol: number | null
}

/** A step and what could not be computed for it. */
export interface Built {
  readonly step: FlushStep
  readonly missing: readonly string[]
}

/** Flow of a step, and what the same liquid would have without a deposit; null where not computed. */
export interface Flows {
  readonly flowM3S: number | null
  readonly clearM3S: number | null
}

export interface Draft {
  readonly id: string
  readonly title: string
  readonly liquid: string | null
  readonly flowM3S: number | null
  readonly volumeM3: number | null
  readonly minutes: number | null
  readonly holdPoints: readonly string[]
  readonly criteria: readonly FlushCriterion[]
  /** Ends the step besides its criteria. */
  readonly alsoEnds?: readonly string[]
  readonly hazards: readonly string[]
  readonly basis: readonly string[]
}

/** Plant units and the plan's form. */
export const finish = (d: Draft): FlushStep => ({
  id: d.id,
  title: d.title,
  liquid: d.liquid,
  flowMlMin: d.flowM3S === null ? null : mlMinFromM3s(d.flowM3S),
  volumeMl: d.volumeM3 === null ? null : d.volumeM3 * 1e6,
  minutes: d.minutes,
  holdPoints: d.holdPoints,
  endsWhen: [...(d.alsoEnds ?? []), ...d.criteria.map((c) => c.text)],
  hazards: d.hazards,
  basis: d.basis,
  criteria: d.criteria,
})

/** Minutes for a volume at a flow; null unless both are known and the flow is above 0. */
export const pumpMinutes = (volumeM3: number | null, flowM3S: number | null): number | null =>
  volumeM3 === null || flowM3S === null || flowM3S <= 0 ? null : volumeM3 / flowM3S / 60
/** Sum that is null where a part is. */
export const addKnown = (...parts: readonly (number | null)[]): number | null =>
  parts.reduce<number | null>((a, b) => (a === null || b === null ? null : a + b), 0)
export const criterion = (id: string, text: string): FlushCriterion => ({ id, text })
export const shown = (value: number | null, unit: string, digits = 3): string =>
  value === null ? 'not computed' : `${Number(value.toPrecision(digits))} ${unit}`

/** The hazard every step with branches in parallel carries (common practice). */
export function parallelHazard(path: FlushPath): string[] {
  const many = path.legs.filter((l) => (l.op.channel?.parallel ?? 1) > 1).map((l) => `${l.id} (${l.op.channel?.parallel})`)
  return many.length === 0
    ? []
    : [
        `Parallel branches in ${many.join(', ')}: volume pumped does not prove that a plugged branch was displaced; treat its content as active.`,
      ]
}
