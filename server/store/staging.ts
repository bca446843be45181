import { cell, type RowBlock } from '../core/reading.ts'
import type { Entry } from '../core/sequence.ts'
import { ByteReader, ByteWriter } from './bytes.ts'

/*
 * One append of one run, in arrival order: written in microseconds, read rarely, packed into a segment later.
 * rows, ticks, gap to the place of each tick and its time; then times, run lengths of the codes, and the numbers row by row:
 * all of them when every code carries one (or some other was not +0), else only those under codes that carry one.
 */
const out = new ByteWriter()
const empty = (code: number): boolean => code === cell.absent || code === cell.missing || code === cell.unreadable

const asBytes = (a: Float64Array, n: number) => new Uint8Array(a.buffer, a.byteOffset, n * 8)

/** Rows and ticks of `entries` as one record; acts are left out. All blocks must have this width. */
export function encodeStage(entries: readonly Entry[], width: number): Uint8Array {
  out.clear()
  const blocks: RowBlock[] = []
  const ticks: { at: number; tMs: number }[] = []
  let rows = 0
  for (const entry of entries) {
    if (entry.kind === 'tick') ticks.push({ at: rows + ticks.length, tMs: entry.tMs })
    if (entry.kind !== 'rows') continue
    blocks.push(entry.block)
    rows += entry.block.rows
  }
  out.varint(rows)
  out.varint(ticks.length)
  let before = 0
  for (const tick of ticks) {
    out.varint(tick.at - before)
    out.f64(tick.tMs)
    before = tick.at
  }
  for (const block of blocks) out.bytes(asBytes(block.tMs, block.rows))
  let run = 0
  let code = -1
  let sparse = false
  let dense = false
  for (const block of blocks) {
    for (let i = 0, n = block.rows * width; i < n; i++) {
      const k = block.codes[i]!
      if (empty(k)) {
        sparse = true
        if (!Object.is(block.values[i], 0)) dense = true
      }
      if (k === code) run++
      else {
        if (run > 0) out.varint(run * 8 + code)
        code = k
        run = 1
      }
    }
  }
  if (run > 0) out.varint(run * 8 + code)
  const all = dense || !sparse
  out.u8(all ? 1 : 0)
  for (const block of blocks) {
    const n = block.rows * width
    if (all) out.bytes(asBytes(block.values, n))
    else for (let i = 0; i < n; i++) if (!empty(block.codes[i]!)) out.f64(block.values[i]!)
  }
  return out.sealed()
}

export interface Stage {
  readonly block: RowBlock
  readonly tickAt: Float64Array
  readonly tickMs: Float64Array
}

/** Errors: STORE_CORRUPT. */
export function decodeStage(body: Uint8Array, width: number): Stage {
  const from = ByteReader.open(body)
  const rows = from.varint()
  const ticks = from.varint()
  const tickAt = new Float64Array(ticks)
  const tickMs = new Float64Array(ticks)
  let at = 0
  for (let i = 0; i < ticks; i++) {
    at += from.varint()
    tickAt[i] = at
    tickMs[i] = from.f64()
  }
  const n = rows * width
  const block: RowBlock = { rows, width, tMs: new Float64Array(rows), values: new Float64Array(n), codes: new Uint8Array(n) }
  asBytes(block.tMs, rows).set(from.take(rows * 8))
  for (let i = 0; i < n; ) {
    const run = from.varint()
    const end = Math.min(n, i + Math.max(1, Math.floor(run / 8)))
    block.codes.fill(run % 8, i, end)
    i = end
  }
  if (from.u8() === 1) asBytes(block.values, n).set(from.take(n * 8))
  else for (let i = 0; i < n; i++) if (!empty(block.codes[i]!)) block.values[i] = from.f64()
  return { block, tickAt, tickMs }
}
