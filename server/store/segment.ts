import { cell, type RowBlock } from '../core/reading.ts'
import { ByteReader, ByteWriter } from './bytes.ts'
import { readChannel, writeChannel } from './channel.ts'
import { readNumbers, writeNumbers } from './numbers.ts'

/** Rows after which a segment is closed; one more append may overshoot it. */
export const segmentRows = 4096
/** Ticks after which a segment is closed when hardly any rows come. */
export const segmentTicks = 16384
/** Tags whose channels share one record: large enough to fill pages, small enough that a wide skid is not read for one tag. */
export const stripTags = 32

const fewRows = 64

function allPlain(codes: Uint8Array, from: number, to: number): boolean {
  for (let i = from; i < to; i++) if (codes[i] !== cell.value) return false
  return true
}

/** Rows and ticks of one stretch of a run's sequence, tag by tag. Acts live in their own table and only take up numbers. */
export class Columns {
  readonly width: number
  rows = 0
  ticks = 0
  tMs = new Float64Array(segmentRows * 2)
  values: Float64Array[] = []
  codes: Uint8Array[] = []
  /** Place of each tick among the rows and ticks, from 0, and its time. */
  tickAt: number[] = []
  tickMs: number[] = []

  constructor(width: number) {
    this.width = width
    for (let c = 0; c < width; c++) {
      this.values.push(new Float64Array(segmentRows * 2))
      this.codes.push(new Uint8Array(segmentRows * 2))
    }
  }

  get full(): boolean {
    return this.rows >= segmentRows || this.ticks >= segmentTicks
  }

  clear(): void {
    this.rows = 0
    this.ticks = 0
    this.tickAt = []
    this.tickMs = []
  }

  addTick(tMs: number): void {
    this.tickAt.push(this.rows + this.ticks)
    this.tickMs.push(tMs)
    this.ticks++
  }

  /** Appends rows `from` up to `to` of a block of this width. */
  addRows(block: RowBlock, from: number, to: number): void {
    const count = to - from
    if (this.rows + count > this.tMs.length) this.widen(this.rows + count)
    const { width, rows } = this
    this.tMs.set(block.tMs.subarray(from, to), rows)
    const { values, codes } = block
    const plain = allPlain(codes, from * width, to * width)
    // A few rows at a time, so that what lies between two readings of a tag stays in the fastest memory.
    for (let first = 0; first < count; first += fewRows) {
      const last = Math.min(count, first + fewRows)
      for (let c = 0; c < width; c++) {
        const v = this.values[c]!
        for (let i = first, at = (from + first) * width + c; i < last; i++, at += width) v[rows + i] = values[at]!
        if (plain) continue
        const k = this.codes[c]!
        for (let i = first, at = (from + first) * width + c; i < last; i++, at += width) k[rows + i] = codes[at]!
      }
    }
    if (plain) for (const k of this.codes) k.fill(cell.value, rows, rows + count)
    this.rows += count
  }

  private widen(rows: number): void {
    const grown = <T extends Float64Array | Uint8Array>(old: T, fresh: T): T => {
      fresh.set(old.subarray(0, this.rows))
      return fresh
    }
    this.tMs = grown(this.tMs, new Float64Array(rows * 2))
    this.values = this.values.map((v) => grown(v, new Float64Array(rows * 2)))
    this.codes = this.codes.map((k) => grown(k, new Uint8Array(rows * 2)))
  }
}

const out = new ByteWriter()
const part = new ByteWriter()

/** Numbers [start, end), rows, ticks; times of the rows, places and times of the ticks. */
export function encodeOrder(columns: Columns, start: number, end: number): Uint8Array {
  out.clear()
  for (const n of [start, end, columns.rows, columns.ticks]) out.varint(n)
  writeNumbers(out, columns.tMs, columns.rows)
  writeNumbers(out, Float64Array.from(columns.tickAt), columns.ticks)
  writeNumbers(out, Float64Array.from(columns.tickMs), columns.ticks)
  return out.sealed()
}

export interface Order {
  readonly start: number
  readonly end: number
  readonly tMs: Float64Array
  readonly tickAt: Float64Array
  readonly tickMs: Float64Array
}

/** Errors: STORE_CORRUPT. */
export function decodeOrder(body: Uint8Array): Order {
  const from = ByteReader.open(body)
  const start = from.varint()
  const end = from.varint()
  const rows = from.varint()
  const ticks = from.varint()
  const order = { start, end, tMs: new Float64Array(rows), tickAt: new Float64Array(ticks), tickMs: new Float64Array(ticks) }
  readNumbers(from, order.tMs, rows)
  readNumbers(from, order.tickAt, ticks)
  readNumbers(from, order.tickMs, ticks)
  return order
}

/** The strips of a segment, each some tags' channels behind a list of their lengths, and the decimal places of each tag (−1: off every grid). */
export function encodeStrips(columns: Columns): { strips: Uint8Array[]; places: number[] } {
  const strips: Uint8Array[] = []
  const places: number[] = []
  for (let first = 0; first < columns.width; first += stripTags) {
    out.clear()
    part.clear()
    const last = Math.min(columns.width, first + stripTags)
    for (let c = first; c < last; c++) {
      const before = part.length
      places.push(writeChannel(part, columns.values[c]!, columns.codes[c]!, columns.rows))
      out.varint(part.length - before)
    }
    out.bytes(part.view())
    strips.push(out.sealed())
  }
  return { strips, places }
}

/** Opens one strip and gives a reader for each of its tags. Errors: STORE_CORRUPT. */
export function openStrip(body: Uint8Array, tags: number): ByteReader[] {
  const from = ByteReader.open(body)
  const lengths = Array.from({ length: tags }, () => from.varint())
  let at = from.position
  return lengths.map((length) => {
    const reader = new ByteReader(from.source, at, Math.min(from.end, at + length))
    at += length
    return reader
  })
}

/** Decodes all strips of a segment into one row-major block. Errors: STORE_CORRUPT. */
export function decodeRows(tMs: Float64Array, strips: readonly Uint8Array[], width: number): RowBlock {
  const rows = tMs.length
  const block: RowBlock = { rows, width, tMs, values: new Float64Array(rows * width), codes: new Uint8Array(rows * width) }
  const v = new Float64Array(rows)
  const k = new Uint8Array(rows)
  for (let first = 0, s = 0; first < width; first += stripTags, s++) {
    const readers = openStrip(strips[s] ?? new Uint8Array(0), Math.min(stripTags, width - first))
    readers.forEach((reader, j) => {
      readChannel(reader, v, k, rows)
      for (let i = 0, at = first + j; i < rows; i++, at += width) {
        block.values[at] = v[i]!
        block.codes[at] = k[i]!
      }
    })
  }
  return block
}
