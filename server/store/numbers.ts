import type { ByteReader, ByteWriter } from './bytes.ts'
import { ByteWriter as Writer } from './bytes.ts'
import { powers, toGrid } from './decimal-grid.ts'

/*
 * Lossless coding of doubles that come from instruments: a logger prints a fixed number of decimals, so v = k / 10^d with integers k.
 *
 *   chunk  = form | d << 4, then  linear: k0, step          every k[i] = k0 + i·step (constant set points, regular times)
 *                                 blocks: reference, length of the heads, heads, 32-bit words
 *   block  = up to 64 values; head = mode << 6 | width, then
 *     offset  min − reference; words hold k − min, `width` bits each
 *     delta   first − reference, least delta; words hold delta − least delta
 *     double  the 64 bits of each value: anything off the grid, NaN with its bits, −0, infinities
 *     single  32 bits each: values that a float32 holds exactly
 * The decoded number is k / 10^d, correctly rounded by IEEE 754, and the encoder takes k only where that gives back the very bits.
 */
const linear = 0
const blocks = 1
const offset = 0
const delta = 1
const double = 2
const single = 3

const blockSize = 64
const heads = new Writer()
let grid = new Float64Array(8192)
let words = new Uint32Array(16384)
let wordBytes = new Uint8Array(words.buffer)
const small = new Uint32Array(blockSize)

function roomFor(n: number): void {
  if (grid.length < n) grid = new Float64Array(n * 2)
  if (words.length < 2 * n + 2) {
    words = new Uint32Array(4 * n)
    wordBytes = new Uint8Array(words.buffer)
  }
}

const bitsFor = (range: number): number => (range < 4294967296 ? 32 - Math.clz32(range) : 64)

function pack(m: number, width: number, at: number): number {
  let w = at
  let acc = 0
  let shift = 0
  for (let j = 0; j < m; j++) {
    const v = small[j]!
    acc |= v << shift
    shift += width
    if (shift >= 32) {
      words[w++] = acc
      shift -= 32
      acc = shift > 0 ? v >>> (width - shift) : 0
    }
  }
  if (shift > 0) words[w++] = acc
  return w
}

function raw(values: Float64Array, start: number, m: number, at: number): { mode: number; at: number } {
  let exact = true
  for (let i = start; i < start + m; i++) if (Math.fround(values[i]!) !== values[i]!) exact = false
  if (exact) {
    new Float32Array(words.buffer, at * 4, m).set(values.subarray(start, start + m))
    return { mode: single, at: at + m }
  }
  wordBytes.set(new Uint8Array(values.buffer, values.byteOffset + start * 8, m * 8), at * 4)
  return { mode: double, at: at + 2 * m }
}

const offBlocks = new Uint8Array(1 << 16)

/**
 * Writes the first n numbers; `readNumbers` gives back the same bits. Returns the decimal places that hold all of them, −1 when
 * some lie off every grid. At most 8 + 1/64 bytes a number and some 20 bytes.
 */
export function writeNumbers(out: ByteWriter, values: Float64Array, n: number): number {
  if (n === 0) return 0
  roomFor(n)
  const off =
    n <= offBlocks.length * blockSize ? offBlocks.subarray(0, Math.ceil(n / blockSize)) : new Uint8Array(Math.ceil(n / blockSize))
  const { places, whole } = toGrid(values, n, grid, off, blockSize)
  if (whole) {
    const step = n > 1 ? grid[1]! - grid[0]! : 0
    let i = 1
    while (i < n && grid[i]! - grid[i - 1]! === step) i++
    if (i === n) {
      out.u8(linear | (places << 4))
      out.signed(grid[0]!)
      out.signed(step)
      return places
    }
  }
  const firstOn = off.indexOf(0)
  const reference = firstOn < 0 ? 0 : grid[firstOn * blockSize]!
  heads.clear()
  let w = 0
  for (let start = 0, b = 0; start < n; start += blockSize, b++) {
    const m = Math.min(blockSize, n - start)
    if (off[b] === 0) {
      const first = grid[start]!
      let low = first
      let high = first
      let lowStep = Infinity
      let highStep = -Infinity
      let previous = first
      for (let i = start + 1; i < start + m; i++) {
        const k = grid[i]!
        const step = k - previous
        previous = k
        if (k < low) low = k
        if (k > high) high = k
        if (step < lowStep) lowStep = step
        if (step > highStep) highStep = step
      }
      const plain = bitsFor(high - low)
      const stepped = m > 1 ? bitsFor(highStep - lowStep) : 64
      if (plain <= stepped && plain <= 32) {
        for (let j = 0; j < m; j++) small[j] = grid[start + j]! - low
        heads.u8((offset << 6) | plain)
        heads.signed(low - reference)
        w = pack(m, plain, w)
        continue
      }
      if (stepped <= 32) {
        for (let j = 1; j < m; j++) small[j - 1] = grid[start + j]! - grid[start + j - 1]! - lowStep
        heads.u8((delta << 6) | stepped)
        heads.signed(first - reference)
        heads.signed(lowStep)
        w = pack(m - 1, stepped, w)
        continue
      }
    }
    const done = raw(values, start, m, w)
    heads.u8(done.mode << 6)
    w = done.at
  }
  out.u8(blocks | (places << 4))
  out.signed(reference)
  out.varint(heads.length)
  out.bytes(heads.view())
  out.bytes(wordBytes.subarray(0, w * 4))
  return whole ? places : -1
}

/** Reads n numbers written by `writeNumbers` into `out`. Errors: STORE_CORRUPT when the bytes end early. */
export function readNumbers(from: ByteReader, out: Float64Array, n: number): void {
  if (n === 0) return
  roomFor(n)
  const head = from.u8()
  const p = powers[head >> 4] ?? 1
  if ((head & 15) === linear) {
    const first = from.signed()
    const step = from.signed()
    for (let i = 0; i < n; i++) out[i] = (first + i * step) / p
    return
  }
  const reference = from.signed()
  const headBytes = from.varint()
  const headEnd = from.position + headBytes
  from.take(headBytes)
  wordBytes.set(from.source.subarray(headEnd, Math.min(from.end, headEnd + n * 8)))
  from.position -= headBytes
  let w = 0
  for (let start = 0; start < n; start += blockSize) {
    const m = Math.min(blockSize, n - start)
    const mark = from.u8()
    const mode = mark >> 6
    const width = mark & 63
    if (mode === offset) w = readOffsets(out, start, m, width, from.signed() + reference, p, w)
    else if (mode === delta) {
      const first = from.signed() + reference
      w = readDeltas(out, start, m, width, first, from.signed(), p, w)
    } else if (mode === double) {
      new Uint8Array(out.buffer, out.byteOffset + start * 8, m * 8).set(wordBytes.subarray(w * 4, w * 4 + m * 8))
      w += 2 * m
    } else {
      out.set(new Float32Array(words.buffer, w * 4, m), start)
      w += m
    }
  }
  from.take(w * 4)
}

function readOffsets(out: Float64Array, start: number, m: number, width: number, low: number, p: number, at: number): number {
  if (width === 0) {
    out.fill(low / p, start, start + m)
    return at
  }
  const mask = width === 32 ? -1 : (1 << width) - 1
  let w = at
  let shift = 0
  let word = words[w]!
  for (let i = start; i < start + m; i++) {
    let v = word >>> shift
    shift += width
    if (shift >= 32) {
      word = words[++w]!
      shift -= 32
      if (shift > 0) v |= word << (width - shift)
    }
    out[i] = (low + ((v & mask) >>> 0)) / p
  }
  return shift > 0 ? w + 1 : w
}

function readDeltas(
  out: Float64Array,
  start: number,
  m: number,
  width: number,
  first: number,
  least: number,
  p: number,
  at: number,
): number {
  const mask = width === 32 ? -1 : (1 << width) - 1
  let w = at
  let shift = 0
  let word = words[w]!
  let k = first
  out[start] = k / p
  for (let i = start + 1; i < start + m; i++) {
    let v = 0
    if (width > 0) {
      v = word >>> shift
      shift += width
      if (shift >= 32) {
        word = words[++w]!
        shift -= 32
        if (shift > 0) v |= word << (width - shift)
      }
      v = (v & mask) >>> 0
    }
    k += least + v
    out[i] = k / p
  }
  return shift > 0 ? w + 1 : w
}
