import { dayStart, digits, fractionMs, hourMs, isDigit, minuteMs, type TimeParser } from './time-digits.ts'

/**
 * ISO 8601 date and time: `yyyy-MM-dd` or `yyyyMMdd`, `T` or a blank, `HH:mm[:ss[.fff]]` or `HHmmss`, then `Z`, `UTC`, an offset, or
 * nothing (local time). The fraction may follow a comma. A second of 60 counts into the next minute.
 */
export function isoParser(): TimeParser {
  let dayKey = -1
  let dayMs = 0
  const parser: TimeParser = {
    name: 'iso',
    basis: 'local',
    parse(bytes, from, to) {
      const extended = bytes[from + 4] === 45
      if (to - from < (extended ? 16 : 13)) return Number.NaN
      let p = from + (extended ? 10 : 8)
      const year = digits(bytes, from, 4)
      const month = digits(bytes, from + (extended ? 5 : 4), 2)
      const day = digits(bytes, from + (extended ? 8 : 6), 2)
      if (extended && bytes[from + 7] !== 45) return Number.NaN
      const gap = bytes[p++]
      if (gap !== 84 && gap !== 32 && gap !== 116) return Number.NaN
      if (year < 0 || month < 0 || day < 0) return Number.NaN
      const key = (year * 16 + month) * 32 + day
      if (key !== dayKey) {
        dayMs = dayStart(year, month, day)
        dayKey = key
      }
      const colon = bytes[p + 2] === 58
      const hour = digits(bytes, p, 2)
      const minute = digits(bytes, p + (colon ? 3 : 2), 2)
      p += colon ? 5 : 4
      if (p > to) return Number.NaN
      let second = 0
      let ms = 0
      if (p < to && (colon ? bytes[p] === 58 : isDigit(bytes[p]))) {
        if (colon) p++
        if (p + 2 > to) return Number.NaN
        second = digits(bytes, p, 2)
        p += 2
        if (p < to && (bytes[p] === 46 || bytes[p] === 44)) {
          const first = ++p
          while (p < to && isDigit(bytes[p])) p++
          if (p === first) return Number.NaN
          ms = fractionMs(bytes, first, p)
        }
      }
      if (hour < 0 || hour > 23 || minute < 0 || minute > 59 || second < 0 || second > 60) return Number.NaN
      const time = dayMs + hour * hourMs + minute * minuteMs + second * 1000 + ms
      if (p === to) {
        parser.basis = 'local'
        return time
      }
      const offset = zoneOffset(bytes, p, to)
      parser.basis = 'utc'
      return time - offset
    },
  }
  return parser
}

/** Offset written behind a time, ms; NaN where it is none. */
function zoneOffset(bytes: Uint8Array, from: number, to: number): number {
  let p = from
  if (p < to && bytes[p] === 32) p++
  if (to - p === 1 && (bytes[p]! | 32) === 122) return 0
  if (to - p === 3 && (bytes[p]! | 32) === 117 && (bytes[p + 1]! | 32) === 116 && (bytes[p + 2]! | 32) === 99) return 0
  const sign = bytes[p] === 43 ? 1 : bytes[p] === 45 ? -1 : 0
  const length = to - ++p
  if (sign === 0 || (length !== 2 && length !== 4 && length !== 5)) return Number.NaN
  const hours = digits(bytes, p, 2)
  const minutes = length === 2 ? 0 : digits(bytes, to - 2, 2)
  if ((length === 5 && bytes[p + 2] !== 58) || hours < 0 || hours > 23 || minutes < 0 || minutes > 59) return Number.NaN
  return sign * (hours * hourMs + minutes * minuteMs)
}
