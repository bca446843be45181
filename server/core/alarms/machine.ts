import {
  type AlarmRecord,
  type AlarmState,
  type Context,
  type Input,
  isSuppressed,
  type Outcome,
  type Policy,
  stateName,
} from './alarm-state.ts'

interface Step {
  readonly state: AlarmState
  readonly outcome: Outcome | null
  readonly sound?: boolean
  readonly why?: string
}
const ignored = (state: AlarmState): Step => ({ state, outcome: null })
const refused = (state: AlarmState, why: string): Step => ({ state, outcome: 'refused', why })

/**
 * One input on one alarm: the state after it and its journal record, none where the input changes nothing and no person asked.
 *
 * The table is ANSI/ISA-18.2-2016 / IEC 62682 (state names from memory; latched and shelved behaviour after OPC 10000-9 cl. 5.8). While
 * the input is bad, act and clr are ignored: a bad input neither sets nor clears (ALM-06). The release rule is `release`.
 * Errors: none; what is not allowed comes back as a record with outcome 'refused' and the reason why.
 */
export function transition(state: AlarmState, input: Input, ctx: Context): { state: AlarmState; records: AlarmRecord[] } {
  const step = apply(state, input, ctx)
  if (step.outcome === null) return { state, records: [] }
  return { state: step.state, records: [record(state, step, input, ctx)] }
}

function record(from: AlarmState, step: Step, input: Input, ctx: Context): AlarmRecord {
  return {
    alarm: ctx.alarm,
    key: ctx.key,
    tMs: ctx.tMs,
    from: stateName(from),
    to: stateName(step.state),
    input: input.kind,
    outcome: step.outcome as Outcome,
    sound: step.sound ?? false,
    priority: ctx.priority,
    configVersion: ctx.configVersion,
    value: ctx.value,
    limit: ctx.limit,
    unit: ctx.unit,
    quality: step.state.bad ? 'bad' : 'good',
    person: input.person ?? null,
    logic: input.logic ?? null,
    reason:
      step.why === undefined
        ? (input.reason ?? null)
        : input.reason === undefined
          ? step.why
          : `${step.why} (asked: ${input.reason})`,
    durationS: input.durationS ?? null,
    oneShot: input.oneShot ?? false,
  }
}

function apply(s: AlarmState, input: Input, { tMs, policy }: Context): Step {
  const named = (input.person ?? '').trim() !== ''
  const reasoned = (input.reason ?? '').trim().length >= policy.reasonMin
  const needs = `a reason of at least ${policy.reasonMin} characters is required`
  switch (input.kind) {
    case 'restart':
      return { state: s, outcome: 'marked' }
    case 'qbad':
      return s.bad ? ignored(s) : { state: { ...s, bad: true }, outcome: 'marked' }
    case 'qgood':
      return s.bad ? { state: { ...s, bad: false }, outcome: 'marked' } : ignored(s)
    case 'act':
      if (s.active || s.bad) return ignored(s)
      if (isSuppressed(s)) return { state: { ...s, active: true, wasActive: true }, outcome: 'tracked' }
      return { state: { ...s, base: 'UNACK', active: true }, outcome: 'moved', sound: true }
    case 'clr':
      return s.active && !s.bad ? clear(s, policy) : ignored(s)
    case 'rea':
      return s.base === 'ACKED' && !isSuppressed(s) ? { state: { ...s, base: 'UNACK' }, outcome: 'moved', sound: true } : ignored(s)
    case 'ack':
      if (!named) return refused(s, 'only an identified person acknowledges')
      return acknowledge(s)
    case 'rst':
      if (!named) return refused(s, 'only an identified person resets')
      if (isSuppressed(s)) return refused(s, `not while ${stateName(s)}`)
      if (s.active) return refused(s, 'still active')
      if (s.base === 'LUNACK') return refused(s, 'acknowledge first')
      return s.base === 'LACKED' ? { state: { ...s, base: 'NORM' }, outcome: 'moved' } : refused(s, 'nothing is latched')
    case 'shv':
      if (!named) return refused(s, 'only an identified person shelves')
      if (!reasoned) return refused(s, needs)
      return shelve(s, input, tMs, policy)
    case 'uns':
      if (s.shelved === null) return named ? refused(s, 'not shelved') : ignored(s)
      if (named && !reasoned) return refused(s, needs)
      if (!named && (input.logic ?? '') === '') return refused(s, 'only an identified person or the timer unshelves')
      return release({ ...s, shelved: null }, policy)
    case 'sbd+':
      if (s.sbd !== null) return ignored(s)
      if ((input.logic ?? '') === '') return refused(s, 'suppression by design needs the name of its logic')
      return { state: { ...suppress(s, true), sbd: input.logic as string }, outcome: 'moved' }
    case 'sbd-':
      return s.sbd === null ? ignored(s) : release({ ...s, sbd: null }, policy)
    case 'oos+':
      if (!named) return refused(s, 'only an authorised person takes out of service')
      if (!reasoned) return refused(s, needs)
      return s.oos ? refused(s, 'already out of service') : { state: { ...suppress(s, false), oos: true }, outcome: 'moved' }
    case 'oos-':
      if (!named) return refused(s, 'only an authorised person returns to service')
      if (!reasoned) return refused(s, needs)
      return s.oos ? release({ ...s, oos: false }, policy) : refused(s, 'not out of service')
  }
}

function clear(s: AlarmState, policy: Policy): Step {
  const state = { ...s, active: false }
  if (s.shelved?.oneShot === true) return release({ ...state, shelved: null }, policy)
  if (isSuppressed(s)) return { state, outcome: 'tracked' }
  if (s.base === 'UNACK') return { state: { ...state, base: policy.latching ? 'LUNACK' : 'RTNUN' }, outcome: 'moved' }
  return { state: { ...state, base: policy.latching ? 'LACKED' : 'NORM' }, outcome: 'moved' }
}

function acknowledge(s: AlarmState): Step {
  if (isSuppressed(s)) return refused(s, `not while ${stateName(s)}`)
  if (s.base === 'UNACK') return { state: { ...s, base: 'ACKED' }, outcome: 'moved' }
  if (s.base === 'RTNUN') return { state: { ...s, base: 'NORM' }, outcome: 'moved' }
  if (s.base === 'LUNACK') return { state: { ...s, base: 'LACKED' }, outcome: 'moved' }
  return refused(s, s.base === 'NORM' ? 'nothing to acknowledge' : 'already acknowledged')
}

function shelve(s: AlarmState, input: Input, tMs: number, policy: Policy): Step {
  const forS = input.durationS ?? 0
  if (s.oos) return refused(s, 'not while OOS')
  if (policy.shelveMaxS <= 0) return refused(s, 'this class may not be shelved')
  if (!(forS > 0)) return refused(s, 'a duration is required')
  if (forS > policy.shelveMaxS) return refused(s, `at most ${policy.shelveMaxS / 60} min at once`)
  const sinceMs = s.shelved?.sinceMs ?? tMs
  const untilMs = tMs + forS * 1000
  if (untilMs - sinceMs > policy.shelveCapS * 1000) return refused(s, `at most ${policy.shelveCapS / 3600} h in all`)
  const shelved = { sinceMs, untilMs, oneShot: input.oneShot ?? false }
  if (s.shelved !== null) return { state: { ...s, shelved }, outcome: 'marked' }
  return { state: { ...suppress(s, false), shelved }, outcome: 'moved' }
}

/** Remembers what the release rule needs, once, when the first suppression begins. */
function suppress(s: AlarmState, byLogic: boolean): AlarmState {
  if (isSuppressed(s)) return s
  return { ...s, wasActive: s.active, owed: byLogic && (s.base === 'UNACK' || s.base === 'RTNUN' || s.base === 'LUNACK') }
}

/**
 * The release rule ALM-05, after one suppression is taken off: another left → still suppressed; else active now → UNACK with sound,
 * even if acknowledged before; latching and active since just before → LUNACK; latched before → that state; unacknowledged when logic
 * took it away → RTNUN; else NORM.
 */
function release(s: AlarmState, policy: Policy): Step {
  if (isSuppressed(s)) return { state: s, outcome: 'moved' }
  const free = { ...s, wasActive: false, owed: false }
  if (s.active) return { state: { ...free, base: 'UNACK' }, outcome: 'moved', sound: true }
  if (policy.latching && s.wasActive) return { state: { ...free, base: 'LUNACK' }, outcome: 'moved' }
  if (s.base === 'LUNACK' || s.base === 'LACKED') return { state: free, outcome: 'moved' }
  return { state: { ...free, base: s.owed ? 'RTNUN' : 'NORM' }, outcome: 'moved' }
}
