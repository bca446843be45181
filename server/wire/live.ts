import type { Course } from '../core/flush/course-state.ts'
import type { Phase } from '../core/reading.ts'
import type { AdviceReport, Priority } from '../core/report.ts'
import type { LimitName } from '../core/sequence.ts'
import type { AlarmRow } from './alarm.ts'
import type { RunClock } from './service.ts'

/** Everything of one run as it stands; `GET /api/runs/:run/state`, and `state` on the socket. Also of a stored run at a moment (`atMs`). */
export interface LiveState {
  readonly run: number
  readonly clock: RunClock
  readonly mode: RunMode
  readonly data: DataState
  readonly comb: ScanComb
  readonly segments: readonly SegmentState[]
  readonly tags: readonly TagState[]
  /** Every alarm that is not plainly normal, first raised first. */
  readonly alarms: readonly AlarmRow[]
  /** More than 10 annunciations in 10 min, until fewer than 5; `first` is the alarm it began with, also when that is over. */
  readonly flood: { readonly sinceMs: number; readonly count: number; readonly first: AlarmRow } | null
  /** The latest recommendation in force and those beside it, latest first; empty when there is none. */
  readonly advice: readonly AdviceState[]
  /** The guided flush under way, or the last one of the run; null before any. */
  readonly flush: Course | null
}

export interface RunMode {
  /** As logged or, without a phase column, inferred; null when not known. */
  readonly phase: Phase | null
  readonly production: boolean
  /** Production was inferred from flows and temperatures. */
  readonly inferred: boolean
}

export interface DataState {
  /** Source time of the newest row, and how long ago that is by the run's clock; null before the first. */
  readonly lastRowMs: number | null
  readonly ageS: number | null
  /** No row for two scans or more. */
  readonly cutOff: boolean
  /** How far the pipeline stands behind the newest row, s. */
  readonly lagS: number | null
  readonly source: { readonly state: 'running' | 'waiting' | 'failed' | 'ended'; readonly message: string | null }
}

/** The last 30 scans, oldest first; true where at least one row came. `endMs` is the end of the newest. */
export interface ScanComb {
  readonly scanMs: number
  readonly endMs: number | null
  readonly received: readonly boolean[]
}

export interface Interval {
  readonly atMs: number
  readonly lowMs: number
  readonly highMs: number
  /** Probability that the interval claims. */
  readonly level: number
}

export interface SegmentState {
  readonly segment: string
  /** Means of the last detector step, which ended at `atMs`. Clean ΔP is that of the clean bore at this flow and temperature. */
  readonly atMs: number | null
  readonly ratio: number | null
  readonly dpBar: number | null
  readonly cleanDpBar: number | null
  readonly flowMlMin: number | null
  readonly tempC: number | null
  readonly ratioMax: number | null
  /** ΔP of the newest scan. */
  readonly dpNowBar: number | null
  readonly temperatures: readonly { readonly tag: string; readonly tempC: number | null }[]
  readonly growthPerHour: number | null
  readonly onset: Interval | null
  readonly forecast: (Interval & { readonly limit: LimitName; readonly limitBar: number | null }) | null
  readonly baseline: {
    readonly fromMs: number
    readonly toMs: number
    readonly dpBar: number
    readonly sigma: number
    readonly provisional: boolean
  } | null
  /** Limits in force now. */
  readonly limits: Readonly<Record<LimitName, number | null>>
  /** The most urgent alarm standing on the segment. */
  readonly standing: { readonly alarm: number; readonly priority: Priority; readonly needsAck: boolean } | null
}

export interface TagState {
  readonly tag: string
  /** Mean of the newest scan that had a usable reading, in the tag's unit; null before the first. Its age is clock.nowMs − atMs. */
  readonly value: number | null
  readonly unit: string | null
  readonly atMs: number | null
  /** Of the newest scan: none where it had no reading of this tag. */
  readonly quality: 'good' | 'uncertain' | 'bad' | 'none'
  /** Why not good: frozen, spike, open-sensor ...; null when good. */
  readonly reason: string | null
  /** A slow tag's last value, held. */
  readonly held: boolean
}

export interface AdviceState extends AdviceReport {
  readonly atMs: number
}

/** A LiveState without the large parts that are as they were: `{ ...last, ...update }` is the state now. */
export type LiveUpdate = Omit<LiveState, 'alarms' | 'advice' | 'flush'> & Partial<Pick<LiveState, 'alarms' | 'advice' | 'flush'>>
