import type { Report } from '../core/report.ts'
import type { Truth } from '../core/sim/truth.ts'
import type { Skid } from '../core/skid.ts'
import { ms, production, within } from './acting.ts'
import { type ExothermScore, type FalseAlarms, type FeedErrorScore, type SensorFaultScore, scoreExcursions } from './excursions.ts'
import { type EventScore, type FoulingAlarmScore, scoreFouling } from './fouling.ts'

/** One case against its truth. Raw outcomes, so that figures over many cases are pooled, not averaged. */
export interface CaseScore {
  readonly case: string
  readonly category: string
  readonly hours: { readonly log: number; readonly production: number; readonly inControl: number }
  readonly events: readonly EventScore[]
  readonly foulingAlarms: readonly FoulingAlarmScore[]
  readonly exotherms: readonly ExothermScore[]
  readonly feedErrors: readonly FeedErrorScore[]
  readonly sensorFaults: readonly SensorFaultScore[]
  readonly falseAlarms: FalseAlarms
  /** |reported / true − 1| of the ratio at each timeline point that stands in production, all segments. */
  readonly ratioErrors: readonly number[]
  /** Timeline points in production, with or without a ratio. */
  readonly ratioPoints: number
}

/** Linear between the samples of the truth; null before the first and after the last. */
function trueRatio(truth: Truth, segment: string, tMs: number): number | null {
  const values = truth.ratio.segments[segment]
  if (values === undefined) return null
  const at = (tMs - ms(truth.ratio.start)) / (truth.ratio.everySeconds * 1000)
  const i = Math.floor(at)
  const low = values[i]
  if (low === undefined) return null
  return at === i ? low : values[i + 1] === undefined ? null : low + (at - i) * (values[i + 1]! - low)
}

/** Scores one report against what really happened. Pure; see the types of each part for the definition of its figures. */
export function scoreCase(truth: Truth, report: Report, skid: Skid): CaseScore {
  const fouling = scoreFouling(truth, report, skid)
  const points = report.timeline.filter((p) => within(ms(p.at), production(truth)) && truth.ratio.segments[p.segment] !== undefined)
  const ratioErrors = points.flatMap((p) => {
    const r = trueRatio(truth, p.segment, ms(p.at))
    return r === null || p.ratio === null ? [] : [Math.abs(p.ratio / r - 1)]
  })
  return {
    case: truth.case,
    category: truth.category,
    hours: {
      log: (ms(truth.to) - ms(truth.from)) / 3_600_000,
      production: hoursOf(production(truth)),
      inControl: hoursOf(truth.inControl),
    },
    events: fouling.events,
    foulingAlarms: fouling.alarms,
    ...scoreExcursions(truth, report, skid),
    ratioErrors,
    ratioPoints: points.length,
  }
}

const hoursOf = (spans: readonly { readonly from: string; readonly to: string }[]): number =>
  spans.reduce((sum, s) => sum + (ms(s.to) - ms(s.from)) / 3_600_000, 0)
