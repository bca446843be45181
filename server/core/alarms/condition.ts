import type { InputKind } from './alarm-state.ts'

/** Where a value stands against its limit: beyond it, back beyond the deadband, between the two, or not known. */
export type Level = 'over' | 'between' | 'under' | 'bad'

/**
 * Level of a value against a limit with a deadband, both in the unit of the value; `side` says which way is bad. At the limit itself is
 * not over; at the far edge of the deadband is not yet under. A null value is 'bad'.
 */
export function level(value: number | null, limit: number, deadband: number, side: 'high' | 'low'): Level {
  if (value === null || !Number.isFinite(value)) return 'bad'
  const beyond = side === 'high' ? value - limit : limit - value
  return beyond > 0 ? 'over' : beyond < -deadband || (deadband === 0 && beyond <= 0) ? 'under' : 'between'
}

export interface Delays {
  readonly onDelayS: number
  readonly offDelayS: number
}

export interface ConditionState {
  readonly active: boolean
  readonly bad: boolean
  /** Since when it has been without a break the opposite of `active`, ms; null when it is not. */
  readonly sinceMs: number | null
}

export const idle: ConditionState = { active: false, bad: false, sinceMs: null }

/**
 * From levels to act and clr. act when over at every sample for the whole on-delay, clr when under at every sample for the whole off-delay,
 * in sequence time. A delay is completed by a sample, never by the clock alone: one sample over the limit is no alarm whatever the interval
 * (ALM-12), unless the on-delay is 0. A bad input freezes and drops what was pending; good again, the full delays start afresh (ALM-06).
 * Returns the inputs for the alarm machine, in its order.
 */
export function stepCondition(
  s: ConditionState,
  tMs: number,
  now: Level,
  delays: Delays,
): { state: ConditionState; inputs: readonly Extract<InputKind, 'act' | 'clr' | 'qbad' | 'qgood'>[] } {
  if (now === 'bad')
    return s.bad ? { state: s, inputs: none } : { state: { active: s.active, bad: true, sinceMs: null }, inputs: ['qbad'] }
  const opposite = s.active ? 'under' : 'over'
  if (now !== opposite) {
    if (!s.bad && s.sinceMs === null) return { state: s, inputs: none }
    return { state: { active: s.active, bad: false, sinceMs: null }, inputs: s.bad ? ['qgood'] : none }
  }
  const sinceMs = s.sinceMs ?? tMs
  const delayMs = 1000 * (s.active ? delays.offDelayS : delays.onDelayS)
  const first = s.bad ? (['qgood'] as const) : none
  if (tMs - sinceMs < delayMs) return { state: { active: s.active, bad: false, sinceMs }, inputs: first }
  return { state: { active: !s.active, bad: false, sinceMs: null }, inputs: [...first, s.active ? 'clr' : 'act'] }
}

const none = [] as const
