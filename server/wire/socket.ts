import type { ActRow } from './act.ts'
import type { AlarmRow } from './alarm.ts'
import type { LiveState, LiveUpdate } from './live.ts'
import type { RunRow } from './run.ts'
import type { Problem, RunClock } from './service.ts'
import type { ReadingFrame, StepPoint } from './trend.ts'

/** Websocket at `/ws`; text frames of JSON, one message a frame. */
export type ClientMessage =
  /**
   * Answered by a `snapshot`, then a `delta` whenever something is new. `sinceMs`: time of the run up to which the page has steps and
   * readings already (null: none wanted); the snapshot brings what came after, so that a page that was cut off has no gap.
   */
  | { readonly type: 'subscribe'; readonly run: number; readonly topics: readonly Topic[]; readonly sinceMs: number | null }
  | { readonly type: 'unsubscribe'; readonly run: number }

/** state: the LiveState, without what has not changed (merge it over the last one). steps, readings: new points of trends. alarms: occurrences that changed. acts: what people did. */
export type Topic = 'state' | 'steps' | 'readings' | 'alarms' | 'acts'

export type ServerMessage =
  | { readonly type: 'hello'; readonly api: 1; readonly version: string; readonly runs: readonly RunRow[] }
  | Snapshot
  | Delta
  /** Each second of the wall clock. None for two seconds: the page is cut off. */
  | { readonly type: 'heartbeat'; readonly wallMs: number; readonly runs: readonly Beat[] }
  /** The list of runs changed. */
  | { readonly type: 'runs'; readonly runs: readonly RunRow[] }
  | { readonly type: 'error'; readonly problem: Problem }

/** Replaces what the page knows of the run. Comes after subscribe, and in place of deltas that a slow page could not take. */
export interface Snapshot {
  readonly type: 'snapshot'
  readonly run: number
  /** Number of the last delta it holds; the next delta is `seq` + 1. */
  readonly seq: number
  readonly state: LiveState
  /** After `sinceMs`, at most the latest 2000 of each; `moreFromMs` is where the page must fetch trends over HTTP from, null when whole. */
  readonly steps: readonly StepPoint[]
  readonly readings: readonly ReadingFrame[]
  readonly moreFromMs: number | null
}

/** Numbered without a hole from the snapshot on; a page that sees a hole subscribes again. Absent parts: nothing new or not subscribed. */
export interface Delta {
  readonly type: 'delta'
  readonly run: number
  readonly seq: number
  readonly state?: LiveUpdate
  readonly steps?: readonly StepPoint[]
  readonly readings?: ReadingFrame
  readonly alarms?: readonly AlarmRow[]
  readonly acts?: readonly ActRow[]
}

export interface Beat {
  readonly run: number
  readonly clock: RunClock
  readonly lastRowMs: number | null
}
