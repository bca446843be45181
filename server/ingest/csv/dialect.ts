import { MonitorError } from '../../core/errors.ts'
import type { LogFormat } from '../../core/skid.ts'
import { FileClock, freshClock } from './clock.ts'
import { cellDecoder, type Encoding } from './encoding.ts'
import { listed, longColumns, matchColumns, timeColumns, unitError, type Wanted } from './header.ts'
import { type SplitRow, splitRows } from './split.ts'
import { detectFormat, formatsOf } from './time-detect.ts'
import { unitInHeader, unitOfText } from './units-row.ts'
import { missingWords } from './words.ts'

/** How a file is written, found from its first rows; plain JSON. Columns count from 0, lines from 1. */
export interface Dialect {
  readonly encoding: Encoding
  /** Bytes of byte order mark. */
  readonly skip: number
  /** Character codes; decimal is 0 as long as no cell has shown which it is. */
  readonly delimiter: number
  readonly decimal: number
  readonly header: readonly string[]
  readonly headerLine: number
  readonly layout: 'wide' | 'long'
  readonly time: readonly number[]
  readonly formats: readonly string[]
  readonly unitsRow: boolean
  /** Where the first row of readings starts: offset in the text (UTF-8 or Latin-1 bytes behind the mark) and line. */
  readonly bodyFrom: number
  readonly bodyLine: number
}

export interface DialectQuery {
  readonly name: string
  readonly text: Uint8Array
  readonly encoding: Encoding
  readonly skip: number
  readonly wanted: readonly Wanted[]
  readonly log: LogFormat
  readonly timeZone: string
  readonly startMs: number | null
}

const delimiters = [44, 59, 9]
const others: readonly (readonly [code: number, name: string])[] = [
  [124, '"|"'],
  [58, '":"'],
  [94, '"^"'],
  [126, '"~"'],
  [32, 'blanks'],
]

/** Finds the dialect from the whole lines of a file's first window, or says what is wrong with them. */
export function detectDialect(q: DialectQuery): Dialect {
  const { name, text, encoding, skip, wanted, log } = q
  const decode = cellDecoder(encoding)
  if (!text.includes(10) && text.includes(13))
    throw new MonitorError('CSV_LINE', 'found lines that end in CR alone, expected LF or CR LF', {
      hint: 'convert the line ends',
      place: { file: name, line: 1 },
    })
  const rowsBy = (delimiter: number, most: number): SplitRow[] => {
    const rows = splitRows(text, 0, text.length, delimiter, 1, decode, most + 1)
    // Spreadsheets may write their delimiter on a line of its own, `sep=;`, above the header.
    return /^sep=.?$/i.test(rows[0]?.cells[0]?.trim() ?? '') ? rows.slice(1) : rows.slice(0, most)
  }
  const { delimiter, matched } = chooseDelimiter(name, wanted, rowsBy)
  const rows = rowsBy(delimiter, 2000)
  const first = rows[0]
  if (first === undefined)
    throw new MonitorError('CSV_EMPTY', 'found an empty file, expected a header and rows', {
      hint: 'check the export',
      place: { file: name },
    })
  const header = withoutTail(first.cells)
  if (matched === 0) throw noMatch(name, first, rows, wanted, rowsBy)
  const headerLine = first.line
  const isTag = (h: string): boolean => matchColumns(name, headerLine, [h], wanted, []).slots[0]! >= 0
  const time = timeColumns(name, headerLine, header, log.time, isTag)
  const { slots, doubled, contradiction } = matchColumns(name, headerLine, header, wanted, time)
  if (doubled ?? contradiction) throw doubled ?? contradiction
  const long = slots.every((s) => s < 0) ? longColumns(header) : null
  if (long === null && slots.every((s) => s < 0)) throw noMatch(name, first, rows, wanted, rowsBy)
  const second = rows[1]
  const unitsRow = second !== undefined && long === null && isUnitsRow(second, slots, time)
  if (unitsRow) checkUnits(name, second, slots, wanted)
  const data = rows.slice(unitsRow ? 2 : 1)
  const whole = data.filter((r) => withoutTail(r.cells).length <= header.length && r.cells.length >= header.length)
  const numeric = long === null ? slots.flatMap((s, c) => (s >= 0 && !wanted[s]!.isText ? [c] : [])) : [long.value]
  const units = time.map((c) => (unitsRow ? second.cells[c] : undefined) ?? unitInHeader(header[c]!))
  const formats = chooseFormats(q, data, whole, time, units)
  const bodyAt = unitsRow ? second : first
  return {
    encoding, skip, delimiter, decimal: chooseDecimal(whole, numeric), header, headerLine, layout: long === null ? 'wide' : 'long', time, formats,
    unitsRow, bodyFrom: bodyAt.next, bodyLine: bodyAt.line + bodyAt.lines,
  } // biome-ignore format: one line
}

/** Cells without the empty ones that a delimiter at the end of every line makes. */
function withoutTail(cells: readonly string[]): string[] {
  return cells.slice(0, cells.findLastIndex((c) => c.trim() !== '') + 1)
}

/** The delimiter under which most tags are found in the header; among equals the one under which most rows are as long as it. */
function chooseDelimiter(
  name: string,
  wanted: readonly Wanted[],
  rowsBy: (d: number, most: number) => SplitRow[],
): { delimiter: number; matched: number } {
  let best = { delimiter: 44, matched: -1, agreeing: -1 }
  for (const delimiter of delimiters) {
    const rows = rowsBy(delimiter, 50)
    const header = withoutTail(rows[0]?.cells ?? [])
    const matched =
      matchColumns(name, 1, header, wanted, []).slots.filter((s) => s >= 0).length + (longColumns(header) === null ? 0 : 1)
    const agreeing = header.length < 2 ? 0 : rows.filter((r) => withoutTail(r.cells).length === header.length).length
    if (matched > best.matched || (matched === best.matched && agreeing > best.agreeing)) best = { delimiter, matched, agreeing }
  }
  return best
}

/** Why no column of the header is a tag: another delimiter, no header at all, other names. */
function noMatch(
  name: string,
  first: SplitRow,
  rows: readonly SplitRow[],
  wanted: readonly Wanted[],
  rowsBy: (d: number, most: number) => SplitRow[],
): MonitorError {
  const place = { file: name, line: first.line }
  for (const [code, mark] of others) {
    const header = rowsBy(code, 1)[0]?.cells ?? []
    if (header.length > 1 && matchColumns(name, 1, header, wanted, []).slots.some((s) => s >= 0))
      return new MonitorError('CSV_DELIMITER', `found columns separated by ${mark}, expected comma, semicolon or tab`, {
        hint: 'export the log with one of these delimiters',
        place,
      })
  }
  const expected = wanted.map((w) => w.column)
  const filled = first.cells.filter((c) => c.trim() !== '')
  // Besides values alone, a date or time in full: a header has none, whatever words stand beside it.
  const isMoment = (c: string): boolean => formatsOf(c.trim()).some((f) => !/^(elapsed|epoch)/.test(f))
  if (filled.some(isMoment) || filled.every((c) => formatsOf(c.trim()).length > 0 || missingWords.has(c.trim().toLowerCase())))
    return new MonitorError(
      'CSV_HEADER',
      `found values in the first row (${listed(first.cells)}), expected a header with ${listed(expected)}`,
      {
        hint: 'put a line with the column names on top of the file',
        place,
      },
    )
  const alone = first.cells.length === 1 && rows.length > 1 ? ', all in one column' : ''
  return new MonitorError(
    'CSV_HEADER',
    `found no column of a tag of this skid: ${listed(first.cells)}${alone}; expected ${listed(expected)}`,
    {
      hint: "set each tag's column in the skid file to the name in the log",
      place,
    },
  )
}

/** A second header row: no time, no number under a tag, and at least one unit. */
function isUnitsRow(row: SplitRow, slots: readonly number[], time: readonly number[]): boolean {
  const at = (c: number): string => row.cells[c]?.trim() ?? ''
  if (formatsOf(time.map(at).join(' ')).length > 0) return false
  const tags = slots.flatMap((s, c) => (s >= 0 ? [at(c)] : []))
  if (tags.some((t) => t !== '' && formatsOf(t).length > 0)) return false
  return row.cells.some((c, i) => !time.includes(i) && c.trim() !== '' && unitOfText(c) !== null)
}

function checkUnits(name: string, row: SplitRow, slots: readonly number[], wanted: readonly Wanted[]): void {
  slots.forEach((slot, column) => {
    const w = wanted[slot]
    const found = row.cells[column]?.trim() ?? ''
    const unit = found === '' ? null : unitOfText(found)
    if (w !== undefined && w.unit !== null && unit !== null && unit !== w.unit) throw unitError(name, row.line, column, w, found)
  })
}

/** Comma or point by what the numbers of the first rows show, 0 where they show nothing. */
function chooseDecimal(rows: readonly SplitRow[], columns: readonly number[]): number {
  let commas = 0
  let points = 0
  for (const { cells } of rows) {
    for (const c of columns) {
      const m = /^\s*[+-]?\d*([.,])\d*([eE][+-]?\d+)?\s*$/.exec(cells[c] ?? '')
      if (m?.[1] === ',') commas++
      else if (m?.[1] === '.') points++
    }
  }
  return commas > points ? 44 : points > 0 ? 46 : 0
}

/** The formats given, else the one that the first rows show. Errors: CSV_TIME where none, two, or a start is missing. */
function chooseFormats(
  q: DialectQuery,
  data: readonly SplitRow[],
  whole: readonly SplitRow[],
  time: readonly number[],
  units: readonly (string | null)[],
): string[] {
  const { name, log, startMs, timeZone } = q
  const textOf = (r: SplitRow): string => time.map((c) => r.cells[c]?.trim() ?? '').join(' ')
  const place = { file: name, line: (whole[0] ?? data[0])?.line ?? 1, column: time[0]! + 1 }
  let formats = [...log.timeFormat]
  const sample = whole[0] === undefined ? '' : textOf(whole[0])
  if (formats.length === 0) {
    if (whole.length === 0) return ['iso']
    formats = detectFormat(whole.map(textOf)).formats
    if (formats.length === 0)
      throw new MonitorError(
        'CSV_TIME',
        `found no time in "${sample.slice(0, 40)}", expected ISO 8601, epoch or elapsed seconds, or a date and time`,
        {
          hint: 'set log.timeFormat (and log.time) in the skid file',
          place,
        },
      )
    if (formats.length > 1)
      throw new MonitorError(
        'CSV_TIME',
        `found "${sample}", which may be ${formats.join(' or ')}, and no row that tells; expected a format that fits only one way`,
        {
          hint: 'set log.timeFormat in the skid file to the right one',
          place,
        },
      )
    const unit = units.find((u) => u !== null && /^(ms|msec|min|minutes?|h|hr|hours?|d|days?)$/i.test(u.trim()))
    if (formats[0] === 'elapsed-s' && unit !== undefined)
      throw new MonitorError('CSV_TIME', `found elapsed time in "${unit}", expected elapsed seconds`, {
        hint: 'export the time in seconds',
        place,
      })
  }
  const needs = new FileClock(formats, timeZone, startMs, 0, freshClock()).needsStart()
  if (needs !== null && startMs === null)
    throw new MonitorError(
      'CSV_TIME',
      `found ${needs === 'elapsed-s' ? 'elapsed seconds' : 'a time of day'} ("${sample.slice(0, 40)}") without a date, expected a start`,
      {
        hint: 'give the start of the run with --start',
        place,
      },
    )
  return formats
}
