import type { Dialect } from './dialect.ts'

/** What was read of one file, and what was not. Counts grow while the file is read; `dialect` fields are filled before the first row. */
export interface LogTally {
  readonly name: string
  layout: 'wide' | 'long'
  delimiter: 'comma' | 'semicolon' | 'tab'
  /** Null as long as no number with decimals was met. */
  decimal: 'point' | 'comma' | null
  encoding: string
  /** Formats given or found, the one in use first. */
  timeFormat: string
  unitsRow: boolean
  /** Names of the skid's columns found in this file, in the skid's order, the file's other headers, and tags that are not in it. */
  columnsUsed: string[]
  columnsExtra: string[]
  tagsMissing: string[]
  /** Rows of readings met: used + outside + broken + foreign. */
  rows: number
  used: number
  /** Rows outside the span that was asked for. */
  outside: number
  /** Rows of the long layout whose tag is not the skid's; their names are in `columnsExtra`. */
  foreign: number
  broken: number
  /** The first 100 of the broken rows. */
  brokenLines: { line: number; reason: string }[]
  /** Lines with nothing on them; not rows. */
  blankLines: number
  /** Times in the hour that spring skips, read as if the clock had not been put forward. */
  skippedHour: number
  /** Qualities that are none of good, uncertain, bad; taken as uncertain. */
  unknownQuality: number
  firstMs: number | null
  lastMs: number | null
}

export const keptBroken = 100

export function freshTally(name: string): LogTally {
  return {
    name, layout: 'wide', delimiter: 'comma', decimal: null, encoding: 'utf-8', timeFormat: '', unitsRow: false, columnsUsed: [], columnsExtra: [],
    tagsMissing: [], rows: 0, used: 0, outside: 0, foreign: 0, broken: 0, brokenLines: [], blankLines: 0, skippedHour: 0, unknownQuality: 0,
    firstMs: null, lastMs: null,
  } // biome-ignore format: a list
}

export const delimiterName = (code: number): LogTally['delimiter'] => (code === 59 ? 'semicolon' : code === 9 ? 'tab' : 'comma')
export const decimalName = (code: number): LogTally['decimal'] => (code === 44 ? 'comma' : code === 46 ? 'point' : null)

/** The dialect's part of a tally. */
export function describeDialect(tally: LogTally, d: Dialect): void {
  tally.layout = d.layout
  tally.delimiter = delimiterName(d.delimiter)
  tally.decimal = decimalName(d.decimal)
  tally.encoding = d.encoding
  tally.timeFormat = d.formats.join(', ')
  tally.unitsRow = d.unitsRow
}
