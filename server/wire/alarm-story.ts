import type { AlarmRow } from './alarm.ts'

/** One line of what happened, for people. */
export interface StoryLine {
  readonly tMs: number
  /** alarm: raised, cleared, suppressed …; comment, change (of a limit or setting), act: by a person; note: the tool remarked something. */
  readonly what: 'alarm' | 'comment' | 'change' | 'act' | 'note'
  /** The alarm it is about; null where it is about none. */
  readonly alarm: number | null
  readonly text: string
  readonly person: string | null
}

/** `GET /api/runs/:run/alarms/:alarm/before`: what led to an alarm (USR-08). */
export interface AlarmStory {
  readonly alarm: AlarmRow
  /** First of the alarms that came within 10 min of each other and led to this one; this one itself where it came alone. */
  readonly firstOut: AlarmRow
  readonly fromMs: number
  readonly toMs: number
  /** Of the 30 min before the raise, oldest first, the raise last. */
  readonly lines: readonly StoryLine[]
}

/** `GET /api/runs/:run/hand-over?fromMs&toMs`: what the next shift must know, as at `toMs`. */
export interface HandOver {
  readonly run: number
  readonly fromMs: number
  readonly toMs: number
  readonly production: boolean
  readonly segments: readonly {
    readonly segment: string
    readonly ratio: number | null
    readonly limitFromMs: number | null
    readonly limitToMs: number | null
  }[]
  /** Active or not acknowledged; shelved; suppressed by stated logic; out of service. */
  readonly open: readonly AlarmRow[]
  readonly shelved: readonly AlarmRow[]
  readonly suppressed: readonly AlarmRow[]
  readonly outOfService: readonly AlarmRow[]
  /** Raised during the shift, by priority, and what is over of it. */
  readonly raised: { readonly high: number; readonly medium: number; readonly low: number; readonly over: number }
  /** The latest step of each segment that is in a flush not ended or aborted. */
  readonly flush: readonly {
    readonly segment: string
    readonly step: string
    readonly state: string
    readonly atMs: number
    readonly person: string
  }[]
  readonly advice: readonly {
    readonly atMs: number
    readonly action: string
    readonly segments: readonly string[]
    readonly reason: string
  }[]
  /** Stretches in which no tag read anything, to `gapStepMs`. */
  readonly gaps: readonly { readonly fromMs: number; readonly toMs: number }[]
  readonly gapStepMs: number
  readonly badTags: readonly { readonly tag: string; readonly reason: string | null }[]
  readonly changes: readonly StoryLine[]
  readonly comments: readonly StoryLine[]
}
