import type { AlarmMetrics } from './metrics.ts'

/** How a figure is printed: a plain number, a share of 1, a rate, a count. */
export type FigureUnit = 'per 10 min' | 'per h' | 'per day' | 'share' | 'count'

/** A figure of the alarm system against what is recommended for one operator position. */
export interface PerformanceRow {
  readonly metric: string
  readonly target: string
  /** Null where the period holds nothing that it could be computed from. */
  readonly value: number | null
  readonly unit: FigureUnit
  /** What the figure rests on, in words with its number. */
  readonly basis: string
  /** Null where there is no value, or no target that one figure could meet. */
  readonly met: boolean | null
}

/** Setpoint changes during the period: all, and those without a named person or a reason of five characters. */
export interface ChangesCounted {
  readonly all: number
  readonly outside: number
}

const dayMs = 86_400_000
const n = (count: number, one: string, many = `${one}s`): string => `${count} ${count === 1 ? one : many}`

/**
 * The most alarms that were stale (active for more than `staleHours`) on one day (UTC) of the period.
 * Target: fewer than 5 on any day (ISA-18.2 cl. 16, from memory).
 */
function staleOnADay(m: AlarmMetrics, staleHours: number): number {
  let most = 0
  // Only where an alarm was active: a period may be asked for that is ages long.
  const begun = m.stale.reduce((least, s) => Math.min(least, s.fromMs), Infinity)
  const over = m.stale.reduce((latest, s) => Math.max(latest, s.fromMs + s.hours * 3.6e6), -Infinity)
  const endMs = Math.min(m.toMs, over)
  for (let day = Math.floor(Math.max(m.fromMs, begun) / dayMs); day * dayMs < endMs; day++) {
    const [from, to] = [Math.max(m.fromMs, day * dayMs), Math.min(m.toMs, (day + 1) * dayMs)]
    const on = m.stale.filter((s) => s.fromMs + staleHours * 3.6e6 < to && s.fromMs + s.hours * 3.6e6 > from)
    most = Math.max(most, on.length)
  }
  return most
}

/**
 * Every recommended figure with its target, value and what it rests on (ALM-13). Targets: EEMUA 191 as quoted in the trade literature, ISA-18.2 cl. 16
 * (both from memory). A share of windows is null where no whole window of the clock lies in the period, a mix of priorities where nothing was annunciated.
 * Under 30 days none of it is a conformance statement: `m.label` says so.
 */
export function performanceTable(m: AlarmMetrics, changes: ChangesCounted, staleHours = 24): PerformanceRow[] {
  const rows: PerformanceRow[] = []
  const row = (metric: string, target: string, unit: FigureUnit, value: number | null, basis: string, isMet: ((v: number) => boolean) | null) =>
    rows.push({ metric, target, value, unit, basis, met: value === null || isMet === null ? null : isMet(value) })
  const share = (part: number, of: number): number | null => (of === 0 ? null : part / of)
  const rate = m.hours === 0 ? null : m.ratePerHour
  const calls = n(m.annunciated, 'annunciated alarm')
  row('Average rate', 'about 1, at most 2', 'per 10 min', rate === null ? null : rate / 6, calls, (v) => v <= 2)
  row('Average rate', 'about 6, at most 12', 'per h', rate, calls, (v) => v <= 12)
  row('Average rate', 'about 150, at most 300', 'per day', rate === null ? null : rate * 24, calls, (v) => v <= 300)
  const ten = n(m.tenMinutes.windows, 'window of 10 min', 'windows of 10 min')
  row('10-min windows with more than 10 alarms', 'under 1 %', 'share', share(m.tenMinutes.over10, m.tenMinutes.windows), `${m.tenMinutes.over10} of ${ten}`, (v) => v < 0.01)
  row('Hours with more than 30 alarms', 'under 1 %', 'share', share(m.hoursOver30.over30, m.hoursOver30.windows), `${m.hoursOver30.over30} of ${n(m.hoursOver30.windows, 'whole hour')}`, (v) => v < 0.01)
  row('Most alarms in any 10-min window', 'at most 10', 'count', m.tenMinutes.windows === 0 ? null : m.tenMinutes.most, ten, (v) => v <= 10)
  row('Time in flood (begins over 10, ends under 5 in 10 min)', 'under 1 %', 'share', m.hours === 0 ? null : m.floodShare, n(m.floods.length, 'flood'), (v) => v < 0.01)
  row('Share of the ten most frequent alarms', 'under 5 %, with a plan for each', 'share', m.annunciated === 0 ? null : m.topTenShare, calls, (v) => v < 0.05)
  row('Chattering alarms (3 in 1 min)', 'none', 'count', m.chattering.length, n(m.chattering.length, 'bout'), (v) => v === 0)
  row('Fleeting alarms (gone in seconds, nobody acted)', 'none', 'count', m.fleeting.length, n(m.fleeting.length, 'occurrence'), (v) => v === 0)
  row('Stale alarms (over 24 h) on the worst day', 'under 5', 'count', staleOnADay(m, staleHours), `${n(m.stale.length, 'stale occurrence')} in all`, (v) => v < 5)
  for (const [priority, target] of [['low', 0.8], ['medium', 0.15], ['high', 0.05]] as const)
    row(`Share of ${priority} priority`, `about ${Math.round(100 * target)} %`, 'share', m.annunciated === 0 ? null : m.priorityShare[priority], calls, null)
  row('Suppressions and setpoint changes outside the procedure', 'none', 'count', m.outsideProcedure + changes.outside, `${m.outsideProcedure} suppressions, ${changes.outside} of ${n(changes.all, 'setpoint change')}`, (v) => v === 0)
  return rows
} // biome-ignore format: a table
