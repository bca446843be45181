import type { PerformanceRow } from '../../server/core/alarms/performance.ts'
import { fixed } from './format.ts'

/** A figure of the alarm table as it is printed; what there is nothing to compute from is said, never 0. */
export function figureText(row: Pick<PerformanceRow, 'value' | 'unit'>): string {
  if (row.value === null) return 'no figure'
  switch (row.unit) {
    case 'share':
      return `${fixed(100 * row.value, 1)} %`
    case 'count':
      return String(row.value)
    default:
      return `${fixed(row.value, row.value < 10 ? 2 : 1)} ${row.unit}`
  }
}

/** The verdict as a word; a table that says it by colour would say it to some only. */
export const verdictText = (met: boolean | null): string => (met === null ? '–' : met ? 'met' : 'not met')

const hour = 3_600_000
/** Periods to choose from; the shift is the one that a hand-over is about. */
export const periods = [
  { id: '8h', text: 'last 8 h', ms: 8 * hour },
  { id: '12h', text: 'last 12 h', ms: 12 * hour },
  { id: '24h', text: 'last 24 h', ms: 24 * hour },
  { id: '7d', text: 'last 7 days', ms: 168 * hour },
  { id: '30d', text: 'last 30 days', ms: 720 * hour },
  { id: 'all', text: 'whole run', ms: Number.POSITIVE_INFINITY },
] as const

/**
 * A local time as people write it (`2031-01-14 03:12`) to ms since 1970 in a zone of which only the distance to UTC is known; of an hour that
 * comes twice the first. Null where the text is no time.
 */
export function fromLocal(text: string, offsetMs: (tMs: number) => number): number | null {
  const parts = /^\s*(\d{4}-\d\d-\d\d)[ T](\d\d:\d\d)\s*$/.exec(text)
  const wall = parts === null ? Number.NaN : Date.parse(`${parts[1]}T${parts[2]}Z`)
  if (Number.isNaN(wall)) return null
  // The distance is asked for at the time itself: once for a guess, once for the guess made right.
  const early = wall - offsetMs(wall - offsetMs(wall) - hour)
  const late = wall - offsetMs(wall - offsetMs(wall))
  return early + offsetMs(early) === wall ? early : late
}
/** The other way round, to the minute. */
export const toLocal = (tMs: number, offsetMs: (tMs: number) => number): string =>
  new Date(tMs + offsetMs(tMs)).toISOString().slice(0, 16).replace('T', ' ')
