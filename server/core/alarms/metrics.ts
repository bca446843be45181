import type { Priority } from '../report.ts'
import type { AlarmRecord } from './alarm-state.ts'
import { flood } from './flood.ts'

export interface MetricsOptions {
  /** Clears within so long without having been acted on and does not come again within ten minutes, s. */
  readonly fleetingS?: number
  readonly staleHours?: number
}

export interface AlarmMetrics {
  readonly fromMs: number
  readonly toMs: number
  readonly hours: number
  /** Records that the figures rest on. */
  readonly records: number
  /** Under 30 days: not a conformance statement. */
  readonly label: string | null
  readonly annunciated: number
  readonly ratePerHour: number
  /** Fixed clock windows of 10 min and 1 h that lie in the period, and those with more than 10 and 30. */
  readonly tenMinutes: { readonly windows: number; readonly over10: number; readonly most: number }
  readonly hoursOver30: { readonly windows: number; readonly over30: number }
  /** Sliding window: share of the time in flood, and the floods. */
  readonly floodShare: number
  readonly floods: readonly { readonly fromMs: number; readonly toMs: number; readonly count: number }[]
  readonly mostFrequent: readonly { readonly key: string; readonly count: number; readonly share: number }[]
  /** Share of the ten most frequent alarms. */
  readonly topTenShare: number
  readonly chattering: readonly { readonly key: string; readonly atMs: number }[]
  readonly fleeting: readonly { readonly key: string; readonly atMs: number; readonly lastedS: number }[]
  readonly stale: readonly { readonly key: string; readonly fromMs: number; readonly hours: number }[]
  readonly priorityShare: Readonly<Record<Priority, number>>
  /** Activations tracked under a suppression, not counted above. */
  readonly suppressed: readonly { readonly key: string; readonly count: number }[]
  /** Suppressions without a named person and reason, or without the name of a logic: there should be none. */
  readonly outsideProcedure: number
  readonly refused: number
}

/**
 * Performance of the alarm system over [fromMs, toMs), from the journal alone (ALM-13). `records` may begin before the period (what was active
 * then counts as stale where it lasts); order as journalled. Targets to hold against: about 1 annunciated alarm in 10 min, at most 10 in
 * any 10 min, under 1 % of the time in flood, fewer than 5 stale a day, no chattering or fleeting ones, 80/15/5 % low/medium/high.
 * Source: EEMUA 191 as quoted in the trade literature; ISA-18.2 cl. 16 (from memory). Errors: none; an empty period gives zeros.
 */
export function alarmMetrics(
  records: readonly AlarmRecord[],
  fromMs: number,
  toMs: number,
  options: MetricsOptions = {},
): AlarmMetrics {
  const inside = records.filter((r) => r.tMs >= fromMs && r.tMs < toMs)
  const calls = inside.filter((r) => r.sound)
  const hours = Math.max(0, toMs - fromMs) / 3.6e6
  const counts = countBy(calls.map((r) => r.key))
  const mostFrequent = counts.slice(0, 10).map(([key, count]) => ({ key, count, share: count / calls.length }))
  const ten = windows(calls, fromMs, toMs, 600_000)
  const hour = windows(calls, fromMs, toMs, 3_600_000)
  const floods = flood(
    calls.map((r) => r.tMs),
    toMs,
  )
  const flooded = floods.reduce((sum, f) => sum + f.toMs - f.fromMs, 0)
  const share = (p: Priority) => (calls.length === 0 ? 0 : calls.filter((r) => r.priority === p).length / calls.length)
  return {
    fromMs,
    toMs,
    hours,
    records: inside.length,
    label: hours < 720 ? 'short record – not a conformance statement' : null,
    annunciated: calls.length,
    ratePerHour: hours === 0 ? 0 : calls.length / hours,
    tenMinutes: {
      windows: ten.n,
      over10: ten.counts.filter((n) => n > 10).length,
      most: ten.counts.reduce((most, n) => Math.max(most, n), 0),
    },
    hoursOver30: { windows: hour.n, over30: hour.counts.filter((n) => n > 30).length },
    floodShare: toMs > fromMs ? flooded / (toMs - fromMs) : 0,
    floods,
    mostFrequent,
    topTenShare: mostFrequent.reduce((sum, m) => sum + m.share, 0),
    ...courses(records, fromMs, toMs, options.fleetingS ?? 10, options.staleHours ?? 24),
    priorityShare: { low: share('low'), medium: share('medium'), high: share('high') },
    suppressed: countBy(inside.filter((r) => r.input === 'act' && r.outcome === 'tracked').map((r) => r.key)).map(
      ([key, count]) => ({ key, count }),
    ),
    outsideProcedure: inside.filter(isOutside).length,
    refused: inside.filter((r) => r.outcome === 'refused').length,
  }
}

/** Most frequent first, then by name. */
function countBy(keys: readonly string[]): [string, number][] {
  const counts = new Map<string, number>()
  for (const key of keys) counts.set(key, (counts.get(key) ?? 0) + 1)
  return [...counts].sort((a, b) => b[1] - a[1] || (a[0] < b[0] ? -1 : 1))
}

/** The whole clock windows that lie in the period: how many there are, and how many calls those hold that hold any. A period may be asked for that is ages long. */
function windows(calls: readonly AlarmRecord[], fromMs: number, toMs: number, lengthMs: number): { n: number; counts: number[] } {
  const first = Math.ceil(fromMs / lengthMs)
  const end = Math.max(first, Math.floor(toMs / lengthMs))
  const counts = new Map<number, number>()
  for (const r of calls) {
    const at = Math.floor(r.tMs / lengthMs)
    if (at >= first && at < end) counts.set(at, (counts.get(at) ?? 0) + 1)
  }
  return { n: end - first, counts: [...counts.values()] }
}

function isOutside(r: AlarmRecord): boolean {
  if (r.outcome === 'refused') return false
  if (r.input === 'shv' || r.input === 'oos+') return r.person === null || r.reason === null
  return r.input === 'sbd+' && r.logic === null
}

/** Chattering, fleeting and stale alarms, from when each was active. */
function courses(records: readonly AlarmRecord[], fromMs: number, toMs: number, fleetingS: number, staleHours: number) {
  const chattering: { key: string; atMs: number }[] = []
  const fleeting: { key: string; atMs: number; lastedS: number }[] = []
  const stale: { key: string; fromMs: number; hours: number }[] = []
  for (const [key] of countBy(records.map((r) => r.key))) {
    const mine = records.filter((r) => r.key === key && r.outcome !== 'refused' && r.tMs < toMs)
    const spells: { fromMs: number; toMs: number | null; acted: boolean; seen: boolean }[] = []
    for (const r of mine) {
      const last = spells.at(-1)
      if (r.input === 'act') spells.push({ fromMs: r.tMs, toMs: null, acted: false, seen: r.sound })
      else if (last !== undefined && r.input === 'clr') last.toMs = r.tMs
      else if (last !== undefined && last.toMs === null && r.person !== null) last.acted = true
    }
    let calm = Number.NEGATIVE_INFINITY
    spells.forEach((s, i) => {
      const third = spells[i - 2]
      if (s.seen && third !== undefined && s.fromMs - third.fromMs <= 60_000 && s.fromMs >= fromMs) {
        // One entry for one bout, however long it chatters.
        if (s.fromMs > calm) chattering.push({ key, atMs: third.fromMs })
        calm = s.fromMs + 60_000
      }
      const lastedS = ((s.toMs ?? toMs) - s.fromMs) / 1000
      const alone =
        (spells[i + 1]?.fromMs ?? Infinity) - s.fromMs > 600_000 && s.fromMs - (spells[i - 1]?.fromMs ?? -Infinity) > 600_000
      if (s.seen && s.toMs !== null && s.fromMs >= fromMs && lastedS <= fleetingS && !s.acted && alone)
        fleeting.push({ key, atMs: s.fromMs, lastedS })
      const hours = lastedS / 3600
      if (hours > staleHours && (s.toMs ?? toMs) > fromMs) stale.push({ key, fromMs: s.fromMs, hours })
    })
  }
  return { chattering, fleeting, stale }
}
