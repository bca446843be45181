import { MonitorError } from '../core/errors.ts'
import type { Act } from '../core/sequence.ts'
import { FileClock, freshClock } from './csv/clock.ts'
import { cellDecoder, detectEncoding, transcoder } from './csv/encoding.ts'
import { fold, listed } from './csv/header.ts'
import { decimalNumber } from './csv/number.ts'
import { type SplitRow, splitRows } from './csv/split.ts'

export type EventAct = Extract<Act, { kind: 'event' }>

const columns = ['time', 'kind', 'value', 'unit', 'person', 'note', 'of', 'taken'] as const

/**
 * The events file, CSV `time,kind,value,unit,person,note` (comma, semicolon or tab; any order; all but time and kind may be left out; beyond the
 * contract `of`, the stream or segment it belongs to, and `taken`, the time of the sample): acts of kind `event`, sorted by time, those of one
 * time in the order of the file. Times are ISO 8601, in `timeZone` where they carry no zone. An
 * empty value is null, an empty person an empty name. Errors: EVENTS_FILE with line and column (of the table), for the first mistake met.
 */
export function readEvents(name: string, bytes: Uint8Array, timeZone: string): EventAct[] {
  const { encoding, skip } = detectEncoding(name, bytes)
  const isWide = encoding === 'utf-16le' || encoding === 'utf-16be'
  const text = isWide ? transcoder(encoding).feed(bytes.subarray(skip)) : bytes.subarray(skip)
  const decode = cellDecoder(encoding)
  const byDelimiter = [44, 59, 9].map((d) => splitRows(text, 0, text.length, d, 1, decode, Number.POSITIVE_INFINITY))
  const known = (rows: SplitRow[]): number => columns.filter((c) => rows[0]?.cells.some((h) => fold(h) === c)).length
  const rows = byDelimiter.reduce((a, b) => (known(b) > known(a) ? b : a))
  const header = rows[0]
  if (header === undefined)
    throw mistake(
      name,
      'found an empty file, expected a header and events',
      'write the columns time,kind,value,unit,person,note on its first line',
      {},
    )
  const at = Object.fromEntries(columns.map((c) => [c, header.cells.findIndex((h) => fold(h) === c)])) as Record<
    (typeof columns)[number],
    number
  >
  const twice = columns.find((c) => header.cells.filter((h) => fold(h) === c).length > 1)
  if (twice !== undefined)
    throw mistake(name, `found two columns "${twice}", expected one`, 'remove one of them', { line: header.line })
  if (at.time < 0 || at.kind < 0)
    throw mistake(
      name,
      `found the columns ${listed(header.cells)}, expected time,kind,value,unit,person,note`,
      'add at least time and kind',
      { line: header.line },
    )
  const clockOf = () => new FileClock(['iso'], timeZone, null, 0, freshClock())
  const clocks = { entry: clockOf(), sample: clockOf() }
  const acts = rows.slice(1).map((row) => readEvent(name, row, header.cells.length, at, clocks))
  return acts.sort((a, b) => a.tMs - b.tMs)
}

function readEvent(
  name: string,
  row: SplitRow,
  width: number,
  at: Record<(typeof columns)[number], number>,
  clocks: { readonly entry: FileClock; readonly sample: FileClock },
): EventAct {
  const cell = (c: (typeof columns)[number]): string => row.cells[at[c]]?.trim() ?? ''
  const fail = (c: (typeof columns)[number], message: string, mend: string): MonitorError =>
    mistake(name, message, mend, { line: row.line, column: at[c] + 1 })
  if (row.cells.length > width && row.cells.slice(width).some((c) => c.trim() !== ''))
    throw mistake(name, `found ${row.cells.length} cells, expected ${width}`, 'put text that holds the delimiter in quotes', {
      line: row.line,
      column: width + 1,
    })
  const stamp = new TextEncoder().encode(cell('time'))
  const tMs = clocks.entry.read(stamp, 0, stamp.length)
  if (Number.isNaN(tMs))
    throw fail(
      'time',
      `found the time "${cell('time').slice(0, 40)}", expected ISO 8601 such as 2031-05-04T13:20:00Z`,
      'correct the time',
    )
  const sample = new TextEncoder().encode(cell('taken'))
  const atMs = sample.length === 0 ? null : clocks.sample.read(sample, 0, sample.length)
  if (Number.isNaN(atMs))
    throw fail('taken', `found the time "${cell('taken').slice(0, 40)}", expected ISO 8601 or nothing`, 'correct the time')
  const event = cell('kind')
  if (event === '') throw fail('kind', 'found no kind of event, expected one such as "drum change"', 'say what happened')
  return {
    kind: 'event',
    tMs,
    person: cell('person'),
    event,
    value: readValue(cell('value'), fail),
    unit: cell('unit') || null,
    note: cell('note'),
    ...(cell('of') === '' ? {} : { of: cell('of') }),
    ...(atMs === null ? {} : { atMs }),
  }
}

function readValue(text: string, fail: (c: 'value', message: string, mend: string) => MonitorError): number | null {
  if (text === '') return null
  const bytes = new TextEncoder().encode(text)
  const value = decimalNumber(bytes, 0, bytes.length, 46) ?? decimalNumber(bytes, 0, bytes.length, 44)
  if (value === null || !Number.isFinite(value))
    throw fail('value', `found the value "${text.slice(0, 40)}", expected a number or nothing`, 'move words to the note')
  return value
}

function mistake(file: string, message: string, hint: string, place: { line?: number; column?: number }): MonitorError {
  return new MonitorError('EVENTS_FILE', message, { hint, place: { file, ...place } })
}
