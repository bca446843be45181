import { MonitorError } from '../../core/errors.ts'
import { cell } from '../../core/reading.ts'
import type { Blocks } from './blocks.ts'
import type { CellWriter } from './cells.ts'
import { exactMantissa, exactPowers } from './number.ts'
import type { RowSink } from './row-sink.ts'

/** What a column is for: a place in the row from 0 on for a number, or one of these. Words are at `textFrom` + place. */
export const use = { skip: -1, time: -2, time2: -3, tag: -4, value: -5, quality: -6, beyond: -7, textFrom: 1 << 14 } as const

export const longestLine = 1 << 20
/** A quote that is not closed within so many line breaks was never meant to open a cell: its line is broken, not the rest of the file. */
const longestQuote = 64

/** Bytes of one cell of a row, quotes taken off. */
export interface Span {
  bytes: Uint8Array
  from: number
  to: number
}

const closed = -1
const unclosed = -2

/**
 * The body of a log, byte by byte: plain numbers go from their digits straight into the block, all else (quotes, words, exponents,
 * long mantissas) takes the slow path of `CellWriter`. No string is made of a row or of a plain number.
 */
export class RowReader {
  /** Physical line that the next row starts on. */
  line: number
  private readonly uses: Int16Array
  private readonly delimiter: number
  private readonly cells: CellWriter
  private readonly blocks: Blocks
  private readonly sink: RowSink
  private readonly hasMissingCodes: boolean
  private readonly isLong: boolean
  private readonly name: string
  /** Cells kept for the end of the row, by use: time, second time, tag, value, quality. */
  private readonly spans: Span[]
  private quoted: Span = { bytes: new Uint8Array(0), from: 0, to: 0 }
  private breaks = 0

  constructor(o: {
    name: string
    line: number
    uses: Int16Array
    delimiter: number
    cells: CellWriter
    blocks: Blocks
    sink: RowSink
    hasMissingCodes: boolean
    isLong: boolean
  }) {
    this.name = o.name
    this.line = o.line
    this.uses = o.uses
    this.delimiter = o.delimiter
    this.cells = o.cells
    this.blocks = o.blocks
    this.sink = o.sink
    this.hasMissingCodes = o.hasMissingCodes
    this.isLong = o.isLong
    this.spans = Array.from({ length: 5 }, () => ({ bytes: new Uint8Array(0), from: 0, to: 0 }))
  }

  /**
   * Reads the rows of bytes[from, to), which end in a line break, and gives the offset behind the last whole one: less than `to`
   * only where a quoted cell goes on beyond it and more is to come.
   */
  read(bytes: Uint8Array, from: number, to: number, isLast: boolean): number {
    const { uses, delimiter, cells, blocks, sink, spans } = this
    const columns = uses.length
    let p = from
    while (p < to) {
      const rowFrom = p
      const block = blocks.room()
      const { values, codes } = block
      const base = block.rows * block.width
      const decimal = cells.decimal === delimiter || cells.decimal === 0 ? 256 : cells.decimal
      let column = 0
      let isFilledBeyond = false
      this.breaks = 0
      for (;;) {
        const what = column < columns ? uses[column]! : use.beyond
        let b = bytes[p]!
        if (what >= 0 && what < use.textFrom) {
          const start = p
          const isMinus = b === 45
          if (isMinus) b = bytes[++p]!
          let first = p
          let mantissa = 0
          while (b >= 48 && b <= 57) {
            mantissa = mantissa * 10 + (b - 48)
            b = bytes[++p]!
          }
          let count = p - first
          let decimals = 0
          if (b === decimal) {
            first = ++p
            b = bytes[p]!
            while (b >= 48 && b <= 57) {
              mantissa = mantissa * 10 + (b - 48)
              b = bytes[++p]!
            }
            decimals = p - first
            count += decimals
          }
          if (
            count > 0 &&
            mantissa < exactMantissa &&
            decimals <= 22 &&
            (b === delimiter || b === 10 || (b === 13 && bytes[p + 1] === 10))
          ) {
            const size = decimals === 0 ? mantissa : mantissa / exactPowers[decimals]!
            values[base + what] = isMinus ? -size : size
            codes[base + what] = cell.value
            if (this.hasMissingCodes) cells.judge(block, base + what)
            if (b === delimiter) {
              p++
              column++
              continue
            }
            p += b === 13 ? 1 : 0
            break
          }
          p = start
          b = bytes[p]!
        }
        let span = this.quoted
        if (b === 34) {
          p = this.quotedCell(bytes, p, to, isLast)
          if (p === closed) return rowFrom
          if (p === unclosed) break
          span = this.quoted
        } else {
          const start = p
          while (b !== delimiter && b !== 10) b = bytes[++p]!
          span.bytes = bytes
          span.from = start
          span.to = p
        }
        if (what >= 0)
          cells.write(block, base + (what & (use.textFrom - 1)), what & (use.textFrom - 1), span.bytes, span.from, span.to)
        else if (what === use.beyond) isFilledBeyond ||= !isBlank(span.bytes, span.from, span.to)
        else if (what !== use.skip) {
          const kept = spans[use.time - what]!
          kept.bytes = span.bytes
          kept.from = span.from
          kept.to = span.to
        }
        if (bytes[p] !== delimiter) break
        p++
        column++
      }
      const line = this.line
      if (p === unclosed) {
        p = bytes.indexOf(10, rowFrom) + 1
        this.line++
        sink.broken(line, 'a quote that is never closed')
        continue
      }
      p++
      this.line += 1 + this.breaks
      if (p - rowFrom > longestLine * (1 + this.breaks)) throw tooLong(this.name, line)
      const count = column + 1
      if (count === columns || (count > columns && !isFilledBeyond)) {
        if (this.isLong) sink.long(block, line, spans)
        else sink.wide(block, line, spans)
      } else if (count === 1 && isBlank(bytes, rowFrom, p)) sink.blank()
      else sink.broken(line, `${count} cells, expected ${columns}`)
    }
    return p
  }

  /**
   * Finds the end of a cell that opens with a quote at p; leaves what is inside in `quoted` and gives the offset of the delimiter or
   * line break behind it, `closed` where more bytes are needed to tell, `unclosed` where no quote ends it.
   */
  private quotedCell(bytes: Uint8Array, p: number, to: number, isLast: boolean): number {
    const start = p + 1
    let q = start
    let breaks = 0
    let doubled = 0
    for (; ; q++) {
      if (q >= to) return isLast ? unclosed : closed
      const b = bytes[q]
      if (b === 10 && ++breaks > longestQuote) return unclosed
      if (b !== 34) continue
      if (bytes[q + 1] !== 34) break
      doubled++
      q++
    }
    this.breaks += breaks
    let end = q + 1
    while (bytes[end] !== this.delimiter && bytes[end] !== 10) end++
    const isClean = isBlank(bytes, q + 1, end)
    this.quoted = { bytes, from: isClean ? start : p, to: isClean ? q : end }
    if (doubled > 0 && isClean) this.quoted = unescaped(bytes, start, q, doubled)
    return end
  }
}

function unescaped(bytes: Uint8Array, from: number, to: number, doubled: number): Span {
  const out = new Uint8Array(to - from - doubled)
  let n = 0
  for (let p = from; p < to; p++) {
    out[n++] = bytes[p]!
    if (bytes[p] === 34) p++
  }
  return { bytes: out, from: 0, to: out.length }
}

function isBlank(bytes: Uint8Array, from: number, to: number): boolean {
  for (let p = from; p < to; p++) if (bytes[p]! > 32) return false
  return true
}

export function tooLong(name: string, line: number): MonitorError {
  return new MonitorError('CSV_LINE', 'found a line longer than 1 MiB, expected one row of readings a line', {
    hint: 'check that the file is a log of text lines',
    place: { file: name, line },
  })
}
