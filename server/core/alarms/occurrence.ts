import type { AlarmKind, AlarmReport, Cause, OnsetReport, Priority } from '../report.ts'

export type Evidence = AlarmReport['evidence']

/** What a detector says of one alarm at one scan. Everything but the first three fields is read only when something changes. */
export interface Signal {
  /** One alarm for one thing: kind:segment, kind:tag, kind:variant:segment. */
  readonly key: string
  readonly tMs: number
  /** Beyond the limit; null where the input is bad and nothing can be said. */
  readonly over: boolean | null
  /** Back beyond the deadband; by default what is not over. */
  readonly under?: boolean
  readonly kind: AlarmKind
  readonly segment: string | null
  readonly tag: string | null
  readonly priority: Priority
  readonly value: number | null
  readonly limit: number | null
  readonly unit: string | null
  readonly message: string | (() => string)
  readonly cause: Cause | null
  readonly onset: OnsetReport | null
  readonly detector: string
  readonly evidence: Evidence
  readonly onDelayS: number
  readonly offDelayS: number
}

/** One time that an alarm was active. Figures and message as at the raise; cause, onset and evidence as last amended. */
export interface Occurrence extends Omit<AlarmReport, 'raised' | 'cleared'> {
  readonly key: string
  readonly raisedMs: number
  readonly clearedMs: number | null
  /** False while it was only tracked under a suppression. */
  readonly annunciated: boolean
}

export interface AlarmChange {
  readonly kind: 'raised' | 'annunciated' | 'amended' | 'cleared'
  readonly tMs: number
  readonly occurrence: Occurrence
}

/** The occurrence that a signal begins, with the version of the settings in force. */
export function raise(s: Signal, id: number, annunciated: boolean, configuration: number): Occurrence {
  const { key, kind, priority, segment, tag, value, limit, unit, cause, onset, detector, evidence } = s
  const message = typeof s.message === 'string' ? s.message : s.message()
  return {
    id,
    key,
    kind,
    priority,
    segment,
    tag,
    raisedMs: s.tMs,
    clearedMs: null,
    value,
    limit,
    unit,
    message,
    cause,
    onset,
    detector,
    evidence,
    configuration,
    annunciated,
  }
}

/** An occurrence as the report prints it. */
export function alarmReport(o: Occurrence): AlarmReport {
  const { key: _key, raisedMs, clearedMs, annunciated: _annunciated, ...rest } = o
  const iso = (ms: number) => new Date(ms).toISOString()
  return { ...rest, raised: iso(raisedMs), cleared: clearedMs === null ? null : iso(clearedMs) }
}
