import type { AlarmReport, Cause, OnsetReport, Report } from '../core/report.ts'
import type { TrueFouling, Truth } from '../core/sim/truth.ts'
import type { Skid } from '../core/skid.ts'
import { actingCauses, ms, production, within } from './acting.ts'

/** An estimate against the truth, all in shares of the time from onset to limit (onset) or of the time left (forecast). */
export interface IntervalScore {
  readonly error: number
  readonly covered: boolean
  readonly width: number
}

export interface ForecastScore extends Partial<IntervalScore> {
  readonly fraction: number
  /** False: no forecast stood at the checkpoint. */
  readonly given: boolean
}

/** What became of one true growth. */
export interface EventScore {
  readonly segment: string
  readonly cause: 'fouling' | 'filter'
  readonly onset: string
  readonly hoursToLimit: number
  /** There was an earlier growth on the same segment. */
  readonly second: boolean
  readonly ratioMax: number
  /** The first fouling alarm in [onset, limitAt) on the right segment; null: not found. */
  readonly raised: string | null
  readonly trueRatio: number | null
  /** True ratio at the alarm over that at onset: what is left of an earlier deposit taken out. */
  readonly rise: number | null
  readonly delayS: number | null
  /** The segment that the first fouling alarm of any segment named, segments with a growth of their own left out. */
  readonly firstSegment: string | null
  readonly namedCause: Cause | null
  readonly onsetRaised: IntervalScore | null
  /** Of segments[].onset, which tells of the last growth only: null on all but the last one found on its segment. */
  readonly onsetHindsight: IntervalScore | null
  readonly lastFound: boolean
  readonly forecasts: readonly ForecastScore[]
}

/**
 * found: first alarm of a growth before its limit. late: first one at or after the limit. repeat: a further one on the same growth.
 * false: in control, named as a deposit, or named otherwise with nothing of the kind happening. other: something other than a deposit
 * truly acts and the alarm names a cause other than a deposit (rightly or not). wrong-segment: nothing grows there, but elsewhere.
 * outside: raised while not producing. Every fouling alarm is exactly one of these.
 */
export type FoulingAlarmClass = 'found' | 'late' | 'repeat' | 'false' | 'other' | 'wrong-segment' | 'outside'

export interface FoulingAlarmScore {
  readonly id: number
  readonly raised: string
  readonly segment: string | null
  readonly named: Cause | null
  readonly is: FoulingAlarmClass
  /** Causes other than a deposit that truly acted; empty where none. */
  readonly acting: readonly Cause[]
}

const depositLike: readonly (Cause | null)[] = ['fouling', 'blockage', 'ice', 'filter', null]

/** The true ratio t seconds after onset: linear between the points of the trajectory, its ends beyond them. */
export function trueRatioAt(event: Pick<TrueFouling, 'trajectory'>, seconds: number): number | null {
  let before: readonly [number, number] | undefined
  for (const point of event.trajectory) {
    if (point[0] >= seconds) {
      if (before === undefined || point[0] === before[0]) return point[1]
      return before[1] + ((point[1] - before[1]) * (seconds - before[0])) / (point[0] - before[0])
    }
    before = point
  }
  return before === undefined ? null : before[1]
}

const onsetScore = (onset: OnsetReport | null, event: TrueFouling): IntervalScore | null => {
  if (onset === null) return null
  const unit = ms(event.limitAt) - ms(event.onset)
  const truth = ms(event.onset)
  return {
    error: Math.abs(ms(onset.at) - truth) / unit,
    covered: ms(onset.low) <= truth && truth <= ms(onset.high),
    width: (ms(onset.high) - ms(onset.low)) / unit,
  }
}

/** Forecasts of dpHighBar as they stood in the timeline at, or last before, each checkpoint. Checkpoints without a limit ahead are left out. */
function forecastScores(event: TrueFouling, report: Report): ForecastScore[] {
  const points = report.timeline.filter((p) => p.segment === event.segment)
  return event.checkpoints.flatMap((c): ForecastScore[] => {
    const left = c.limitAtHeld === null ? 0 : ms(c.limitAtHeld) - ms(c.at)
    if (left <= 0) return []
    const standing = points.reduce<(typeof points)[number] | null>(
      (best, p) => (ms(p.at) <= ms(c.at) && (best === null || ms(p.at) >= ms(best.at)) ? p : best),
      null,
    )
    const f = standing?.forecast ?? null
    if (f === null || f.limit !== 'dpHighBar') return [{ fraction: c.fraction, given: false }]
    const truth = ms(c.limitAtHeld!)
    return [
      {
        fraction: c.fraction,
        given: true,
        error: Math.abs(ms(f.at) - truth) / left,
        covered: ms(f.low) <= truth && truth <= ms(f.high),
        width: (ms(f.high) - ms(f.low)) / left,
      },
    ]
  })
}

/** Scores every true growth and classes every fouling alarm of one case. */
export function scoreFouling(truth: Truth, report: Report, skid: Skid): { events: EventScore[]; alarms: FoulingAlarmScore[] } {
  const alarms = report.alarms.filter((a) => a.kind === 'fouling').sort((a, b) => ms(a.raised) - ms(b.raised))
  const growing = (segment: string | null, t: number) =>
    truth.fouling.find((f) => f.segment === segment && t >= ms(f.onset) && t <= ms(f.end))
  const firstOf = new Map<TrueFouling, AlarmReport>()
  for (const a of alarms) {
    const event = growing(a.segment, ms(a.raised))
    if (event !== undefined && !firstOf.has(event)) firstOf.set(event, a)
  }
  const found = (event: TrueFouling): AlarmReport | null => {
    const first = firstOf.get(event)
    return first !== undefined && ms(first.raised) < ms(event.limitAt) ? first : null
  }
  const events = truth.fouling.map((event): EventScore => {
    const first = found(event)
    const any = alarms.find((a) => {
      const t = ms(a.raised)
      const other = a.segment !== event.segment && growing(a.segment, t) !== undefined
      return t >= ms(event.onset) && t < ms(event.limitAt) && t <= ms(event.end) && !other
    })
    const lastFoundHere = truth.fouling.filter((f) => f.segment === event.segment && found(f) !== null).at(-1)
    const seconds = first === null ? null : (ms(first.raised) - ms(event.onset)) / 1000
    const trueRatio = seconds === null ? null : trueRatioAt(event, seconds)
    return {
      segment: event.segment,
      cause: event.cause,
      onset: event.onset,
      hoursToLimit: (ms(event.limitAt) - ms(event.onset)) / 3_600_000,
      second: truth.fouling.some((f) => f.segment === event.segment && ms(f.onset) < ms(event.onset)),
      ratioMax: event.ratioMax,
      raised: first?.raised ?? null,
      trueRatio,
      rise: trueRatio === null ? null : trueRatio / event.ratioAtOnset,
      delayS: seconds,
      firstSegment: any?.segment ?? null,
      namedCause: first?.cause ?? null,
      onsetRaised: first === null ? null : onsetScore(first.onset, event),
      onsetHindsight:
        event === lastFoundHere ? onsetScore(report.segments.find((s) => s.segment === event.segment)?.onset ?? null, event) : null,
      lastFound: event === lastFoundHere,
      forecasts: forecastScores(event, report),
    }
  })
  const classed = alarms.map((a): FoulingAlarmScore => {
    const t = ms(a.raised)
    const event = growing(a.segment, t)
    const acting = a.segment === null ? [] : [...actingCauses(truth, skid, a.segment, t)]
    const is = ((): FoulingAlarmClass => {
      if (event !== undefined) return firstOf.get(event) !== a ? 'repeat' : ms(a.raised) < ms(event.limitAt) ? 'found' : 'late'
      if (!within(t, production(truth))) return 'outside'
      if (acting.length > 0 && !depositLike.includes(a.cause)) return 'other'
      return within(t, truth.inControl) ? 'false' : 'wrong-segment'
    })()
    return { id: a.id, raised: a.raised, segment: a.segment, named: a.cause, is, acting }
  })
  return { events, alarms: classed }
}
