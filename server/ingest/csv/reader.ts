import type { RowBlock } from '../../core/reading.ts'
import type { LogFormat, Skid } from '../../core/skid.ts'
import { Blocks } from './blocks.ts'
import { CellWriter } from './cells.ts'
import { type ClockState, FileClock, freshClock } from './clock.ts'
import { type Dialect, detectDialect } from './dialect.ts'
import { cellDecoder, detectEncoding, transcoder, utf16Length } from './encoding.ts'
import { type Wanted, wantedColumns } from './header.ts'
import { logFormatOf } from './log-format.ts'
import { columnPlan } from './plan.ts'
import { RowSink } from './row-sink.ts'
import { longestLine, RowReader, tooLong, use } from './rows.ts'
import { decimalName, describeDialect, freshTally, type LogTally } from './tally.ts'

export interface LogOptions {
  readonly skid: Skid
  /** The run's list of words, shared by its files; filled with the phases if it is empty. */
  readonly words: string[]
  /** Start of the run, for elapsed seconds and bare times of day. */
  readonly startMs: number | null
  /** Rows before `fromMs` or after `toMs` are left out and counted. */
  readonly fromMs?: number | null
  readonly toMs?: number | null
  onProgress?(bytesRead: number): void
}

/** Where to go on in a file that grows, and how it is written; plain JSON. */
export interface ReaderPoint {
  /** Bytes of the file up to the end of the last whole line read. */
  readonly offset: number
  readonly line: number
  readonly dialect: Dialect
  readonly decimal: number
  readonly clock: ClockState
}

const window = 1 << 16
const piece = 1 << 18

/**
 * Reads one log pushed to it in pieces of any size; the same bytes give the same rows however they are cut. The dialect is settled
 * on the first 64 KiB (or at `settle`, or at the end). Blocks that `feed`, `settle` and `end` give are used again: they are good
 * until the next call. Every mistake of the file is a MonitorError with its place; the column of a place is that of the table.
 */
export class PushReader {
  readonly tally: LogTally
  private readonly name: string
  private readonly options: LogOptions
  private readonly log: LogFormat
  private readonly wanted: readonly Wanted[]
  private readonly blocks: Blocks
  private head = new Uint8Array(0)
  private dialect: Dialect | null = null
  private rows: RowReader | null = null
  private sink: RowSink | null = null
  private cells: CellWriter | null = null
  private clock: FileClock | null = null
  private code: ReturnType<typeof transcoder> | null = null
  /** Bytes of the file taken in, and those up to the end of the last whole line read. */
  private taken = 0
  private offset = 0
  /** Text, its first `waiting` bytes in use: a line that has not ended yet. */
  private work = new Uint8Array(2 * piece)
  private waiting = 0

  /** `point` goes on in a file whose bytes before `point.offset` were read earlier. */
  constructor(name: string, options: LogOptions, point: ReaderPoint | null = null, tally: LogTally = freshTally(name)) {
    this.name = name
    this.options = options
    this.tally = tally
    this.log = logFormatOf(options.skid, name)
    this.wanted = wantedColumns(options.skid)
    this.blocks = new Blocks(this.wanted.length)
    if (point === null) return
    this.taken = point.offset
    this.offset = point.offset
    this.start({ ...point.dialect, decimal: point.decimal }, structuredClone(point.clock), point.line, true)
  }

  feed(bytes: Uint8Array): RowBlock[] {
    this.blocks.reuse()
    for (let from = 0; from < bytes.length; from += piece) this.take(bytes.subarray(from, from + piece))
    return this.blocks.take()
  }

  /** Settles the dialect with the whole lines that have come, so that a file just begun can be followed; nothing without a row. */
  settle(): RowBlock[] {
    this.blocks.reuse()
    if (this.rows === null) this.decide(false, true)
    return this.blocks.take()
  }

  /** The file ends here: an open last line counts as a line. Errors: no rows, none usable, time backwards throughout. */
  end(): RowBlock[] {
    this.blocks.reuse()
    if (this.rows === null) this.decide(true, true)
    if (this.code !== null) this.append(this.code.end())
    if (this.waiting > 0) {
      this.room(1)
      this.work[this.waiting++] = 10
      this.consume(true)
    }
    this.sink!.end(this.dialect!.headerLine)
    this.note()
    return this.blocks.take()
  }

  /** Time of the last row read, by the file's own clock; null before the first. */
  clockMs(): number | null {
    return this.clock?.state.lastMs ?? null
  }

  /** Null until the dialect is settled. */
  point(): ReaderPoint | null {
    if (this.dialect === null || this.rows === null) return null
    const { dialect, rows, cells, clock } = this
    return { offset: this.offset, line: rows.line, dialect, decimal: cells!.decimal, clock: structuredClone(clock!.state) }
  }

  private take(bytes: Uint8Array): void {
    if (this.rows === null) {
      const joined = new Uint8Array(this.head.length + bytes.length)
      joined.set(this.head)
      joined.set(bytes, this.head.length)
      this.head = joined
      this.decide(false, false)
      return
    }
    this.taken += bytes.length
    this.append(this.code === null ? bytes : this.code.feed(bytes))
  }

  /** Settles the dialect if the head is long enough, or `now`; then reads what the head holds. */
  private decide(isEnd: boolean, now: boolean): void {
    if (now && !isEnd && !this.head.includes(10)) return
    for (let size = window; size <= this.head.length || now; size *= 2) {
      const isWhole = isEnd && size >= this.head.length
      const raw = this.head.subarray(0, size)
      const { encoding, skip } = detectEncoding(this.name, raw)
      const code = encoding === 'utf-16le' || encoding === 'utf-16be' ? transcoder(encoding) : null
      const all = code === null ? raw.subarray(skip) : code.feed(raw.subarray(skip))
      const text = isWhole ? all : all.subarray(0, all.lastIndexOf(10) + 1)
      if (all.length - text.length > longestLine || (text.indexOf(10) < 0 && text.length > longestLine))
        throw tooLong(this.name, 1 + text.filter((b) => b === 10).length)
      if (!isWhole && nonBlankLines(text) < 2) {
        if (size < this.head.length) continue
        return
      }
      const { skid, startMs } = this.options
      const dialect = detectDialect({
        name: this.name,
        text,
        encoding,
        skip,
        wanted: this.wanted,
        log: this.log,
        timeZone: skid.timeZone,
        startMs,
      })
      if (!isEnd && nonBlankLines(text.subarray(dialect.bodyFrom)) === 0) {
        if (size < this.head.length) continue
        return
      }
      this.start(dialect, freshClock(), dialect.bodyLine)
      const head = this.head
      this.head = new Uint8Array(0)
      this.taken = head.length
      let rest: Uint8Array = head.subarray(skip)
      if (this.code !== null) rest = this.code.feed(rest)
      this.offset = skip + this.sourceBytes(rest.subarray(0, dialect.bodyFrom))
      this.append(rest.subarray(dialect.bodyFrom))
      return
    }
  }

  private start(dialect: Dialect, state: ClockState, line: number, isResumed = false): void {
    const { name, options, wanted, tally, log } = this
    const decode = cellDecoder(dialect.encoding)
    const { uses, slots, isLong } = columnPlan(name, dialect, wanted)
    describeDialect(tally, dialect)
    const found = new Set(slots)
    tally.columnsUsed = wanted.filter((_, s) => found.has(s)).map((w) => w.name)
    tally.tagsMissing = wanted.filter((_, s) => !found.has(s)).map((w) => w.name)
    tally.columnsExtra = dialect.header.filter((_, c) => uses[c] === use.skip).map((h) => h.trim())
    this.dialect = dialect
    this.clock = new FileClock(dialect.formats, options.skid.timeZone, options.startMs, log.clockOffsetSeconds, state)
    this.cells = new CellWriter(wanted, log.missing, dialect.decimal, options.words, decode)
    this.sink = new RowSink({
      name, tally, clock: this.clock, cells: this.cells, wanted, formats: dialect.formats, isTwoColumns: dialect.time.length > 1, isResumed,
      timeColumn: dialect.time[0]!, fromMs: options.fromMs ?? Number.NEGATIVE_INFINITY, toMs: options.toMs ?? Number.POSITIVE_INFINITY, decode,
    }) // biome-ignore format: a list
    this.rows = new RowReader({
      name, line, uses, delimiter: dialect.delimiter, cells: this.cells, blocks: this.blocks, sink: this.sink,
      hasMissingCodes: log.missing.length > 0, isLong,
    }) // biome-ignore format: a list
    if (dialect.encoding === 'utf-16le' || dialect.encoding === 'utf-16be') this.code = transcoder(dialect.encoding)
  }

  private append(text: Uint8Array): void {
    this.room(text.length)
    this.work.set(text, this.waiting)
    this.waiting += text.length
    this.consume(false)
    this.options.onProgress?.(this.taken)
  }

  private room(more: number): void {
    if (this.waiting + more <= this.work.length) return
    const wider = new Uint8Array(2 * (this.waiting + more))
    wider.set(this.work.subarray(0, this.waiting))
    this.work = wider
  }

  private consume(isLast: boolean): void {
    const { work, waiting } = this
    const whole = work.subarray(0, waiting).lastIndexOf(10) + 1
    const done = this.rows!.read(work, 0, whole, isLast)
    if (waiting - whole > longestLine)
      throw tooLong(this.name, this.rows!.line + work.subarray(done, whole).filter((b) => b === 10).length)
    this.offset += this.sourceBytes(work.subarray(0, done))
    work.copyWithin(0, done, waiting)
    this.waiting -= done
    this.note()
  }

  /** Bytes of the file that this text was written in. */
  private sourceBytes(text: Uint8Array): number {
    return this.code === null ? text.length : utf16Length(text)
  }

  private note(): void {
    const { tally, clock, cells, dialect } = this
    tally.skippedHour = clock!.zone.skipped
    tally.decimal = decimalName(cells!.decimal)
    const used = clock!.parsers[clock!.state.format]!.name
    tally.timeFormat = [used, ...dialect!.formats.filter((f) => f !== used)].join(', ')
  }
}

/** Lines that hold something, counted up to two. */
function nonBlankLines(text: Uint8Array): number {
  let count = 0
  let isFilled = false
  for (const b of text) {
    if (b > 32) isFilled = true
    if (b !== 10 || !isFilled) continue
    isFilled = false
    if (++count === 2) return count
  }
  return isFilled ? count + 1 : count
}
