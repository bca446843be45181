import type { Priority } from '../report.ts'
import type { Act } from '../sequence.ts'
import {
  type AlarmRecord,
  type AlarmState,
  type AlarmStateName,
  type Context,
  type Input,
  isSuppressed,
  normal,
  type Policy,
  stateName,
} from './alarm-state.ts'
import { type ConditionState, idle, type Level, stepCondition } from './condition.ts'
import { transition } from './machine.ts'
import { type AlarmChange, type Occurrence, raise, type Signal } from './occurrence.ts'

interface Entry {
  machine: AlarmState
  condition: ConditionState
  /** The latest occurrence; open while `clearedMs` is null. */
  occurrence: Occurrence | null
  policy: Policy
  priority: Priority
  ackedMs: number | null
}

/** Plain JSON; `createBook(config, state)` goes on where it stood. */
export interface BookState {
  nextId: number
  readonly entries: Record<string, Entry>
}

export interface BookConfig {
  readonly configVersion: string
  /** The same as a number, for occurrences. */
  readonly version?: number
  /** What the class of an alarm allows; `defaultPolicy` unless the rationalisation says otherwise. */
  readonly policyOf?: (key: string, priority: Priority) => Policy
  /** Re-annunciate an acknowledged alarm still active after so long, s; off by default. */
  readonly reAlarmS?: number
}

/** A row of the alarm list. */
export interface AlarmRow {
  readonly key: string
  readonly state: AlarmStateName
  readonly active: boolean
  readonly badInput: boolean
  readonly shelvedUntilMs: number | null
  readonly suppressedBy: string | null
  readonly priority: Priority
  readonly occurrence: Occurrence | null
}

/** High alarms cannot be shelved, others 30 min at once and one shift of 8 h in all; a reason has at least 5 characters. */
export const defaultPolicy = (priority: Priority, latching = false): Policy => ({
  latching,
  shelveMaxS: priority === 'high' ? 0 : 1800,
  shelveCapS: 28_800,
  reasonMin: 5,
})

const nothing = { changes: [], records: [] } as const

export type AlarmBook = ReturnType<typeof createBook>

/**
 * The alarms of one run, by key, in sequence time. Detectors signal every scan, people act, the clock ticks; what follows is collected as
 * changes of occurrences (ids 1, 2, 3 … in the order raised) and as journal records, until `drain` takes them.
 * The entries change in place (a signal comes for every alarm at every scan); what they hold is replaced, never changed.
 */
export function createBook(config: BookConfig, from: BookState = { nextId: 1, entries: {} }) {
  const state: BookState = { nextId: from.nextId, entries: from.entries }
  const entries = new Map(Object.entries(from.entries))
  const policyOf = config.policyOf ?? ((_key: string, priority: Priority) => defaultPolicy(priority))
  let changes: AlarmChange[] = []
  let records: AlarmRecord[] = []

  const entryOf = (key: string, priority: Priority): Entry => {
    const found = entries.get(key)
    if (found !== undefined) return found
    const made: Entry = {
      machine: normal,
      condition: idle,
      occurrence: null,
      policy: policyOf(key, priority),
      priority,
      ackedMs: null,
    }
    entries.set(key, made)
    state.entries[key] = made
    return made
  }
  const change = (entry: Entry, kind: AlarmChange['kind'], tMs: number, occurrence: Occurrence) => {
    entry.occurrence = occurrence
    changes.push({ kind, tMs, occurrence })
  }
  const put = (
    key: string,
    entry: Entry,
    input: Input,
    tMs: number,
    figures: Pick<Context, 'value' | 'limit' | 'unit'>,
  ): AlarmRecord[] => {
    const context: Context = {
      tMs,
      key,
      alarm: entry.occurrence?.id ?? null,
      policy: entry.policy,
      priority: entry.priority,
      configVersion: config.configVersion,
      ...figures,
    }
    const out = transition(entry.machine, input, context)
    entry.machine = out.state
    records.push(...out.records)
    const open = entry.occurrence
    for (const r of out.records) {
      if (r.outcome !== 'moved') continue
      if (r.to === 'ACKED') entry.ackedMs = tMs
      if (r.sound && input.kind !== 'act' && open !== null && !open.annunciated)
        change(entry, 'annunciated', tMs, { ...open, annunciated: true })
    }
    return out.records
  }
  const none = { value: null, limit: null, unit: null }

  return {
    /** One scan's word on one alarm. Quiet and cheap while nothing changes. */
    signal(s: Signal): void {
      const known = entries.get(s.key)
      if (known === undefined && s.over === false) return
      const entry = known ?? entryOf(s.key, s.priority)
      const now: Level = s.over === null ? 'bad' : s.over ? 'over' : (s.under ?? true) ? 'under' : 'between'
      const step = stepCondition(entry.condition, s.tMs, now, s)
      entry.condition = step.state
      for (const kind of step.inputs) {
        if (kind === 'act') {
          // Priority and class are those of the occurrence: a later, more urgent one may outrank an earlier one.
          entry.priority = s.priority
          entry.policy = policyOf(s.key, s.priority)
          change(entry, 'raised', s.tMs, raise(s, state.nextId++, !isSuppressed(entry.machine), config.version ?? 0))
        }
        put(s.key, entry, { kind }, s.tMs, s)
        if (kind === 'clr' && entry.occurrence !== null) change(entry, 'cleared', s.tMs, { ...entry.occurrence, clearedMs: s.tMs })
      }
    },

    /** What has been learnt since about an alarm still active: cause, onset, evidence. False where the alarm is not active. */
    amend(key: string, tMs: number, more: Partial<Pick<Occurrence, 'cause' | 'onset' | 'evidence'>>): boolean {
      const entry = entries.get(key)
      const open = entry?.occurrence ?? null
      if (entry === undefined || open === null || open.clearedMs !== null) return false
      change(entry, 'amended', tMs, { ...open, ...more })
      return true
    },

    /** What a person asks of an alarm, by its id. Returns the records it left, a refusal with its reason included. Other acts leave none. */
    act(act: Act): AlarmRecord[] {
      if (act.kind === 'out-of-service' || act.kind === 'in-service') {
        const kind = act.kind === 'out-of-service' ? 'oos+' : 'oos-'
        // Out of service before it ever alarmed: its priority is that of its first signal.
        return put(act.key, entryOf(act.key, 'medium'), { kind, person: act.person, reason: act.reason }, act.tMs, none)
      }
      if (act.kind === 'comment' ? act.alarm === null : !('alarm' in act)) return []
      const id = (act as { alarm: number }).alarm
      const found = [...entries].find(([, e]) => e.occurrence?.id === id)
      if (act.kind === 'comment' || found === undefined) {
        const text = act.kind === 'comment' ? act.text : `alarm ${id} is not the latest of its kind, or unknown`
        const made = note(config.configVersion, act, id, found, text)
        records.push(made)
        return [made]
      }
      const [key, entry] = found
      if (act.kind === 'reset' && act.reason !== undefined && act.reason.trim().length < entry.policy.reasonMin) {
        const made = note(
          config.configVersion,
          act,
          id,
          found,
          `a reason of at least ${entry.policy.reasonMin} characters is required`,
        )
        records.push(made)
        return [made]
      }
      const input = inputOf(act)
      return input === null ? [] : put(key, entry, input, act.tMs, none)
    },

    /** Suppression by design: `logic` names the rule, evaluated by the caller at every scan; off again as soon as it is false (ALM-09). */
    suppress(key: string, priority: Priority, logic: string, on: boolean, tMs: number): void {
      const entry = on ? entryOf(key, priority) : entries.get(key)
      if (entry !== undefined && (on ? entry.machine.sbd === null : entry.machine.sbd === logic)) {
        put(key, entry, { kind: on ? 'sbd+' : 'sbd-', logic }, tMs, none)
      }
    },

    /** Suppression by design of every alarm the book holds: `by` names the logic that holds for one now, null for none. */
    design(by: (kind: string, segment: string | null) => string | null, tMs: number): void {
      for (const [key, entry] of entries) {
        const [kind = '', segment = null] = key.split(':')
        const logic = by(entry.occurrence?.kind ?? kind, entry.occurrence === null ? segment : entry.occurrence.segment)
        const { sbd } = entry.machine
        if (logic !== null && sbd === null) put(key, entry, { kind: 'sbd+', logic }, tMs, none)
        if (logic === null && sbd !== null) put(key, entry, { kind: 'sbd-', logic: sbd }, tMs, none)
      }
    },

    /** The clock: shelves that have run out, re-alarms that are due. Delays wait for readings. */
    tick(tMs: number): void {
      let waits = false
      for (const e of entries.values()) if (e.machine.shelved !== null || e.ackedMs !== null) waits = true
      if (!waits) return
      for (const [key, entry] of entries) {
        const { machine } = entry
        if (machine.shelved !== null && tMs >= machine.shelved.untilMs)
          put(key, entry, { kind: 'uns', logic: 'shelf time over' }, tMs, none)
        const due = config.reAlarmS !== undefined && entry.ackedMs !== null && tMs - entry.ackedMs >= config.reAlarmS * 1000
        if (due && machine.base === 'ACKED') put(key, entry, { kind: 'rea', logic: 're-alarm timer' }, tMs, none)
      }
    },

    /** A record for each alarm that the monitor went on after a restart; their states are as they were. */
    restart(tMs: number): void {
      for (const [key, entry] of entries) put(key, entry, { kind: 'restart' }, tMs, none)
    },

    /** Takes what has happened since the last call, in order. */
    drain(): { readonly changes: readonly AlarmChange[]; readonly records: readonly AlarmRecord[] } {
      if (changes.length === 0 && records.length === 0) return nothing
      const out = { changes, records }
      changes = []
      records = []
      return out
    },

    /**
     * Whether a signal would change anything, or keep anything pending: saves making one. What was never over, and what is back to normal,
     * says nothing by being not over; a bad input is news once, of an alarm the book holds.
     */
    hears(key: string, over: boolean | null): boolean {
      if (over === true) return true
      const c = entries.get(key)?.condition
      if (c === undefined) return false
      return over === null ? !c.bad : c.active || c.bad || c.sinceMs !== null
    },

    isActive: (key: string): boolean => entries.get(key)?.machine.active ?? false,

    /** Every alarm that is not plainly normal, in the order first seen. */
    rows(): AlarmRow[] {
      const out: AlarmRow[] = []
      for (const [key, { machine, occurrence, priority }] of entries) {
        const name = stateName(machine)
        if (name === 'NORM' && !machine.bad) continue
        const shelvedUntilMs = machine.shelved?.untilMs ?? null
        out.push({
          key,
          state: name,
          active: machine.active,
          badInput: machine.bad,
          shelvedUntilMs,
          suppressedBy: machine.sbd,
          priority,
          occurrence,
        })
      }
      return out
    },

    /** Plain JSON of everything but what waits to be drained; live, so write it out before the next call. */
    state: (): BookState => state,
  }
}

function inputOf(act: Act): Input | null {
  switch (act.kind) {
    case 'acknowledge':
      return { kind: 'ack', person: act.person }
    case 'reset':
      return { kind: 'rst', person: act.person, ...(act.reason === undefined ? {} : { reason: act.reason }) }
    case 'shelve':
      return { kind: 'shv', person: act.person, reason: act.reason, durationS: act.minutes * 60 }
    case 'unshelve':
      return { kind: 'uns', person: act.person, reason: act.reason }
    default:
      return null
  }
}

/** A record that moves nothing: a comment, or a request about an alarm that is not there. */
function note(configVersion: string, act: Act, alarm: number, found: [string, Entry] | undefined, reason: string): AlarmRecord {
  const name = found === undefined ? 'NORM' : stateName(found[1].machine)
  return {
    alarm,
    key: found?.[0] ?? '',
    tMs: act.tMs,
    from: name,
    to: name,
    input: act.kind === 'comment' ? 'comment' : (inputOf(act)?.kind ?? 'comment'),
    outcome: act.kind === 'comment' ? 'marked' : 'refused',
    sound: false,
    priority: found?.[1].priority ?? 'low',
    configVersion,
    value: null,
    limit: null,
    unit: null,
    quality: found?.[1].machine.bad === true ? 'bad' : 'good',
    person: act.person,
    logic: null,
    reason,
    durationS: null,
    oneShot: false,
  }
}
