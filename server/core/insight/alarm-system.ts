import type { AlarmRecord } from '../alarms/alarm-state.ts'
import { alarmMetrics } from '../alarms/metrics.ts'
import type { AlarmMetricsReport } from '../report.ts'

const iso = (ms: number): string => new Date(ms).toISOString()

/** The figures of `alarmMetrics` as the report prints them; null without a period. */
export function alarmPerformance(records: readonly AlarmRecord[], fromMs: number, toMs: number): AlarmMetricsReport | null {
  if (!(toMs > fromMs)) return null
  const { fromMs: _from, toMs: _to, floods, chattering, fleeting, stale, ...rest } = alarmMetrics(records, fromMs, toMs)
  return {
    from: iso(fromMs),
    to: iso(toMs),
    ...rest,
    floods: floods.map((f) => ({ from: iso(f.fromMs), to: iso(f.toMs), count: f.count })),
    chattering: chattering.map((c) => ({ key: c.key, at: iso(c.atMs) })),
    fleeting: fleeting.map((f) => ({ key: f.key, at: iso(f.atMs), lastedSeconds: f.lastedS })),
    stale: stale.map((s) => ({ key: s.key, from: iso(s.fromMs), hours: s.hours })),
  }
}
