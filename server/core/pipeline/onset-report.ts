import type { Interval } from '../growth/points.ts'
import type { OnsetReport } from '../report.ts'

const iso = (ms: number): string => new Date(ms).toISOString()

/** An onset with its interval as the report shows it. */
export const onsetReport = (i: Interval): OnsetReport => ({
  at: iso(i.atMs),
  low: iso(i.lowMs),
  high: iso(i.highMs),
  level: i.level,
})
