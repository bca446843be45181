import type { AlarmMetrics } from '../core/alarms/metrics.ts'
import type { PerformanceRow } from '../core/alarms/performance.ts'

/** `GET /api/runs/:run/alarm-performance?fromMs&toMs`: how the alarm system did over a period, the whole run by default. */
export interface AlarmPerformance extends AlarmMetrics {
  readonly run: number
  readonly table: readonly PerformanceRow[]
  /** What each key of the lists is called: an alarm of a segment or a tag. */
  readonly names: Readonly<Record<string, string>>
}
