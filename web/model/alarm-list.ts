import type { AlarmRow, LiveState } from '../../server/wire/index.ts'

const weight = { high: 3, medium: 2, low: 1 } as const

/** In a flood two alarms are pinned and labelled (ALM-14): the one it began with, and the most urgent that nobody has acknowledged, the oldest of them. */
export function pinnedOf(
  alarms: readonly AlarmRow[],
  flood: LiveState['flood'],
): { readonly first: number; readonly top: number | null } | null {
  if (flood === null) return null
  const owed = alarms.filter((a) => a.state === 'UNACK')
  owed.sort((a, b) => weight[b.priority] - weight[a.priority] || a.raisedMs - b.raisedMs || a.id - b.id)
  return { first: flood.first.id, top: owed[0]?.id ?? null }
}

const newestFirst = (a: AlarmRow, b: AlarmRow): number => b.raisedMs - a.raisedMs || b.id - a.id

/**
 * Ids in the order shown: pinned ones first, then newest on top. While `held` (somebody points at the list or is inside it) rows already there
 * keep their place and new ones go below, so that nothing moves under the hand; pins are set and gone ones leave only when let go.
 */
export function orderOf(
  alarms: readonly AlarmRow[],
  shown: readonly number[],
  held: boolean,
  pinned: readonly number[] = [],
): number[] {
  const sorted = [...alarms].sort(newestFirst).map((a) => a.id)
  if (!held) return [...pinned, ...sorted.filter((id) => !pinned.includes(id))]
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
  let suppressed = 0
  let outOfService = 0
  for (const a of alarms) {
    if (a.state === 'SHELVED') shelved++
    else if (a.state === 'SBD') suppressed++
    else if (a.state === 'OOS') outOfService++
    else if (a.active || a.needsAck || a.state === 'LACKED') {
      by[a.priority].n++
      if (a.needsAck) by[a.priority].unack++
      if (a.active) by[a.priority].active++
    }
  }
  return { ...by, shelved, suppressed, outOfService }
}

/**
 * The alarms raised up to a moment of a stored run, as they stood then: by the state of that moment where it is known (it knows what was shelved, suppressed or out of
 * service), else by their times alone.
 */
export function knownAt(all: readonly AlarmRow[], tMs: number, state: Pick<LiveState, 'alarms' | 'clock'> | null): AlarmRow[] {
  const exact = state !== null && state.clock.nowMs === Math.round(tMs) ? new Map(state.alarms.map((a) => [a.id, a])) : null
  return all
    .filter((a) => a.raisedMs <= tMs)
    .map((a) => {
      const then = asAt(a, tMs)
      return exact === null ? then : (exact.get(a.id) ?? { ...then, state: 'NORM', needsAck: false })
    })
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
    aside: null,
  }
}
