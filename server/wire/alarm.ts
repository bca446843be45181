import type { AlarmStateName, InputKind, Outcome } from '../core/alarms/alarm-state.ts'
import type { AlarmKind, Cause, OnsetReport, Priority } from '../core/report.ts'

/** One occurrence of an alarm. `GET /api/runs/:run/alarms` lists them, oldest first. */
export interface AlarmRow {
  readonly id: number
  /** One alarm for one thing; occurrences of the same alarm share it. */
  readonly key: string
  readonly kind: AlarmKind
  readonly priority: Priority
  readonly segment: string | null
  readonly tag: string | null
  /** State of the alarm this occurrence belongs to; of an earlier occurrence NORM. */
  readonly state: AlarmStateName
  /** The condition is there now. */
  readonly active: boolean
  readonly needsAck: boolean
  /** Its input is bad: the condition is frozen. */
  readonly badInput: boolean
  readonly raisedMs: number
  readonly clearedMs: number | null
  readonly acknowledgedMs: number | null
  readonly acknowledgedBy: string | null
  readonly shelvedUntilMs: number | null
  /** Why nobody is called though the alarm may be active; null while it is not put aside. */
  readonly aside: Aside | null
  /** Longest shelving at once, min; 0: an alarm of this class may not be shelved. */
  readonly shelveMaxMin: number
  readonly value: number | null
  readonly limit: number | null
  readonly unit: string | null
  readonly message: string
  readonly cause: Cause | null
  readonly onset: OnsetReport | null
  readonly detector: string
  readonly evidence: {
    readonly for: readonly string[]
    readonly against: readonly string[]
    readonly notExcluded: readonly string[]
  }
  /** What the operator may do and should know (ALM-02); null where the tool has no text. */
  readonly help: AlarmHelp | null
}

/** Shelved or out of service by a person with a reason, or suppressed by a logic with a name. */
export interface Aside {
  readonly sinceMs: number
  readonly person: string | null
  readonly logic: string | null
  readonly reason: string | null
}

export interface AlarmHelp {
  readonly title: string
  readonly causes: string
  readonly consequence: string
  readonly check: string
  readonly action: string
  readonly timeToRespondS: number
  readonly review: string
}

/** One line of the alarm journal; `GET /api/runs/:run/transitions`. */
export interface TransitionRow {
  readonly alarm: number | null
  readonly key: string
  readonly tMs: number
  readonly from: AlarmStateName
  readonly to: AlarmStateName
  readonly input: InputKind | 'comment'
  readonly outcome: Outcome
  readonly sound: boolean
  readonly priority: Priority
  readonly value: number | null
  readonly limit: number | null
  readonly unit: string | null
  readonly person: string | null
  readonly logic: string | null
  readonly reason: string | null
}
