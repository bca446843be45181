import type { AlarmReport, Report } from '../core/report.ts'
import { randomOf } from '../core/sim/random.ts'

/** A verdict on one log cut short: what the tool said of the time before the cut must not change with what came after. */
export interface LookAheadScore {
  readonly case: string
  readonly cutAt: string
  /** Alarms (of either report) raised before the cut less the margin. */
  readonly compared: number
  readonly same: boolean
  /** The first thing that differs, in words. */
  readonly difference: string | null
}

/** What may lawfully differ: an alarm that is still standing at the cut has not cleared yet. */
const asOf = (a: AlarmReport, tMs: number): AlarmReport => ({
  ...a,
  cleared: a.cleared !== null && Date.parse(a.cleared) <= tMs ? a.cleared : null,
})

/**
 * Compares the report of a whole log with that of the same log cut at cutMs: every alarm raised, and every timeline point standing,
 * more than marginMs before the cut must be the same in both, field by field. The margin is what the last open scans need.
 */
export function compareCut(name: string, whole: Report, cut: Report, cutMs: number, marginMs: number): LookAheadScore {
  const until = cutMs - marginMs
  const alarms = (r: Report) => r.alarms.filter((a) => Date.parse(a.raised) <= until).map((a) => asOf(a, until))
  const points = (r: Report) => r.timeline.filter((p) => Date.parse(p.at) <= until)
  const a = alarms(whole)
  const b = alarms(cut)
  const difference = firstDifference('alarm', a, b) ?? firstDifference('timeline point', points(whole), points(cut))
  return {
    case: name,
    cutAt: new Date(cutMs).toISOString(),
    compared: Math.max(a.length, b.length),
    same: difference === null,
    difference,
  }
}

function firstDifference(what: string, whole: readonly unknown[], cut: readonly unknown[]): string | null {
  for (let i = 0; i < Math.max(whole.length, cut.length); i++) {
    const [w, c] = [JSON.stringify(whole[i]), JSON.stringify(cut[i])]
    if (w !== c) return `${what} ${i + 1}: whole log ${w ?? 'has none'}, cut log ${c ?? 'has none'}`
  }
  return null
}

/** Where to cut: places in the middle four fifths of the log, the same for the same seed and case. */
export function cutsOf(name: string, fromMs: number, toMs: number, count: number, seed: number): number[] {
  const random = randomOf(seed, `cut ${name}`)
  return Array.from({ length: count }, () => Math.round(fromMs + (toMs - fromMs) * random.between(0.1, 0.9)))
}
