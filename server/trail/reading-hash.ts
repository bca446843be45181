import { createHash } from 'node:crypto'
import { cell } from '../core/reading.ts'

/** Readings of a stretch of the sequence by column, as the store packs them. */
export interface ReadingColumns {
  readonly width: number
  readonly rows: number
  readonly tMs: Float64Array
  readonly values: readonly Float64Array[]
  readonly codes: readonly Uint8Array[]
  readonly tickAt: readonly number[]
  readonly tickMs: readonly number[]
}

const bytes = (a: Float64Array, n: number) => new Uint8Array(a.buffer, a.byteOffset, n * 8)

/**
 * SHA-256 over what a stretch of readings says, however it is packed: rows, tags (0 without a row) and ticks as three doubles; the times of the rows; for each tag
 * its codes (`cell` of core/reading.ts), a byte a row, then its values, 0 where the code says there is none; the places of the ticks among
 * rows and ticks, then their times. Doubles are IEEE 754, least byte first.
 */
export function readingHash({ width, rows, tMs, values, codes, tickAt, tickMs }: ReadingColumns): string {
  const hash = createHash('sha256')
  hash.update(bytes(Float64Array.of(rows, rows === 0 ? 0 : width, tickAt.length), 3))
  hash.update(bytes(tMs, rows))
  const carried = new Float64Array(rows)
  for (let c = 0; c < width; c++) {
    const code = codes[c]!
    const value = values[c]!
    for (let i = 0; i < rows; i++) carried[i] = code[i] === cell.value || code[i]! >= cell.uncertain ? value[i]! : 0
    hash.update(code.subarray(0, rows)).update(bytes(carried, rows))
  }
  hash.update(bytes(Float64Array.from(tickAt), tickAt.length)).update(bytes(Float64Array.from(tickMs), tickMs.length))
  return hash.digest('hex')
}
