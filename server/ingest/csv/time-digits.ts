/** One way of writing time. `parse` gives ms, NaN where the text is not of this form; `basis` says what the ms count from. */
export interface TimeParser {
  readonly name: string
  /** `utc`: since 1970 UTC · `local`: the wall clock as if it were UTC · `elapsed`: since the start · `day`: since midnight. */
  basis: 'utc' | 'local' | 'elapsed' | 'day'
  parse(bytes: Uint8Array, from: number, to: number): number
}

export const hourMs = 3_600_000
export const minuteMs = 60_000

/** Day of the Gregorian calendar as ms since 1970, NaN where there is no such day or the year is not of four digits from 1900 on. */
export function dayStart(year: number, month: number, day: number): number {
  if (!(year >= 1900 && year <= 9999 && month >= 1 && month <= 12 && day >= 1 && day <= 31)) return Number.NaN
  const ms = Date.UTC(year, month - 1, day)
  return day > 28 && new Date(ms).getUTCDate() !== day ? Number.NaN : ms
}

export const isDigit = (b: number | undefined): boolean => b !== undefined && b >= 48 && b <= 57

/** `count` digits at p as an integer, −1 where one is no digit. */
export function digits(bytes: Uint8Array, p: number, count: number): number {
  let n = 0
  for (let i = 0; i < count; i++) {
    const d = bytes[p + i]! - 48
    if (!(d >= 0 && d <= 9)) return -1
    n = n * 10 + d
  }
  return n
}

/** ms of the fraction digits in bytes[from, to): exact to the ms, one rounding below it. */
export function fractionMs(bytes: Uint8Array, from: number, to: number): number {
  let n = 0
  const last = Math.min(to, from + 15)
  for (let p = from; p < last; p++) n = n * 10 + (bytes[p]! - 48)
  const scale = last - from - 3
  return scale <= 0 ? n * 10 ** -scale : n / 10 ** scale
}
