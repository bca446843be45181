import { cell } from '../core/reading.ts'
import type { ByteReader, ByteWriter } from './bytes.ts'
import { readNumbers, writeNumbers } from './numbers.ts'

/*
 * One tag over the rows of a segment: which rows say something of it, the cell codes of those, and the numbers under codes that
 * carry one. Form byte: 1 every row present, 2 numbers under every code are kept (some was not +0), 4 one code for all.
 */
const everyRow = 1
const everyNumber = 2
const oneCode = 4

const hasNumber = (code: number): boolean => code === cell.value || code === cell.uncertain || code === cell.bad

let positions = new Float64Array(8192)
let numbers = new Float64Array(8192)
let present = new Uint8Array(8192)
function roomFor(n: number): void {
  if (positions.length >= n) return
  positions = new Float64Array(n * 2)
  numbers = new Float64Array(n * 2)
  present = new Uint8Array(n * 2)
}

/** Whether every row carries a plain value. */
export function isPlain(codes: Uint8Array, n: number): boolean {
  for (let i = 0; i < n; i++) if (codes[i] !== cell.value) return false
  return true
}

/** Codes, at most 7 each: run lengths, or three bits each where runs are short. The choice is the first byte. */
function writeCodes(out: ByteWriter, codes: Uint8Array, n: number): void {
  let runs = 1
  for (let i = 1; i < n; i++) if (codes[i] !== codes[i - 1]) runs++
  if (runs * 2 > (n * 3) / 8) {
    out.u8(1)
    for (let i = 0; i < n; i += 8) {
      let bits = 0
      for (let j = Math.min(7, n - 1 - i); j >= 0; j--) bits = bits * 8 + codes[i + j]!
      for (let byte = 0; byte < 3; byte++) {
        out.u8(bits & 255)
        bits >>>= 8
      }
    }
    return
  }
  out.u8(0)
  for (let i = 0; i < n; ) {
    let j = i + 1
    while (j < n && codes[j] === codes[i]) j++
    out.varint((j - i) * 8 + codes[i]!)
    i = j
  }
}

function readCodes(from: ByteReader, codes: Uint8Array, n: number): void {
  if (from.u8() === 1) {
    for (let i = 0; i < n; i += 8) {
      let bits = from.u8() | (from.u8() << 8) | (from.u8() << 16)
      for (let j = i; j < Math.min(n, i + 8); j++) {
        codes[j] = bits & 7
        bits >>>= 3
      }
    }
    return
  }
  for (let i = 0; i < n; ) {
    const run = from.varint()
    const end = Math.min(n, i + Math.max(1, Math.floor(run / 8)))
    codes.fill(run % 8, i, end)
    i = end
  }
}

/** Writes one tag's n values and codes. Returns the decimal places that hold all its numbers, −1 when there are none such. */
export function writeChannel(out: ByteWriter, values: Float64Array, codes: Uint8Array, n: number): number {
  if (n > 0 && isPlain(codes, n)) {
    out.u8(everyRow | oneCode)
    out.u8(cell.value)
    return writeNumbers(out, values, n)
  }
  roomFor(n)
  let count = 0
  let form = oneCode
  let kept = 0
  for (let i = 0; i < n; i++) {
    const code = codes[i]!
    if (!hasNumber(code) && !Object.is(values[i], 0)) form |= everyNumber
    if (code === cell.absent) continue
    if (count > 0 && present[0] !== code) form &= ~oneCode
    positions[count] = i
    present[count++] = code
  }
  if (count === n) form |= everyRow
  out.u8(form)
  if (count < n) {
    out.varint(count)
    writeNumbers(out, positions, count)
  }
  if (count > 0) {
    if ((form & oneCode) !== 0) out.u8(present[0]!)
    else writeCodes(out, present, count)
  }
  if ((form & everyNumber) !== 0 || (count === n && (form & oneCode) !== 0 && hasNumber(present[0]!)))
    return writeNumbers(out, values, n)
  for (let j = 0; j < count; j++) if (hasNumber(present[j]!)) numbers[kept++] = values[positions[j]!]!
  return writeNumbers(out, numbers, kept)
}

/** Reads one tag's n values and codes. Returns whether every row has a plain value, so that callers may skip the codes. */
export function readChannel(from: ByteReader, values: Float64Array, codes: Uint8Array, n: number): boolean {
  roomFor(n)
  const form = from.u8()
  let count = n
  if ((form & everyRow) === 0) {
    count = Math.min(n, from.varint())
    readNumbers(from, positions, count)
  }
  const one = count > 0 && (form & oneCode) !== 0 ? from.u8() : -1
  if (one >= 0 && count === n) {
    codes.fill(one, 0, n)
    if ((form & everyNumber) !== 0 || hasNumber(one)) readNumbers(from, values, n)
    else values.fill(0, 0, n)
    return one === cell.value
  }
  if (one >= 0) present.fill(one, 0, count)
  else if (count > 0) readCodes(from, present, count)
  if (count === n) codes.set(present.subarray(0, n))
  else {
    codes.fill(cell.absent, 0, n)
    for (let j = 0; j < count; j++) codes[positions[j]!] = present[j]!
  }
  if ((form & everyNumber) !== 0) {
    readNumbers(from, values, n)
    return false
  }
  let kept = 0
  for (let j = 0; j < count; j++) if (hasNumber(present[j]!)) kept++
  readNumbers(from, numbers, kept)
  values.fill(0, 0, n)
  let next = 0
  for (let i = 0; i < n; i++) if (hasNumber(codes[i]!)) values[i] = numbers[next++]!
  return false
}
