import type { Cause } from '../core/report.ts'
import { forecastFigures, given, onsetFigures, ratioFigures } from './figure-groups.ts'
import { type Figure, quantileFigure, rate, share } from './figures.ts'
import type { FoulingAlarmClass } from './fouling.ts'
import type { CaseScore } from './score.ts'

export interface Summary {
  readonly cases: number
  readonly hours: { readonly log: number; readonly production: number; readonly inControl: number }
  readonly figures: readonly Figure[]
  /** Every fouling alarm, by what it was. */
  readonly foulingAlarms: Readonly<Record<FoulingAlarmClass, number>>
  /** What to look at: growths not found, false and misnamed alarms. */
  readonly missed: readonly {
    readonly case: string
    readonly segment: string
    readonly onset: string
    readonly hoursToLimit: number
    readonly ratioMax: number
  }[]
  readonly falseFouling: readonly {
    readonly case: string
    readonly segment: string | null
    readonly raised: string
    readonly named: Cause | null
  }[]
  readonly falseExotherms: readonly { readonly case: string; readonly raised: string }[]
}

/**
 * Pools cases into figures. Definitions:
 *
 * found             true growths (deposits, filter loadings, second growths) with a `fouling` alarm on their segment in [onset, limitAt)
 * rightSegment      growths during which any such alarm came: the first one names the right segment (alarms on another growing segment aside)
 * falseFouling      alarms classed `false` (see fouling.ts) per 1000 h in control; foulingLike adds those classed `other`
 * otherCause        fouling alarms while something other than a deposit truly acts on a segment without one: the cause named is that
 * causeOfGrowth     first alarms of found growths that name their cause (`fouling`, `filter`)
 * onset, forecast   over found growths and over checkpoints with a limit ahead; the unit is the time from onset to limit, the time left
 * exotherms         found by kind `exotherm` up to 60 s after the end; `any` adds kind `temperature-limit`
 * false per 1000 h  of production for exotherm and feed-ratio, of the whole log for sensor
 * ratioError        |reported/true − 1| at timeline points in production, pooled over segments
 */
export function summarise(cases: readonly CaseScore[]): Summary {
  const sum = (of: (c: CaseScore) => number) => cases.reduce((total, c) => total + of(c), 0)
  const hours = {
    log: sum((c) => c.hours.log),
    production: sum((c) => c.hours.production),
    inControl: sum((c) => c.hours.inControl),
  }
  const events = cases.flatMap((c) => c.events)
  const found = events.filter((e) => e.raised !== null)
  const seconds = events.filter((e) => e.second)
  const pointed = events.filter((e) => e.firstSegment !== null)
  const alarms = cases.flatMap((c) => c.foulingAlarms)
  const classes: Record<FoulingAlarmClass, number> = {
    found: 0,
    late: 0,
    repeat: 0,
    false: 0,
    other: 0,
    'wrong-segment': 0,
    outside: 0,
  }
  for (const a of alarms) classes[a.is]++
  const otherCause = alarms.filter((a) => a.acting.length > 0 && a.is !== 'repeat' && a.is !== 'outside')
  const depositUnder = otherCause.filter((a) => a.acting.includes('filter') || (a.is !== 'found' && a.is !== 'late'))
  const forecasts = events.flatMap((e) => e.forecasts)
  const exotherms = cases.flatMap((c) => c.exotherms)
  const delays = given(exotherms.map((e) => e.delayS))
  const feed = cases.flatMap((c) => c.feedErrors)
  const faults = (hard: boolean) => cases.flatMap((c) => c.sensorFaults).filter((f) => f.hard === hard)
  const flagged = (list: ReturnType<typeof faults>) => list.filter((f) => f.delayS !== null).length
  const soft = faults(false)
  const ratioErrors = cases.flatMap((c) => c.ratioErrors)
  const figures: Figure[] = [
    share('found', 'fouling found before the limit', found.length, events.length, 0.99),
    share('found.second', 'of these, second growths', seconds.filter((e) => e.raised !== null).length, seconds.length),
    share('rightSegment', 'right segment', pointed.filter((e) => e.firstSegment === e.segment).length, pointed.length, 0.99),
    ...ratioFigures(events),
    quantileFigure(
      'riseAtAlarm',
      'the same over the ratio at onset, all growths, median',
      'ratio',
      given(events.map((e) => e.rise)),
      0.5,
    ),
    rate('falseFouling', 'false fouling alarms, in control', classes.false, hours.inControl, 1.5),
    rate('foulingLike', 'the same with those of another cause', classes.false + classes.other, hours.inControl),
    ...onsetFigures(
      'onset.raised',
      'onset as raised',
      found.map((e) => e.onsetRaised),
      found.length,
      { median: 0.007, p90: 0.045, width: 0.07 },
    ),
    ...onsetFigures(
      'onset.hindsight',
      'onset in hindsight',
      found.map((e) => e.onsetHindsight),
      found.filter((e) => e.lastFound).length,
      { median: 0.01, p90: 0.08, width: null },
    ),
    ...forecastFigures(25, forecasts, false),
    ...forecastFigures(50, forecasts, true),
    ...forecastFigures(75, forecasts, false),
    share('exotherms', 'exotherms found', delays.length, exotherms.length, 0.99),
    share(
      'exotherms.any',
      'the same, temperature limits counted',
      given(exotherms.map((e) => e.delayAnyS)).length,
      exotherms.length,
    ),
    quantileFigure('exotherms.delay.median', 'exotherm delay, median', 's', delays, 0.5, 14),
    quantileFigure('exotherms.delay.p90', 'exotherm delay, p90', 's', delays, 0.9, 60),
    rate(
      'falseExotherms',
      'false exotherm alarms',
      sum((c) => c.falseAlarms.exotherm.length),
      hours.production,
      1.5,
    ),
    share('feedErrors', 'dosing errors flagged as feed-ratio', feed.filter((f) => f.delayS !== null).length, feed.length, 0.98),
    rate(
      'falseFeedRatio',
      'false feed-ratio alarms',
      sum((c) => c.falseAlarms.feedRatio.length),
      hours.production,
    ),
    share('sensors.hard', 'sensor faults flagged, hard', flagged(faults(true)), faults(true).length, 1),
    share('sensors.soft', 'sensor faults flagged, soft', flagged(soft), soft.length, 0.95),
    share(
      'sensors.softNear',
      'the same, a neighbouring tag counted',
      soft.filter((f) => f.delayS !== null || f.onNeighbour).length,
      soft.length,
    ),
    rate(
      'falseSensors',
      'false sensor alarms',
      sum((c) => c.falseAlarms.sensor.length),
      hours.log,
      2,
    ),
    rate(
      'wrongTagSensors',
      'sensor alarms on a neighbour of the faulty tag',
      sum((c) => c.falseAlarms.sensorWrongTag.length),
      hours.log,
    ),
    share(
      'otherCause',
      'fouling-like alarm of another cause: named right',
      depositUnder.filter((a) => a.named !== null && a.acting.includes(a.named)).length,
      depositUnder.length,
      0.85,
    ),
    share('causeOfGrowth', 'growth found: cause named right', found.filter((e) => e.namedCause === e.cause).length, found.length),
    quantileFigure('ratioError.median', 'ratio error in production, median', 'ratio', ratioErrors, 0.5, 0.0025, true),
    quantileFigure('ratioError.p95', 'ratio error in production, p95', 'ratio', ratioErrors, 0.95, 0.01, true),
    share(
      'ratioGiven',
      'timeline points in production with a ratio',
      ratioErrors.length,
      sum((c) => c.ratioPoints),
    ),
  ]
  return {
    cases: cases.length,
    hours,
    figures,
    foulingAlarms: classes,
    missed: cases.flatMap((c) =>
      c.events
        .filter((e) => e.raised === null)
        .map((e) => ({ case: c.case, segment: e.segment, onset: e.onset, hoursToLimit: e.hoursToLimit, ratioMax: e.ratioMax })),
    ),
    falseFouling: cases.flatMap((c) =>
      c.foulingAlarms
        .filter((a) => a.is === 'false')
        .map((a) => ({ case: c.case, segment: a.segment, raised: a.raised, named: a.named })),
    ),
    falseExotherms: cases.flatMap((c) => c.falseAlarms.exotherm.map((raised) => ({ case: c.case, raised }))),
  }
}
