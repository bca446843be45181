import { MonitorError } from '../../core/errors.ts'
import type { Skid } from '../../core/skid.ts'
import { unitInHeader, unitOfText, withoutUnit } from './units-row.ts'
import { unguarded } from './words.ts'

/** Trimmed, lower case, inner blanks single: how names are compared when they are not equal as they stand. */
export const fold = (text: string): string => text.trim().replace(/\s+/g, ' ').toLowerCase()

/** The skid's columns in the order of a block's row: the tags, then the phase column if there is one. */
export interface Wanted {
  readonly name: string
  readonly column: string
  readonly isText: boolean
  readonly isPhase: boolean
  readonly unit: string | null
}

export function wantedColumns(skid: Skid): Wanted[] {
  const wanted: Wanted[] = skid.tags.map((t) => ({
    name: t.tag,
    column: t.column,
    isText: t.quantity === 'state' || t.quantity === 'text',
    isPhase: false,
    unit: t.unit,
  }))
  if (skid.phaseColumn !== null)
    wanted.push({ name: skid.phaseColumn, column: skid.phaseColumn, isText: true, isPhase: true, unit: null })
  return wanted
}

/** The ways a header may name a tag, strictest first. A column taken by a stricter way is not open to a looser one. */
const ways: readonly ((header: string, w: Wanted) => boolean)[] = [
  (h, w) => unguarded(h.trim()) === w.column.trim(),
  (h, w) => fold(h) === fold(w.column),
  (h, w) => fold(h) === fold(w.name),
  (h, w) => fold(withoutUnit(h)) === fold(w.column) || fold(withoutUnit(h)) === fold(w.name),
]

export interface Match {
  /** For each column of the file its place in the row, −1 where the skid has no use for it. */
  readonly slots: readonly number[]
  /** Two columns that both fit one tag, as an error; the slots hold the first. */
  readonly doubled: MonitorError | null
  /** A column matched without its bracketed unit, where that unit is not the skid's. */
  readonly contradiction: MonitorError | null
}

/** Which column holds which tag. `closed` are columns already used for time. */
export function matchColumns(
  file: string,
  line: number,
  header: readonly string[],
  wanted: readonly Wanted[],
  closed: readonly number[],
): Match {
  const slots = header.map(() => -1)
  const found = new Set<number>()
  let doubled: MonitorError | null = null
  let contradiction: MonitorError | null = null
  ways.forEach((fits, way) => {
    for (const [slot, w] of wanted.entries()) {
      if (found.has(slot)) continue
      const columns = header.flatMap((h, c) => (slots[c] === -1 && !closed.includes(c) && fits(h, w) ? [c] : []))
      const [column, second] = columns
      if (column === undefined) continue
      slots[column] = slot
      found.add(slot)
      if (second !== undefined)
        doubled ??= new MonitorError(
          'CSV_HEADER',
          `found two columns for tag ${w.name}, columns ${column + 1} and ${second + 1} ("${header[second]!.trim()}"), expected one`,
          {
            hint: 'rename or remove one of them in the file',
            place: { file, line, column: second + 1 },
          },
        )
      const inHeader = way < ways.length - 1 ? null : unitInHeader(header[column]!)
      const unit = inHeader === null ? null : unitOfText(inHeader)
      if (unit !== null && w.unit !== null && unit !== w.unit) contradiction ??= unitError(file, line, column, w, inHeader!)
    }
  })
  return { slots, doubled, contradiction }
}

export function unitError(file: string, line: number, column: number, w: Wanted, found: string): MonitorError {
  return new MonitorError('CSV_HEADER', `found unit "${found.trim()}" for tag ${w.name}, expected ${w.unit} as in the skid file`, {
    hint: 'correct the unit of the tag in the skid file, or the file',
    place: { file, line, column: column + 1 },
  })
}

/** `time,tag,value[,quality]`: the columns of the long layout, null where the header is not of it. */
export function longColumns(header: readonly string[]): { tag: number; value: number; quality: number | null } | null {
  const names = header.map(fold)
  const tag = names.indexOf('tag')
  const value = names.indexOf('value')
  const quality = names.indexOf('quality')
  return tag < 0 || value < 0 ? null : { tag, value, quality: quality < 0 ? null : quality }
}

const wholeNames = ['timestamp', 'datetime', 'date time', 'date/time', 'date_time', 'date-time', 'time stamp', 'time_stamp']

/** Names of a column that numbers the rows, which is no time. */
const counters = ['', '#', 'no', 'no.', 'nr', 'nr.', 'n', 'index', 'idx', 'row', 'id', 'rec', 'record', 'sample', 'scan']

/**
 * The columns that hold time: those the skid names; else date and time side by side, else one whose name says so, else the first column that does not number the rows
 * (date first where there are two). Errors: CSV_TIME where a named column is not in the file.
 */
export function timeColumns(
  file: string,
  line: number,
  header: readonly string[],
  named: readonly string[] | null,
  isTag: (header: string) => boolean,
): number[] {
  const names = header.map((h) => fold(withoutUnit(h)))
  if (named !== null) {
    return named.map((name) => {
      const exact = header.findIndex((h) => h.trim() === name.trim())
      const column =
        exact >= 0 ? exact : [header.findIndex((h) => fold(h) === fold(name)), names.indexOf(fold(name))].find((c) => c >= 0)
      if (column !== undefined) return column
      throw new MonitorError(
        'CSV_TIME',
        `found no column "${name}" for time, expected it as log.time in the skid file says; columns: ${listed(header)}`,
        {
          hint: 'correct log.time in the skid file',
          place: { file, line },
        },
      )
    })
  }
  const whole = names.findIndex((n) => wholeNames.includes(n))
  if (whole >= 0) return [whole]
  const date = names.indexOf('date')
  const time = names.indexOf('time')
  if (date >= 0 && time >= 0) return [date, time]
  if (time >= 0) return [time]
  if (date >= 0) return [date]
  const first = names.findIndex((n) => !counters.includes(n))
  if (first >= 0 && !isTag(header[first]!)) return [first]
  throw new MonitorError(
    'CSV_TIME',
    `found no column for time, expected one called time, timestamp or date and time; columns: ${listed(header)}`,
    {
      hint: 'name the time column as log.time in the skid file',
      place: { file, line },
    },
  )
}

/** Names for an error's one line: the first dozen, line breaks and overlong ones cut. */
export function listed(names: readonly string[]): string {
  const shown = names.slice(0, 12).map((n) => {
    const flat = n.trim().replace(/\s+/g, ' ')
    return `"${flat.length > 40 ? `${flat.slice(0, 39)}…` : flat}"`
  })
  return shown.join(', ') + (names.length > 12 ? ` and ${names.length - 12} more` : '')
}
