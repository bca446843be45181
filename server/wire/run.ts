import type { RunClock } from './service.ts'
import type { SkidFacts } from './skid.ts'

/** live: a source feeds it. importing: a log is being read in. ended: closed. failed: its source or import broke, see `fault`. */
export type RunState = 'live' | 'importing' | 'ended' | 'failed'
export type RunKind = 'simulated' | 'followed' | 'imported' | 'uploaded'

/** A row of `GET /api/runs`, newest first. */
export interface RunRow {
  readonly run: number
  readonly skid: string
  readonly title: string
  readonly state: RunState
  readonly kind: RunKind
  /** Where its readings come from, in words. */
  readonly source: string
  readonly fault: string | null
  /** Time of the first and last reading; null before the first. */
  readonly fromMs: number | null
  readonly toMs: number | null
  readonly rows: number
  /** Null for a run that is not live. */
  readonly clock: RunClock | null
  /** Standing alarms by priority; of an ended run, all that were raised. */
  readonly alarms: { readonly high: number; readonly medium: number; readonly low: number; readonly unacknowledged: number }
  /** The segment furthest above clean with a fouling alarm; null when none has one. */
  readonly fouling: { readonly segment: string; readonly ratio: number | null } | null
  /** Progress of an import, 0 to 1. */
  readonly progress: number | null
}

/** `GET /api/runs/:run`. */
export interface RunDetail extends RunRow {
  readonly skidFacts: SkidFacts
  readonly toolVersion: string
  readonly cautions: readonly string[]
}
