import { MonitorError } from '../../core/errors.ts'
import { cell, type RowBlock } from '../../core/reading.ts'
import type { CellWriter } from './cells.ts'
import type { FileClock } from './clock.ts'
import { fold, type Wanted } from './header.ts'
import type { Span } from './rows.ts'
import { keptBroken, type LogTally } from './tally.ts'
import { formatsOf } from './time-detect.ts'
import { withoutUnit } from './units-row.ts'
import { unguarded } from './words.ts'

/** Rows at the start that may fail to show a time, and rows that must not all run backwards. */
const firstTimes = 20
const firstRows = 50
const manyRows = 1000

export interface SinkOptions {
  readonly name: string
  readonly tally: LogTally
  readonly clock: FileClock
  readonly cells: CellWriter
  readonly wanted: readonly Wanted[]
  readonly formats: readonly string[]
  readonly isTwoColumns: boolean
  /** Going on in a file whose beginning was read before: the rules on first rows have been met. */
  readonly isResumed: boolean
  readonly timeColumn: number
  readonly fromMs: number
  readonly toMs: number
  readonly decode: (bytes: Uint8Array) => string
}

/** Takes each row as it ends: its time, whether it counts, and the rules on files that are wrong as a whole. */
export class RowSink {
  private readonly o: SinkOptions
  private firstBroken: { line: number; reason: string } | null = null
  private untimed: { line: number; text: string; count: number } | null = null
  private timed: number
  private backwards = 0
  private firstLine = 0
  private readonly bySpelling = new Map<string, number>()
  private readonly names = new Set<string>()
  private readonly joined = new Uint8Array(128)

  constructor(o: SinkOptions) {
    this.o = o
    this.timed = o.isResumed ? 1 : 0
  }

  blank(): void {
    this.o.tally.blankLines++
  }

  broken(line: number, reason: string): void {
    const { tally, name } = this.o
    tally.rows++
    tally.broken++
    this.firstBroken ??= { line, reason }
    if (tally.brokenLines.length < keptBroken) tally.brokenLines.push({ line, reason })
    if (tally.rows > manyRows && 2 * tally.broken > tally.rows)
      throw new MonitorError(
        'CSV_LINE',
        `found ${tally.broken} broken rows among the first ${tally.rows} (here: ${this.firstBroken.reason}), expected rows like the header`,
        {
          hint: 'check the delimiter, the decimal sign and the header of the export',
          place: { file: name, line: this.firstBroken.line },
        },
      )
  }

  wide(block: RowBlock, line: number, spans: readonly Span[]): void {
    const tMs = this.time(line, spans)
    if (!Number.isNaN(tMs)) this.keep(block, line, tMs)
  }

  long(block: RowBlock, line: number, spans: readonly Span[]): void {
    const tMs = this.time(line, spans)
    if (Number.isNaN(tMs)) return
    const { tally, cells, decode } = this.o
    const tag = spans[2]!
    const slot = this.slotOf(decode(tag.bytes.subarray(tag.from, tag.to)))
    if (slot < 0) {
      tally.rows++
      tally.foreign++
      return
    }
    const base = block.rows * block.width
    block.values.fill(0, base, base + block.width)
    block.codes.fill(cell.absent, base, base + block.width)
    const value = spans[3]!
    cells.write(block, base + slot, slot, value.bytes, value.from, value.to)
    if (block.codes[base + slot] === cell.value) block.codes[base + slot] = this.quality(spans[4]!)
    this.keep(block, line, tMs)
  }

  /** After the last row. Errors: no row at all, none that could be used, or time running backwards throughout. */
  end(headerLine: number): void {
    const { tally, name, isResumed } = this.o
    if (isResumed) return
    if (tally.rows === 0)
      throw new MonitorError('CSV_EMPTY', 'found a header and no rows, expected rows of readings below it', {
        hint: 'check that the export ran to its end',
        place: { file: name, line: headerLine },
      })
    if (this.timed === 0 && this.untimed !== null) throw this.noTime(this.untimed)
    if (tally.broken === tally.rows)
      throw new MonitorError(
        'CSV_LINE',
        `found no row that can be used (${this.firstBroken!.reason}), expected rows like the header`,
        {
          hint: 'check the delimiter, the decimal sign and the header of the export',
          place: { file: name, line: this.firstBroken!.line },
        },
      )
    if (tally.used >= 3 && this.backwards === tally.used - 1) throw this.runsBackwards()
  }

  private keep(block: RowBlock, line: number, tMs: number): void {
    const { tally, fromMs, toMs, isResumed } = this.o
    tally.rows++
    if (tMs < fromMs || tMs > toMs) {
      tally.outside++
      return
    }
    block.tMs[block.rows++] = tMs
    if (tally.used === 0) {
      tally.firstMs = tMs
      this.firstLine = line
    } else if (tally.used < firstRows && tMs < tally.lastMs!) {
      this.backwards++
      if (this.backwards === firstRows - 1 && !isResumed) throw this.runsBackwards()
    }
    tally.used++
    tally.lastMs = tMs
  }

  private runsBackwards(): MonitorError {
    const { name, timeColumn } = this.o
    return new MonitorError('CSV_TIME', 'found that time runs backwards from the first row on, expected the oldest row first', {
      hint: 'sort the file by time, oldest first',
      place: { file: name, line: this.firstLine, column: timeColumn + 1 },
    })
  }

  private time(line: number, spans: readonly Span[]): number {
    const { clock, isTwoColumns, decode } = this.o
    const span = isTwoColumns ? this.join(spans[0]!, spans[1]!) : spans[0]!
    const tMs = clock.read(span.bytes, span.from, span.to)
    if (!Number.isNaN(tMs)) {
      this.timed++
      return tMs
    }
    const text = decode(span.bytes.subarray(span.from, span.to)).trim()
    this.refuseChange(line, text)
    this.untimed ??= { line, text, count: 0 }
    this.untimed.count++
    if (this.timed === 0 && this.untimed.count >= firstTimes) throw this.noTime(this.untimed)
    this.broken(line, text === '' ? 'no time' : `no time in "${text.slice(0, 40)}"`)
    return Number.NaN
  }

  /** A time that another format reads is no broken row: the file changed, or the format given is not its own. */
  private refuseChange(line: number, text: string): void {
    const { name, formats, timeColumn } = this.o
    const other = formatsOf(text)
    if (other.length === 0 || other[0] === 'elapsed-s') return
    const came =
      this.timed > 0
        ? `found a date format that changes here: "${text}" (${other.join(' or ')})`
        : `found the time "${text}" (${other.join(' or ')})`
    throw new MonitorError('CSV_TIME', `${came}, expected ${formats.join(' or ')}`, {
      hint: 'list every format the file uses as log.timeFormat in the skid file',
      place: { file: name, line, column: timeColumn + 1 },
    })
  }

  private noTime(first: { line: number; text: string }): MonitorError {
    const { name, formats, timeColumn } = this.o
    return new MonitorError('CSV_TIME', `found no time in "${first.text.slice(0, 40)}", expected ${formats.join(' or ')}`, {
      hint: 'correct log.time and log.timeFormat in the skid file',
      place: { file: name, line: first.line, column: timeColumn + 1 },
    })
  }

  private join(date: Span, time: Span): Span {
    const length = date.to - date.from + 1 + time.to - time.from
    const { joined } = this
    if (length > joined.length) return { bytes: joined, from: 0, to: 0 }
    let n = 0
    const put = (s: Span): void => {
      let { from, to } = s
      while (from < to && s.bytes[from]! <= 32) from++
      while (to > from && s.bytes[to - 1]! <= 32) to--
      for (; from < to; from++) joined[n++] = s.bytes[from]!
    }
    put(date)
    joined[n++] = 32
    put(time)
    return { bytes: joined, from: 0, to: n }
  }

  private slotOf(spelling: string): number {
    const known = this.bySpelling.get(spelling)
    if (known !== undefined) return known
    const { wanted, tally } = this.o
    const text = unguarded(spelling.trim())
    const bare = fold(withoutUnit(text))
    let slot = wanted.findIndex((w) => w.column.trim() === text)
    if (slot < 0) slot = wanted.findIndex((w) => fold(w.column) === fold(text) || fold(w.name) === fold(text))
    if (slot < 0) slot = wanted.findIndex((w) => fold(w.column) === bare || fold(w.name) === bare)
    if (this.bySpelling.size < 10_000) this.bySpelling.set(spelling, slot)
    if (slot < 0 && tally.columnsExtra.length < 1000 && !tally.columnsExtra.includes(text)) tally.columnsExtra.push(text)
    if (slot >= 0 && !this.names.has(wanted[slot]!.name)) {
      this.names.add(wanted[slot]!.name)
      tally.columnsUsed = wanted.filter((w) => this.names.has(w.name)).map((w) => w.name)
      tally.tagsMissing = wanted.filter((w) => !this.names.has(w.name)).map((w) => w.name)
    }
    return slot
  }

  private quality(span: Span): number {
    const { decode, tally } = this.o
    const word = span.to === span.from ? '' : decode(span.bytes.subarray(span.from, span.to)).trim().toLowerCase()
    if (word === '' || word === 'good') return cell.value
    if (word === 'bad') return cell.bad
    if (word !== 'uncertain') tally.unknownQuality++
    return cell.uncertain
  }
}
