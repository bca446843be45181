import { MonitorError } from '../../core/errors.ts'
import { decimalNumber } from './number.ts'

/** One way of writing time. `parse` gives ms, NaN where the text is not of this form; `basis` says what the ms count from. */
export interface TimeParser {
  readonly name: string
  /** `utc`: since 1970 UTC · `local`: the wall clock as if it were UTC · `elapsed`: since the start · `day`: since midnight. */
  basis: 'utc' | 'local' | 'elapsed' | 'day'
  parse(bytes: Uint8Array, from: number, to: number): number
}

const hourMs = 3_600_000
const minuteMs = 60_000

/** Day of the Gregorian calendar as ms since 1970, NaN where there is no such day or the year is not of four digits from 1900 on. */
function dayStart(year: number, month: number, day: number): number {
  if (!(year >= 1900 && year <= 9999 && month >= 1 && month <= 12 && day >= 1 && day <= 31)) return Number.NaN
  const ms = Date.UTC(year, month - 1, day)
  return day > 28 && new Date(ms).getUTCDate() !== day ? Number.NaN : ms
}

const isDigit = (b: number | undefined): boolean => b !== undefined && b >= 48 && b <= 57

/** `count` digits at p as an integer, −1 where one is no digit. */
function digits(bytes: Uint8Array, p: number, count: number): number {
  let n = 0
  for (let i = 0; i < count; i++) {
    const d = bytes[p + i]! - 48
    if (!(d >= 0 && d <= 9)) return -1
    n = n * 10 + d
  }
  return n
}

/** ms of the fraction digits in bytes[from, to): exact to the ms, one rounding below it. */
function fractionMs(bytes: Uint8Array, from: number, to: number): number {
  let n = 0
  const last = Math.min(to, from + 15)
  for (let p = from; p < last; p++) n = n * 10 + (bytes[p]! - 48)
  const scale = last - from - 3
  return scale <= 0 ? n * 10 ** -scale : n / 10 ** scale
}

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

/** A count of seconds or ms; `low` and `high` (in ms, exclusive) keep one kind of count from being taken for another. */
function countParser(name: string, basis: 'utc' | 'elapsed', scale: number, low: number, high: number): TimeParser {
  const parse = (bytes: Uint8Array, from: number, to: number, point: number): number => {
    const ms = decimalNumber(bytes, from, to, point, scale)
    return ms === null || !(ms > low && ms < high) ? Number.NaN : ms
  }
  return {
    name,
    basis,
    parse(bytes, from, to) {
      const ms = parse(bytes, from, to, 46)
      return Number.isNaN(ms) ? parse(bytes, from, to, 44) : ms
    },
  }
}

/** A bare time of day, `HH:mm:ss` with `:` or `.` and a fraction, ms since midnight. */
export function dayTimeParser(): TimeParser {
  return {
    name: 'time-of-day',
    basis: 'day',
    parse(bytes, from, to) {
      let p = from
      const hourDigits = isDigit(bytes[p + 1]) ? 2 : 1
      const hour = digits(bytes, p, hourDigits)
      p += hourDigits
      const mark = bytes[p]
      if ((mark !== 58 && mark !== 46) || p + 3 > to) return Number.NaN
      const minute = digits(bytes, p + 1, 2)
      p += 3
      let second = 0
      let ms = 0
      if (p === to && mark === 46) return Number.NaN
      if (p < to) {
        if (bytes[p] !== mark || p + 3 > to) return Number.NaN
        second = digits(bytes, p + 1, 2)
        p += 3
        if (p < to) {
          if (bytes[p] !== 46 && bytes[p] !== 44 && bytes[p] !== 58) return Number.NaN
          const first = ++p
          while (p < to && isDigit(bytes[p])) p++
          if (p !== to || p === first) return Number.NaN
          ms = fractionMs(bytes, first, p)
        }
      }
      if (hour < 0 || hour > 23 || minute < 0 || minute > 59 || second < 0 || second > 59) return Number.NaN
      return hour * hourMs + minute * minuteMs + second * 1000 + ms
    },
  }
}

type Field = 'y' | 'M' | 'd' | 'H' | 'h' | 'm' | 's' | 'S' | 'a'
type Token = { readonly field: Field; readonly width: number } | { readonly literal: number }

/** A pattern as tokens: `yyyy yy M MM d dd H HH h hh m mm s ss S… a`, text in single quotes and every other mark as it stands. */
function patternTokens(pattern: string): Token[] {
  const tokens: Token[] = []
  for (const [whole] of pattern.matchAll(/y+|M+|d+|H+|h+|m+|s+|S+|a+|'[^']*'|[\s\S]/g)) {
    const letter = whole.charAt(0)
    if (letter === "'" && whole.length > 1) for (const c of whole.slice(1, -1)) tokens.push({ literal: c.charCodeAt(0) })
    else if (/[yMdHhmsSa]/.test(letter)) {
      if (letter === 'y' ? whole.length !== 2 && whole.length !== 4 : letter !== 'S' && whole.length > 2)
        throw new MonitorError(
          'SKID_FILE',
          `found "${whole}" in the time format "${pattern}", expected yyyy yy MM M dd d HH H hh h mm m ss s SSS a`,
        )
      tokens.push({ field: letter as Field, width: whole.length })
    } else if (/[A-Za-z]/.test(letter) && letter !== 'T' && letter !== 'Z')
      throw new MonitorError(
        'SKID_FILE',
        `found "${letter}" in the time format "${pattern}", expected yyyy yy MM M dd d HH H hh h mm m ss s SSS a`,
        {
          hint: 'put plain text in single quotes',
        },
      )
    else tokens.push({ literal: letter.charCodeAt(0) })
  }
  return tokens
}

/**
 * A written pattern such as `dd/MM/yyyy HH.mm.ss`. One digit is accepted where two are written unless digits touch digits; years of
 * two digits are 2000 to 2099. Without a date it is a time of day; without hours, as in a date column with a time column beside
 * it, `HH:mm:ss` in any of its usual spellings may follow after a blank.
 */
export function patternParser(pattern: string): TimeParser {
  const tokens = patternTokens(pattern)
  const has = (f: Field): boolean => tokens.some((t) => 'field' in t && t.field === f)
  const dated = has('y') && has('M') && has('d')
  const timed = has('H') || has('h')
  if (!dated && (!timed || has('y') || has('M') || has('d')))
    throw new MonitorError(
      'SKID_FILE',
      `found the time format "${pattern}", expected year, month and day, or hours for a time of day`,
    )
  const touches = tokens.map((t, i) => {
    const next = tokens[i + 1]
    return 'field' in t && next !== undefined && 'field' in next && next.field !== 'a'
  })
  const behind = dayTimeParser()
  return {
    name: pattern,
    basis: dated ? 'local' : 'day',
    parse(bytes, from, to) {
      let p = from
      const v = { y: 0, M: 0, d: 0, H: 0, h: -1, m: 0, s: 0, S: 0, a: -1 }
      for (let i = 0; i < tokens.length; i++) {
        const token = tokens[i]!
        if ('literal' in token) {
          if (p >= to || bytes[p] !== token.literal) return Number.NaN
          p++
          continue
        }
        const { field, width } = token
        if (field === 'a') {
          const letter = p + 2 <= to ? bytes[p]! | 32 : 0
          if ((letter !== 97 && letter !== 112) || (bytes[p + 1]! | 32) !== 109) return Number.NaN
          v.a = letter === 112 ? 12 : 0
          p += 2
          continue
        }
        const most = field === 'S' ? (touches[i] ? width : 15) : field === 'y' ? width : touches[i] ? width : 2
        const first = p
        while (p < to && p - first < most && isDigit(bytes[p])) p++
        if (p === first || ((field === 'y' || touches[i]) && p - first !== width)) return Number.NaN
        v[field] = field === 'S' ? fractionMs(bytes, first, p) : digits(bytes, first, p - first)
        if (field === 'y' && width === 2) v.y += 2000
      }
      let ofDay = v.m * minuteMs + v.s * 1000 + v.S
      if (v.h >= 0) {
        if (v.h < 1 || v.h > 12) return Number.NaN
        v.H = (v.h % 12) + Math.max(v.a, 0)
      }
      if (v.H > 23 || v.m > 59 || v.s > 60) return Number.NaN
      ofDay += v.H * hourMs
      if (!timed && p < to && bytes[p] === 32) {
        ofDay = behind.parse(bytes, p + 1, to)
        p = to
      }
      if (p !== to) return Number.NaN
      return dated ? dayStart(v.y, v.M, v.d) + ofDay : ofDay
    },
  }
}

/** The parser that a `timeFormat` names. Counts from 1e11 on are ms, smaller ones seconds, so neither passes for the other. */
export function timeParser(format: string): TimeParser {
  switch (format) {
    case 'iso':
      return isoParser()
    case 'epoch-s':
      return countParser(format, 'utc', 3, 0, 1e14)
    case 'epoch-ms':
      return countParser(format, 'utc', 0, 1e10, 1e14)
    case 'elapsed-s':
      return countParser(format, 'elapsed', 3, -1e12, 1e12)
    case 'time-of-day':
      return dayTimeParser()
    default:
      return patternParser(format)
  }
}
