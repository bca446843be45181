import type { Priority } from '../report.ts'

/** States that an alarm has when nothing suppresses it. */
const baseStates = ['NORM', 'UNACK', 'ACKED', 'RTNUN', 'LUNACK', 'LACKED'] as const
export type BaseState = (typeof baseStates)[number]
/** All states by name: normal; active unacknowledged, acknowledged; returned unacknowledged; latched unacknowledged, acknowledged; suppressed. */
export const alarmStates = [...baseStates, 'SHELVED', 'SBD', 'OOS'] as const
export type AlarmStateName = (typeof alarmStates)[number]

/** Inputs in the fixed order in which simultaneous ones are applied: quality, condition, logic, person. */
export const inputKinds = [
  'restart',
  'qbad',
  'qgood',
  'act',
  'clr',
  'rea',
  'sbd+',
  'sbd-',
  'oos+',
  'oos-',
  'shv',
  'uns',
  'ack',
  'rst',
] as const
export type InputKind = (typeof inputKinds)[number]

export interface Input {
  readonly kind: InputKind
  /** Who asked; required for ack, rst, shv, oos+, oos-, and for uns unless a timer did it. */
  readonly person?: string
  /** Named logic; required for sbd+ and sbd-, and for a timed uns. */
  readonly logic?: string
  /** Required for shv, oos+, oos- and an unshelving by a person. */
  readonly reason?: string
  /** shv: for how long, s. */
  readonly durationS?: number
  /** shv: end also when the condition clears. */
  readonly oneShot?: boolean
}

/** What the class of an alarm allows. */
export interface Policy {
  readonly latching: boolean
  /** Longest shelving asked for at once, s; 0 means not shelvable. */
  readonly shelveMaxS: number
  /** Longest shelving in all, extensions included, s. */
  readonly shelveCapS: number
  /** Fewest characters of a reason. */
  readonly reasonMin: number
}

export interface AlarmState {
  /** State before the suppressions in force, or the state itself when there are none. */
  readonly base: BaseState
  /** The condition as last told by act or clr. */
  readonly active: boolean
  /** The input is bad: the condition is frozen. */
  readonly bad: boolean
  readonly shelved: { readonly sinceMs: number; readonly untilMs: number; readonly oneShot: boolean } | null
  /** Name of the logic that suppresses it by design. */
  readonly sbd: string | null
  readonly oos: boolean
  /** While suppressed: active at any time since just before. */
  readonly wasActive: boolean
  /** While suppressed: logic took it away from the operator unacknowledged. */
  readonly owed: boolean
}

/** What surrounds an input: when, which alarm, and the figures of that moment. */
export interface Context {
  readonly tMs: number
  readonly alarm: number | null
  readonly key: string
  readonly policy: Policy
  readonly priority: Priority
  readonly configVersion: string
  readonly value: number | null
  readonly limit: number | null
  readonly unit: string | null
}

/** moved: another state; annunciated again; tracked: under suppression; marked: quality, extension, restart, comment; refused: nothing changed. */
export type Outcome = 'moved' | 'tracked' | 'marked' | 'refused'

/** One line of the alarm journal (ALM-10). The store adds the time of recording. */
export interface AlarmRecord {
  readonly alarm: number | null
  readonly key: string
  readonly tMs: number
  readonly from: AlarmStateName
  readonly to: AlarmStateName
  readonly input: InputKind | 'comment'
  readonly outcome: Outcome
  /** The operator is called: flash and sound. */
  readonly sound: boolean
  readonly priority: Priority
  /** Skid and version of the settings in force: `heron/3`. */
  readonly configVersion: string
  readonly value: number | null
  readonly limit: number | null
  readonly unit: string | null
  readonly quality: 'good' | 'bad'
  readonly person: string | null
  readonly logic: string | null
  readonly reason: string | null
  readonly durationS: number | null
  readonly oneShot: boolean
}

export const normal: AlarmState = {
  base: 'NORM',
  active: false,
  bad: false,
  shelved: null,
  sbd: null,
  oos: false,
  wasActive: false,
  owed: false,
}

/** The state shown: OOS before SBD before SHELVED before the alarm's own. */
export const stateName = (s: AlarmState): AlarmStateName =>
  s.oos ? 'OOS' : s.sbd !== null ? 'SBD' : s.shelved !== null ? 'SHELVED' : s.base
export const isSuppressed = (s: AlarmState): boolean => s.oos || s.sbd !== null || s.shelved !== null
