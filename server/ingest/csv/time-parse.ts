import { decimalNumber } from './number.ts'
import type { TimeParser } from './time-digits.ts'
import { isoParser } from './time-iso.ts'
import { dayTimeParser, patternParser } from './time-pattern.ts'

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
