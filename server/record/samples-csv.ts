import { cell, type RowBlock } from '../core/reading.ts'
import type { Entry } from '../core/sequence.ts'
import type { Skid } from '../core/skid.ts'
import { csvCell } from './csv-cell.ts'

type Entries = () => Iterable<{ readonly entry: Entry }>

/** Whether a wide table can say all of a run: no row that leaves a tag out, no quality of the source's own. */
function fitsWide(entries: Entries): boolean {
  for (const { entry } of entries()) {
    if (entry.kind !== 'rows') continue
    const { codes, rows, width } = entry.block
    for (let i = 0; i < rows * width; i++) if (codes[i] === cell.absent || codes[i]! >= cell.uncertain) return false
  }
  return true
}

const number = (v: number): string => (Object.is(v, -0) ? '-0' : String(v))
const time = (tMs: number): string => new Date(tMs).toISOString()

/**
 * The readings of a run as a log in arrival order, times in UTC: wide where that says all, else long (`time,tag,value,quality`), one line a
 * sample. Read back with the run's skid file (its `log` left out or with `timeFormat: iso`) every sample has the same time to the ms, the
 * same bits and the same quality. Numbers are the shortest decimals that are the same double. Text that
 * a spreadsheet would take for a formula has an apostrophe in front, which the reader takes off again.
 */
export function samplesCsv(
  skid: Skid,
  words: readonly string[],
  entries: Entries,
): { layout: 'wide' | 'long'; lines: () => Generator<string> } {
  const names = [...skid.tags.map((t) => t.column), ...(skid.phaseColumn === null ? [] : [skid.phaseColumn])]
  const isText = [...skid.tags.map((t) => t.quantity === 'text' || t.quantity === 'state'), true]
  const layout = fitsWide(entries) ? 'wide' : 'long'
  const valueAt = (b: RowBlock, at: number, c: number): string => {
    const code = b.codes[at]!
    if (code === cell.missing || code === cell.absent) return ''
    if (code === cell.unreadable) return 'unreadable'
    return isText[c] ? csvCell(words[b.values[at]!] ?? '') : number(b.values[at]!)
  }
  function* wide(): Generator<string> {
    yield `time,${names.map(csvCell).join(',')}\n`
    for (const { entry } of entries()) {
      if (entry.kind !== 'rows') continue
      const b = entry.block
      for (let r = 0; r < b.rows; r++) {
        let line = time(b.tMs[r]!)
        for (let c = 0; c < b.width; c++) line += `,${valueAt(b, r * b.width + c, c)}`
        yield `${line}\n`
      }
    }
  }
  function* long(): Generator<string> {
    yield 'time,tag,value,quality\n'
    for (const { entry } of entries()) {
      if (entry.kind !== 'rows') continue
      const b = entry.block
      for (let r = 0; r < b.rows; r++)
        for (let c = 0; c < b.width; c++) {
          const at = r * b.width + c
          const code = b.codes[at]!
          if (code === cell.absent) continue
          const quality = code === cell.uncertain ? 'uncertain' : code === cell.bad ? 'bad' : ''
          yield `${time(b.tMs[r]!)},${csvCell(names[c]!)},${valueAt(b, at, c)},${quality}\n`
        }
    }
  }
  return { layout, lines: layout === 'wide' ? wide : long }
}
