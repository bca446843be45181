import type { AlarmRow } from '../../server/wire/index.ts'

/** More than so many annunciations in ten minutes is a flood; fewer than the second number ends it (ISA-18.2 cl. 16, from memory). */
export const floodOver = 10
export const floodUnder = 5
export const floodWindowMs = 600_000

/** Whether a flood is on, given whether it was: a band between both numbers so that the screen does not flicker. */
export function inFlood(alarms: readonly AlarmRow[], nowMs: number, was: boolean): boolean {
  const recent = alarms.filter((a) => nowMs - a.raisedMs < floodWindowMs).length
  return recent > floodOver || (was && recent >= floodUnder)
}

/** The first alarm of the flood: the oldest one of its window. */
export const firstOut = (alarms: readonly AlarmRow[], nowMs: number): AlarmRow | null =>
  alarms.reduce<AlarmRow | null>(
    (first, a) =>
      nowMs - a.raisedMs < floodWindowMs &&
      (first === null || a.raisedMs < first.raisedMs || (a.raisedMs === first.raisedMs && a.id < first.id))
        ? a
        : first,
    null,
  )

const newestFirst = (a: AlarmRow, b: AlarmRow): number => b.raisedMs - a.raisedMs || b.id - a.id

/**
 * Ids in the order shown: newest on top. While `held` (somebody points at the list or is inside it) rows already there keep their place and
 * new ones go below, so that nothing moves under the hand; gone ones leave their place only when let go.
 */
export function orderOf(alarms: readonly AlarmRow[], shown: readonly number[], held: boolean): number[] {
  const sorted = [...alarms].sort(newestFirst).map((a) => a.id)
  if (!held) return sorted
  const kept = new Set(shown)
  return [...shown, ...sorted.filter((id) => !kept.has(id))]
}

/** Counts for the foot. */
export function countsOf(alarms: readonly AlarmRow[]) {
  const by = {
    high: { n: 0, unack: 0, active: 0 },
    medium: { n: 0, unack: 0, active: 0 },
    low: { n: 0, unack: 0, active: 0 },
  }
  let shelved = 0
  let outOfService = 0
  for (const a of alarms) {
    if (a.state === 'SHELVED' || a.state === 'SBD') shelved++
    else if (a.state === 'OOS') outOfService++
    else if (a.active || a.needsAck || a.state === 'LACKED') {
      by[a.priority].n++
      if (a.needsAck) by[a.priority].unack++
      if (a.active) by[a.priority].active++
    }
  }
  return { ...by, shelved, outOfService }
}

/** An alarm as it stood at a moment of a stored run: what came later is not known yet. */
export function asAt(a: AlarmRow, tMs: number): AlarmRow {
  const clearedMs = a.clearedMs !== null && a.clearedMs <= tMs ? a.clearedMs : null
  const owned = a.acknowledgedMs !== null && a.acknowledgedMs <= tMs
  const active = clearedMs === null
  return {
    ...a,
    clearedMs,
    active,
    state: active ? (owned ? 'ACKED' : 'UNACK') : owned ? 'NORM' : 'RTNUN',
    needsAck: !owned,
    acknowledgedMs: owned ? a.acknowledgedMs : null,
    acknowledgedBy: owned ? a.acknowledgedBy : null,
    shelvedUntilMs: null,
  }
}
