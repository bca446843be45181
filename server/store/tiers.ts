import { cell } from '../core/reading.ts'
import { ByteReader, ByteWriter } from './bytes.ts'
import { readNumbers, writeNumbers } from './numbers.ts'
import type { Columns } from './segment.ts'

/*
 * Summaries for trends. A page belongs to one segment (level 0) or to `fan` pages of the level below, and holds for each time cell
 * of one width and each tag the number of readings, least, greatest and sum. Cells lie on the grid n·width since 1970 and each width
 * divides the next, so pages add up exactly, late and out-of-order readings included: they just add a cell to a later page.
 */
export const fan = 8
export const cellWidthsMs = [
  10_000, 60_000, 300_000, 1_800_000, 7_200_000, 43_200_000, 172_800_000, 864_000_000, 4_320_000_000, 30_240_000_000,
]
/** Readings a tag a cell at least, at level 0; 1.6 of the fan of 8 goes into more cells a page, 5 into wider ones. */
const readingsPerCell = 96
const growth = 5

export interface Cells {
  /** Readings of this tag in the cell; 0 leaves the others 0. */
  readonly count: Float64Array
  readonly min: Float64Array
  readonly max: Float64Array
  readonly sum: Float64Array
}

export interface Page {
  readonly cellMs: number
  /** Number of each cell since 1970, rising. */
  readonly at: Float64Array
  readonly tags: readonly Cells[]
}

const cells = (n: number): Cells => ({
  count: new Float64Array(n),
  min: new Float64Array(n),
  max: new Float64Array(n),
  sum: new Float64Array(n),
})

/** Readings that a trend draws: plain and uncertain ones. */
export const isDrawn = (code: number, value: number): boolean =>
  (code === cell.value || code === cell.uncertain) && Number.isFinite(value)

function distinct(numbers: Iterable<number>, most: number): Float64Array | null {
  const seen = new Set<number>()
  let last = Number.NaN
  for (const n of numbers) {
    if (n === last) continue
    last = n
    seen.add(n)
    if (seen.size > most) return null
  }
  return Float64Array.from(seen).sort()
}

function* cellNumbers(tMs: Float64Array, n: number, widthMs: number): Generator<number> {
  for (let i = 0; i < n; i++) yield Math.floor(tMs[i]! / widthMs)
}

/** A sum of readings with so many decimals is put back on their grid: exact while it stays below 2^53 grid steps. */
function snap(sum: number, places: number): number {
  if (places < 0) return sum
  const p = 10 ** places
  const k = Math.round(sum * p)
  return Math.abs(k) < 2 ** 51 ? k / p : sum
}

/** The level-0 page of a segment. `places` as from `encodeStrips`. */
export function summarise(columns: Columns, places: readonly number[]): Page {
  const { rows, width } = columns
  const readings: number[] = columns.codes.map((codes, c) => {
    let count = 0
    const values = columns.values[c]!
    for (let i = 0; i < rows; i++) if (isDrawn(codes[i]!, values[i]!)) count++
    return count
  })
  const used = readings.filter((n) => n > 0).length
  const most = Math.max(1, readings.reduce((a, b) => a + b, 0) / (Math.max(1, used) * readingsPerCell))
  let cellMs = cellWidthsMs.at(-1)!
  let at: Float64Array | null = null
  for (const widthMs of cellWidthsMs) {
    at = distinct(cellNumbers(columns.tMs, rows, widthMs), most)
    if (at === null) continue
    cellMs = widthMs
    break
  }
  at ??= distinct(cellNumbers(columns.tMs, rows, cellMs), Infinity)!
  const slotOf = new Map(Array.from(at, (n, i) => [n, i] as const))
  const slots = new Uint32Array(rows)
  let last = Number.NaN
  let slot = 0
  for (let i = 0; i < rows; i++) {
    const n = Math.floor(columns.tMs[i]! / cellMs)
    if (n !== last) {
      slot = slotOf.get(n)!
      last = n
    }
    slots[i] = slot
  }
  const tags: Cells[] = []
  for (let c = 0; c < width; c++) {
    const page = cells(at.length)
    const { count, min, max, sum } = page
    const values = columns.values[c]!
    const codes = columns.codes[c]!
    const p = 10 ** Math.max(0, places[c]!)
    const whole = places[c]! >= 0
    for (let i = 0; i < rows; i++) {
      const v = values[i]!
      if (!isDrawn(codes[i]!, v)) continue
      const s = slots[i]!
      if (count[s] === 0) {
        min[s] = v
        max[s] = v
      } else if (v < min[s]!) min[s] = v
      else if (v > max[s]!) max[s] = v
      count[s] = count[s]! + 1
      sum[s] = sum[s]! + (whole ? Math.round(v * p) : v)
    }
    if (whole) for (let s = 0; s < at.length; s++) sum[s] = sum[s]! / p
    tags.push(page)
  }
  return { cellMs, at, tags }
}

/** One page from several of the level below; `level` is the new page's. */
export function merge(pages: readonly Page[], level: number): Page {
  const width = Math.max(0, ...pages.map((page) => page.tags.length))
  let readings = 0
  let used = 0
  for (let c = 0; c < width; c++) {
    let own = 0
    for (const page of pages) own += page.tags[c]?.count.reduce((a, b) => a + b, 0) ?? 0
    readings += own
    if (own > 0) used++
  }
  const most = Math.max(1, readings / (Math.max(1, used) * readingsPerCell * growth ** level))
  const least = Math.max(...pages.map((page) => page.cellMs))
  const numbersAt = function* (widthMs: number) {
    for (const page of pages) for (const n of page.at) yield Math.floor((n * page.cellMs) / widthMs)
  }
  let cellMs = cellWidthsMs.at(-1)!
  let at: Float64Array | null = null
  for (const widthMs of cellWidthsMs) {
    if (widthMs < least) continue
    at = distinct(numbersAt(widthMs), most)
    if (at === null) continue
    cellMs = widthMs
    break
  }
  at ??= distinct(numbersAt(cellMs), Infinity)!
  const slotOf = new Map(Array.from(at, (n, i) => [n, i] as const))
  const tags: Cells[] = []
  for (let c = 0; c < width; c++) {
    const whole = cells(at.length)
    let places = 0
    for (const page of pages) {
      const own = page.tags[c]
      if (own === undefined) continue
      const p = placesOfAll(own.sum)
      places = p < 0 || places < 0 ? -1 : Math.max(places, p)
      for (let i = 0; i < page.at.length; i++) {
        if (own.count[i] === 0) continue
        const s = slotOf.get(Math.floor((page.at[i]! * page.cellMs) / cellMs))!
        if (whole.count[s] === 0 || own.min[i]! < whole.min[s]!) whole.min[s] = own.min[i]!
        if (whole.count[s] === 0 || own.max[i]! > whole.max[s]!) whole.max[s] = own.max[i]!
        whole.count[s] = whole.count[s]! + own.count[i]!
        whole.sum[s] = whole.sum[s]! + own.sum[i]!
      }
    }
    for (let s = 0; s < at.length; s++) whole.sum[s] = snap(whole.sum[s]!, places)
    tags.push(whole)
  }
  return { cellMs, at, tags }
}

const scratch = new ByteWriter()
const placesOfAll = (values: Float64Array): number => writeNumbers(scratch.clear(), values, values.length)

const out = new ByteWriter()
const part = new ByteWriter()

/** Cells, then a list of lengths, then each tag's four columns. */
export function encodePage(page: Page): Uint8Array {
  out.clear()
  part.clear()
  out.varint(page.cellMs)
  out.varint(page.at.length)
  writeNumbers(out, page.at, page.at.length)
  out.varint(page.tags.length)
  for (const tag of page.tags) {
    const before = part.length
    for (const column of [tag.count, tag.min, tag.max, tag.sum]) writeNumbers(part, column, column.length)
    out.varint(part.length - before)
  }
  out.bytes(part.view())
  return out.sealed()
}

/** Opens a page; each tag is decoded only when asked for. Errors: STORE_CORRUPT. */
export function openPage(body: Uint8Array): { cellMs: number; at: Float64Array; width: number; tag: (index: number) => Cells } {
  const from = ByteReader.open(body)
  const cellMs = from.varint()
  const n = from.varint()
  const at = new Float64Array(n)
  readNumbers(from, at, n)
  const width = from.varint()
  const starts = [0]
  for (let c = 0; c < width; c++) starts.push(starts[c]! + from.varint())
  const base = from.position
  const tag = (index: number): Cells => {
    const own = cells(n)
    if (index >= width) return own
    const reader = new ByteReader(from.source, base + starts[index]!, base + starts[index + 1]!)
    for (const column of [own.count, own.min, own.max, own.sum]) readNumbers(reader, column, n)
    return own
  }
  return { cellMs, at, width, tag }
}
