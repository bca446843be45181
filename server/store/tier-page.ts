import { ByteReader, ByteWriter } from './bytes.ts'
import { readNumbers, writeNumbers } from './numbers.ts'
import type { Cells, Page } from './tiers.ts'

const out = new ByteWriter()
const part = new ByteWriter()

const equal = (a: Float64Array, b: Float64Array): boolean => {
  for (let i = 0; i < a.length; i++) if (a[i] !== b[i]) return false
  return true
}

/**
 * Cells; the different columns of counts, mostly one for all tags; a list of lengths; then each tag: which counts, decimal places, least,
 * greatest, and sum − count·least, which stays small where the first and last cell are only partly filled.
 */
export function encodePage(page: Page): Uint8Array {
  const n = page.at.length
  out.clear()
  part.clear()
  out.varint(page.cellMs)
  out.varint(n)
  writeNumbers(out, page.at, n)
  const counts: Float64Array[] = []
  const which = page.tags.map(({ count }) => {
    const known = counts.findIndex((c) => equal(c, count))
    return known >= 0 ? known : counts.push(count) - 1
  })
  out.varint(counts.length)
  for (const count of counts) writeNumbers(out, count, n)
  out.varint(page.tags.length)
  page.tags.forEach((tag, c) => {
    const before = part.length
    part.varint(which[c]!)
    part.varint(tag.places + 1)
    writeNumbers(part, tag.min, n)
    writeNumbers(part, tag.max, n)
    const excess = tag.sum.map((sum, i) => onGrid(sum - tag.count[i]! * tag.min[i]!, tag.places))
    writeNumbers(part, excess, n)
    out.varint(part.length - before)
  })
  out.bytes(part.view())
  return out.sealed()
}

const onGrid = (x: number, places: number): number => (places < 0 ? x : Math.round(x * 10 ** places) / 10 ** places)

/** Opens a page; each tag is decoded only when asked for, into cells of the caller's that hold at least as many. Errors: STORE_CORRUPT. */
export function openPage(body: Uint8Array): {
  cellMs: number
  at: Float64Array
  width: number
  tag: (index: number, into: Cells) => Cells
} {
  const from = ByteReader.open(body)
  const cellMs = from.varint()
  const n = from.varint()
  const at = new Float64Array(n)
  readNumbers(from, at, n)
  const counts = Array.from({ length: from.varint() }, () => {
    const count = new Float64Array(n)
    readNumbers(from, count, n)
    return count
  })
  const width = from.varint()
  const starts = [0]
  for (let c = 0; c < width; c++) starts.push(starts[c]! + from.varint())
  const base = from.position
  const tag = (index: number, into: Cells): Cells => {
    if (index >= width) {
      into.count.fill(0, 0, n)
      return into
    }
    const reader = new ByteReader(from.source, base + starts[index]!, base + starts[index + 1]!)
    const { count, min, max, sum } = into
    count.set(counts[reader.varint()]!)
    into.places = reader.varint() - 1
    readNumbers(reader, min, n)
    readNumbers(reader, max, n)
    readNumbers(reader, sum, n)
    const p = into.places < 0 ? 0 : 10 ** into.places
    for (let i = 0; i < n; i++) {
      const x = sum[i]! + count[i]! * min[i]!
      sum[i] = p === 0 ? x : Math.round(x * p) / p
    }
    return into
  }
  return { cellMs, at, width, tag }
}
