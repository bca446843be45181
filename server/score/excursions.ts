import type { AlarmKind, AlarmReport, Report } from '../core/report.ts'
import type { TrueExotherm, Truth } from '../core/sim/truth.ts'
import type { Skid } from '../core/skid.ts'
import { ms, production, tagsOf, within } from './acting.ts'

/** How long after its end a thing may still be found, or explain an alarm, seconds. The project's own choice, the same for all. */
export const graceS = { exotherm: 60, feedError: 60, sensorFault: 600, coolDown: 600, oneFlow: 1800 } as const

export interface ExothermScore {
  readonly segment: string
  readonly kind: string
  readonly start: string
  readonly amplitudeC: number
  /** From the true start to the first `exotherm` alarm of the segment (or of one of its thermocouples), s; null: none by the end + 60 s. */
  readonly delayS: number | null
  /** The same with `temperature-limit` alarms counted as well. */
  readonly delayAnyS: number | null
}

export interface FeedErrorScore {
  readonly stream: string
  readonly start: string
  readonly factor: number
  readonly delayS: number | null
}

export interface SensorFaultScore {
  readonly tag: string
  readonly kind: string
  readonly hard: boolean
  readonly start: string
  readonly delayS: number | null
  /** Not on the tag itself, but on another tag of a segment that it serves. */
  readonly onNeighbour: boolean
}

/** Alarms with nothing true behind them; those outside production stand apart. */
export interface FalseAlarms {
  readonly exotherm: readonly string[]
  readonly exothermOutside: readonly string[]
  readonly feedRatio: readonly string[]
  readonly sensor: readonly string[]
  /** A sensor alarm on a tag that is sound, while a tag of the same segment is not. */
  readonly sensorWrongTag: readonly string[]
}

const after = (a: AlarmReport, from: string, to: string, grace: number) =>
  ms(a.raised) >= ms(from) && ms(a.raised) <= ms(to) + grace * 1000

const delay = (alarms: readonly AlarmReport[], start: string): number | null =>
  alarms.length === 0 ? null : (Math.min(...alarms.map((a) => ms(a.raised))) - ms(start)) / 1000

/** Scores exotherms, dosing errors and sensor faults of one case, and lists the false alarms of those kinds. */
export function scoreExcursions(truth: Truth, report: Report, skid: Skid) {
  const ofKind = (...kinds: AlarmKind[]) => report.alarms.filter((a) => kinds.includes(a.kind))
  const tagsAlong = (segment: string) => skid.segments.find((s) => s.id === segment)?.temperatures ?? []
  const inSegment = (a: AlarmReport, e: TrueExotherm) =>
    a.segment === e.segment || (a.tag !== null && tagsAlong(e.segment).includes(a.tag))
  const exotherms = truth.exotherms.map((e): ExothermScore => {
    const hits = (...kinds: AlarmKind[]) =>
      ofKind(...kinds).filter((a) => inSegment(a, e) && after(a, e.start, e.end, graceS.exotherm))
    return {
      segment: e.segment,
      kind: e.kind,
      start: e.start,
      amplitudeC: e.amplitudeC,
      delayS: delay(hits('exotherm'), e.start),
      delayAnyS: delay(hits('exotherm', 'temperature-limit'), e.start),
    }
  })
  const feedErrors = truth.feedErrors.map((f): FeedErrorScore => {
    const hits = ofKind('feed-ratio').filter((a) => after(a, f.start, f.end, graceS.feedError))
    return { stream: f.stream, start: f.start, factor: f.factor, delayS: delay(hits, f.start) }
  })
  const sharing = (tag: string) =>
    skid.segments.flatMap((s) => {
      const tags = [...tagsOf(s, skid), ...s.temperatures, ...(s.coolantTemperature === null ? [] : [s.coolantTemperature])]
      return tags.includes(tag) ? tags : []
    })
  const sensorAlarms = ofKind('sensor', 'no-data')
  const sensorFaults = truth.sensorFaults.map((f): SensorFaultScore => {
    const during = sensorAlarms.filter((a) => after(a, f.start, f.end, graceS.sensorFault))
    return {
      tag: f.tag,
      kind: f.kind,
      hard: f.hard,
      start: f.start,
      delayS: delay(
        during.filter((a) => a.tag === f.tag),
        f.start,
      ),
      onNeighbour: during.some((a) => a.kind === 'sensor' && a.tag !== null && a.tag !== f.tag && sharing(f.tag).includes(a.tag)),
    }
  })
  const faultAt = (a: AlarmReport, fits: (tag: string) => boolean) =>
    truth.sensorFaults.some((f) => fits(f.tag) && after(a, f.start, f.end, graceS.sensorFault))
  const gapAt = (a: AlarmReport) =>
    truth.confounders.some(
      (c) =>
        c.tags !== undefined &&
        (c.tags === 'all' || (a.tag !== null && c.tags.includes(a.tag))) &&
        after(a, c.at, c.until ?? c.at, graceS.sensorFault),
    )
  /** One pump moved alone, by hand or by slipping: the feed ratio truly changed, a feed-ratio alarm is neither asked for nor false. */
  const oneFlowAt = (a: AlarmReport) =>
    truth.confounders.some(
      (c) =>
        (c.kind === 'flowStepOne' || c.kind === 'pumpSlip') &&
        after(a, c.at, new Date(ms(c.at) + 1000 * (c.overS ?? 0)).toISOString(), graceS.oneFlow),
    )
  const strayExotherms = ofKind('exotherm').filter((a) => !truth.exotherms.some((e) => after(a, e.start, e.end, graceS.coolDown)))
  const straySensors = ofKind('sensor').filter((a) => !faultAt(a, (tag) => tag === a.tag) && !gapAt(a))
  const wrongTag = (a: AlarmReport) => faultAt(a, (tag) => a.tag === null || sharing(tag).includes(a.tag))
  const times = (alarms: readonly AlarmReport[]) => alarms.map((a) => a.raised)
  const producing = (a: AlarmReport) => within(ms(a.raised), production(truth))
  const falseAlarms: FalseAlarms = {
    exotherm: times(strayExotherms.filter(producing)),
    exothermOutside: times(strayExotherms.filter((a) => !producing(a))),
    feedRatio: times(
      ofKind('feed-ratio').filter(
        (a) => producing(a) && !oneFlowAt(a) && !truth.feedErrors.some((f) => after(a, f.start, f.end, graceS.feedError)),
      ),
    ),
    sensor: times(straySensors.filter((a) => !wrongTag(a))),
    sensorWrongTag: times(straySensors.filter(wrongTag)),
  }
  return { exotherms, feedErrors, sensorFaults, falseAlarms }
}
