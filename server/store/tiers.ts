import { MonitorError } from '../core/errors.ts'
import { cell } from '../core/reading.ts'
import { isPlain } from './channel.ts'
import type { Columns } from './segment.ts'

/*
 * Summaries for trends. A page belongs to one segment (level 0) or to `fan` pages of the level below, and holds for each time cell
 * of one width and each tag the number of readings, least, greatest and sum. Cells lie on the grid n·width since 1970 and each width
 * divides the next, so pages add up exactly, late and out-of-order readings included: they just add a cell to a later page.
 */
export const fan = 4
/** 1.25 s to 485 days, doubling. */
export const cellWidthsMs = Array.from({ length: 26 }, (_, i) => 1250 * 2 ** i)
/** Readings a tag a cell at least, at level 0. Of a step up by `fan`, 2.5 goes into wider cells, 1.6 into more cells a page. */
const readingsPerCell = 96
const growth = 2.5
/** Where a segment holds few readings of a tag, as logs of one reading a row do: up to so many cells, of so many readings at least. */
const sparse = { cells: 16, readingsPerCell: 8 }

/** Most cells of a page of a level with so many readings a tag. */
function mostCells(readings: number, level: number): number {
  const q = readings / growth ** level
  return Math.max(q / readingsPerCell, Math.min(sparse.cells * (fan / growth) ** level, q / sparse.readingsPerCell))
}

export interface Cells {
  /** Readings of this tag in the cell; 0 leaves the others 0. */
  readonly count: Float64Array
  readonly min: Float64Array
  readonly max: Float64Array
  readonly sum: Float64Array
  /** Decimal places that hold every reading, so that sums are exact; −1 when some reading lies off every grid. */
  places: number
}

export interface Page {
  readonly cellMs: number
  /** Number of each cell since 1970, rising. */
  readonly at: Float64Array
  readonly tags: readonly Cells[]
}

/** Room for n cells. */
export const cells = (n: number): Cells => ({
  count: new Float64Array(n),
  min: new Float64Array(n),
  max: new Float64Array(n),
  sum: new Float64Array(n),
  places: 0,
})

/** Readings that a trend draws: plain and uncertain ones. */
export const isDrawn = (code: number, value: number): boolean =>
  (code === cell.value || code === cell.uncertain) && Number.isFinite(value)

/** The numbers floor(times/width), each once, rising; null when there are more than `most`. Times in order cost no search. */
function distinct(times: Float64Array, widthMs: number, most: number): Float64Array | null {
  const found: number[] = []
  let last = Number.NaN
  let inOrder = true
  for (let i = 0; i < times.length; i++) {
    const n = Math.floor(times[i]! / widthMs)
    if (n === last) continue
    if (n < last) inOrder = false
    last = n
    if (found.length === most && inOrder) return null
    found.push(n)
  }
  const once = inOrder ? Float64Array.from(found) : Float64Array.from(new Set(found)).sort()
  return once.length > most ? null : once
}

/**
 * A sum of numbers with so many decimals, put back on their grid: then it is the exact sum. `size` bounds every partial sum; rounding in
 * `additions` additions stays under additions·2^-53·size, less than half a grid step as long as additions·size·10^places < 2^51; beyond
 * that it is left as it is.
 */
function snap(sum: number, additions: number, size: number, places: number): number {
  if (places < 0) return sum
  const p = 10 ** places
  return additions * size * p < 2 ** 51 ? Math.round(sum * p) / p : sum
}

function countDrawn(codes: Uint8Array, values: Float64Array, rows: number): number {
  let count = 0
  for (let i = 0; i < rows; i++) if (isDrawn(codes[i]!, values[i]!)) count++
  return count
}

/** Narrowest cells, at least `least` wide, of which at most `most` hold the times; the widest when none are so few. */
function chooseCells(
  times: Float64Array,
  most: number,
  least: number,
): { cellMs: number; at: Float64Array; slotOf: Map<number, number> } {
  const widest = cellWidthsMs.at(-1)!
  for (const cellMs of cellWidthsMs) {
    if (cellMs < least) continue
    const at = distinct(times, cellMs, cellMs === widest ? Infinity : Math.max(1, most))
    if (at !== null) return { cellMs, at, slotOf: new Map(Array.from(at, (n, i) => [n, i] as const)) }
  }
  throw new MonitorError('STORE_CORRUPT', `summary cells of ${least} ms are wider than this build knows`)
}

/** The level-0 page of a segment. `places` as from `encodeStrips`. */
export function summarise(columns: Columns, places: readonly number[]): Page {
  const { rows, width, tMs } = columns
  const plain = columns.codes.map((codes) => isPlain(codes, rows))
  const readings = columns.codes.map((codes, c) => (plain[c] ? rows : countDrawn(codes, columns.values[c]!, rows)))
  const used = Math.max(1, readings.filter((n) => n > 0).length)
  const most = mostCells(readings.reduce((a, b) => a + b, 0) / used, 0)
  const { cellMs, at, slotOf } = chooseCells(tMs.subarray(0, rows), most, 0)
  const slots = new Uint32Array(rows)
  let last = Number.NaN
  let slot = 0
  for (let i = 0; i < rows; i++) {
    const n = Math.floor(tMs[i]! / cellMs)
    if (n !== last) {
      slot = slotOf.get(n)!
      last = n
    }
    slots[i] = slot
  }
  const tags: Cells[] = []
  for (let c = 0; c < width; c++) {
    const page = cells(at.length)
    page.places = places[c]!
    addToCells(page, slots, columns.values[c]!, columns.codes[c]!, plain[c]!)
    const { count, min, max, sum } = page
    for (let s = 0; s < at.length; s++) sum[s] = snap(sum[s]!, count[s]!, count[s]! * Math.max(-min[s]!, max[s]!), places[c]!)
    tags.push(page)
  }
  return { cellMs, at, tags }
}

/** Adds the drawn readings to the cells their slots name; a negative slot is left out. `plain` when every code is `cell.value`. */
export function addToCells(
  { count, min, max, sum }: Cells,
  slots: Int32Array | Uint32Array,
  values: Float64Array,
  codes: Uint8Array,
  plain: boolean,
): void {
  const n = slots.length
  for (let i = 0; i < n; ) {
    const s = slots[i]!
    let low = Infinity
    let high = -Infinity
    let total = 0
    let taken = 0
    for (; i < n && slots[i] === s; i++) {
      const v = values[i]!
      if (plain ? v - v !== 0 : !isDrawn(codes[i]!, v)) continue
      if (v < low) low = v
      if (v > high) high = v
      total += v
      taken++
    }
    if (s < 0 || taken === 0) continue
    if (count[s] === 0 || low < min[s]!) min[s] = low
    if (count[s] === 0 || high > max[s]!) max[s] = high
    count[s] = count[s]! + taken
    sum[s] = sum[s]! + total
  }
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
  const most = mostCells(readings / Math.max(1, used), level)
  const least = Math.max(...pages.map((page) => page.cellMs))
  const times = new Float64Array(pages.reduce((n, page) => n + page.at.length, 0))
  let filled = 0
  for (const page of pages) for (const n of page.at) times[filled++] = n * page.cellMs
  const { cellMs, at, slotOf } = chooseCells(times, most, least)
  const tags: Cells[] = []
  for (let c = 0; c < width; c++) {
    const whole = cells(at.length)
    const additions = new Float64Array(at.length)
    for (const page of pages) {
      const own = page.tags[c]
      if (own === undefined) continue
      whole.places = own.places < 0 || whole.places < 0 ? -1 : Math.max(whole.places, own.places)
      for (let i = 0; i < page.at.length; i++) {
        if (own.count[i] === 0) continue
        const s = slotOf.get(Math.floor((page.at[i]! * page.cellMs) / cellMs))!
        if (whole.count[s] === 0 || own.min[i]! < whole.min[s]!) whole.min[s] = own.min[i]!
        if (whole.count[s] === 0 || own.max[i]! > whole.max[s]!) whole.max[s] = own.max[i]!
        whole.count[s] = whole.count[s]! + own.count[i]!
        whole.sum[s] = whole.sum[s]! + own.sum[i]!
        additions[s] = additions[s]! + 1
      }
    }
    for (let s = 0; s < at.length; s++)
      whole.sum[s] = snap(whole.sum[s]!, additions[s]!, whole.count[s]! * Math.max(-whole.min[s]!, whole.max[s]!), whole.places)
    tags.push(whole)
  }
  return { cellMs, at, tags }
}
