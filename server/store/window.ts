import { cell } from '../core/reading.ts'

/** Every sample of one tag in a window by source time, equal times in order of arrival; codes as in a RowBlock, never absent. */
export interface SamplesOfTag {
  readonly tag: number
  readonly tMs: Float64Array
  readonly values: Float64Array
  readonly codes: Uint8Array
}

export interface Chunk {
  readonly values: Float64Array
  readonly codes: Uint8Array
  /** Every code is `cell.value`. */
  readonly plain: boolean
}
/** Rows of a segment or of a staged record: their times and a way to one tag; what it gives is good until asked again. */
export type Rows = { readonly tMs: Float64Array; readonly tag: (index: number) => Chunk }

/** The stretch of rows from the first to the last in [fromMs, toMs), and whether all between are. */
export interface Piece extends Rows {
  readonly from: number
  readonly to: number
  readonly whole: boolean
}

export function windowed(rows: Rows, fromMs: number, toMs: number): Piece {
  const { tMs, tag } = rows
  let from = tMs.length
  let to = 0
  let inside = 0
  for (let i = 0; i < tMs.length; i++) {
    const t = tMs[i]!
    if (t < fromMs || t >= toMs) continue
    if (from > i) from = i
    to = i + 1
    inside++
  }
  from = Math.min(from, to)
  return { tMs, tag, from, to, whole: inside === to - from }
}

/** The times of all pieces, one after the other: those of every tag that has a sample in each row. */
export function sharedTimes(pieces: readonly Piece[]): Float64Array {
  const all = new Float64Array(pieces.reduce((n, { from, to }) => n + to - from, 0))
  let at = 0
  for (const { tMs, from, to } of pieces) {
    all.set(tMs.subarray(from, to), at)
    at += to - from
  }
  return all
}

/** One tag's samples in order of arrival; `tMs` is `shared` itself where nothing was left out. */
export function gather(tag: number, pieces: readonly Piece[], shared: Float64Array, fromMs: number, toMs: number): SamplesOfTag {
  const values = new Float64Array(shared.length)
  const codes = new Uint8Array(shared.length)
  let times: Float64Array | null = null
  let n = 0
  for (const { tMs, tag: read, from, to, whole } of pieces) {
    const chunk = read(tag)
    const gap = chunk.plain ? -1 : chunk.codes.indexOf(cell.absent, from)
    if (whole && (gap < 0 || gap >= to)) {
      values.set(chunk.values.subarray(from, to), n)
      if (chunk.plain) codes.fill(cell.value, n, n + to - from)
      else codes.set(chunk.codes.subarray(from, to), n)
      times?.set(tMs.subarray(from, to), n)
      n += to - from
      continue
    }
    times ??= shared.slice()
    for (let i = from; i < to; i++) {
      if (chunk.codes[i] === cell.absent || tMs[i]! < fromMs || tMs[i]! >= toMs) continue
      times[n] = tMs[i]!
      values[n] = chunk.values[i]!
      codes[n++] = chunk.codes[i]!
    }
  }
  return times === null
    ? { tag, tMs: shared, values, codes }
    : { tag, tMs: times.slice(0, n), values: values.slice(0, n), codes: codes.slice(0, n) }
}

export function isRising(tMs: Float64Array): boolean {
  for (let i = 1; i < tMs.length; i++) if (tMs[i]! < tMs[i - 1]!) return false
  return true
}

/** By time; equal times stay in order of arrival. */
export function inOrder({ tag, tMs, values, codes }: SamplesOfTag): SamplesOfTag {
  const order = Array.from(tMs, (_, j) => j).sort((a, b) => tMs[a]! - tMs[b]! || a - b)
  return {
    tag,
    tMs: Float64Array.from(order, (j) => tMs[j]!),
    values: Float64Array.from(order, (j) => values[j]!),
    codes: Uint8Array.from(order, (j) => codes[j]!),
  }
}
