import { MonitorError } from '../../core/errors.ts'
import { dayStart, digits, fractionMs, hourMs, isDigit, minuteMs, type TimeParser } from './time-digits.ts'

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
