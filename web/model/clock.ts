/** Times of the plant's zone, as text. One instance a zone: making an Intl formatter is the slow part. */
export interface ZoneClock {
  /** 03:12 */
  hm(tMs: number): string
  /** 03:12:40 */
  hms(tMs: number): string
  /** 14 Jan */
  day(tMs: number): string
  /** 14 Jan 2026 03:12:40 */
  full(tMs: number): string
  /** Distance to UTC as +01:00. */
  offset(tMs: number): string
  /** The same in ms; local wall time = tMs + offsetMs. */
  offsetMs(tMs: number): number
}

const known = new Map<string, ZoneClock>()
const two = (n: number): string => String(n).padStart(2, '0')
const months = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec']

/** The clock of an IANA zone; a zone that the browser does not know is shown as UTC. */
export function zoneClock(timeZone: string): ZoneClock {
  const found = known.get(timeZone)
  if (found !== undefined) return found
  let format: Intl.DateTimeFormat
  const options: Intl.DateTimeFormatOptions = {
    hourCycle: 'h23',
    year: 'numeric',
    month: 'numeric',
    day: 'numeric',
    hour: 'numeric',
    minute: 'numeric',
    second: 'numeric',
  }
  try {
    format = new Intl.DateTimeFormat('en-GB', { ...options, timeZone })
  } catch {
    format = new Intl.DateTimeFormat('en-GB', { ...options, timeZone: 'UTC' })
  }
  // Zones are a whole number of minutes from UTC and change on a quarter of an hour: one look-up a quarter is enough.
  let at = Number.NaN
  let cached = 0
  const offsetMs = (tMs: number): number => {
    const quarter = Math.floor(tMs / 900_000)
    if (quarter !== at) {
      const start = quarter * 900_000
      const p: Record<string, number> = {}
      for (const x of format.formatToParts(start)) p[x.type] = Number(x.value)
      cached = Date.UTC(p['year']!, p['month']! - 1, p['day']!, p['hour']!, p['minute']!, p['second']!) - start
      at = quarter
    }
    return cached
  }
  const local = (tMs: number): Date => new Date(tMs + offsetMs(tMs))
  const clock: ZoneClock = {
    hm: (t) => `${two(local(t).getUTCHours())}:${two(local(t).getUTCMinutes())}`,
    hms: (t) => `${clock.hm(t)}:${two(local(t).getUTCSeconds())}`,
    day: (t) => `${local(t).getUTCDate()} ${months[local(t).getUTCMonth()]}`,
    full: (t) => `${clock.day(t)} ${local(t).getUTCFullYear()} ${clock.hms(t)}`,
    offset: (t) => {
      const min = Math.round(offsetMs(t) / 60_000)
      return `${min < 0 ? '−' : '+'}${two(Math.floor(Math.abs(min) / 60))}:${two(Math.abs(min) % 60)}`
    },
    offsetMs,
  }
  known.set(timeZone, clock)
  return clock
}
