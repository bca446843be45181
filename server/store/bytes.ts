import { crc32 } from 'node:zlib'
import { MonitorError } from '../core/errors.ts'

const eight = new Uint8Array(8)
const double = new Float64Array(eight.buffer)

/** A growing byte buffer, little-endian. */
export class ByteWriter {
  private buffer = new Uint8Array(1 << 16)
  length = 0

  private need(count: number): void {
    if (this.length + count <= this.buffer.length) return
    const wider = new Uint8Array(Math.max(this.buffer.length * 2, this.length + count))
    wider.set(this.buffer.subarray(0, this.length))
    this.buffer = wider
  }

  clear(): this {
    this.length = 0
    return this
  }

  u8(value: number): void {
    this.need(1)
    this.buffer[this.length++] = value
  }

  f64(value: number): void {
    double[0] = value
    this.bytes(eight)
  }

  /** An integer from 0 to 2^53, seven bits a byte. */
  varint(value: number): void {
    this.need(8)
    let rest = value
    while (rest >= 128) {
      this.buffer[this.length++] = (rest % 128) | 128
      rest = Math.floor(rest / 128)
    }
    this.buffer[this.length++] = rest
  }

  /** An integer from −2^52 to 2^52. */
  signed(value: number): void {
    this.varint(value < 0 ? -2 * value - 1 : 2 * value)
  }

  bytes(source: Uint8Array): void {
    this.need(source.length)
    this.buffer.set(source, this.length)
    this.length += source.length
  }

  /** What was written so far; valid until the next write. */
  view(): Uint8Array {
    return this.buffer.subarray(0, this.length)
  }

  /** A copy of what was written, closed by its CRC-32: SQLite has no checksum of its own over a page. */
  sealed(): Uint8Array {
    const sum = crc32(this.view())
    for (let shift = 0; shift < 32; shift += 8) this.u8((sum >>> shift) & 255)
    return this.view().slice()
  }
}

const broken = (what: string) =>
  new MonitorError('STORE_CORRUPT', `the store holds a damaged record (${what})`, {
    hint: 'restore the data folder from a backup; the damaged record was not used',
  })

/** Reads what ByteWriter wrote; any read past the end is STORE_CORRUPT. */
export class ByteReader {
  readonly source: Uint8Array
  position: number
  readonly end: number

  constructor(source: Uint8Array, position = 0, end = source.length) {
    this.source = source
    this.position = position
    this.end = end
  }

  /** Opens bytes closed by `ByteWriter.sealed`. Errors: STORE_CORRUPT when the checksum differs. */
  static open(sealed: Uint8Array): ByteReader {
    const end = sealed.length - 4
    if (end < 0) throw broken('too short')
    const sum = sealed[end]! | (sealed[end + 1]! << 8) | (sealed[end + 2]! << 16) | (sealed[end + 3]! << 24)
    if (sum >>> 0 !== crc32(sealed.subarray(0, end))) throw broken('checksum')
    return new ByteReader(sealed, 0, end)
  }

  u8(): number {
    if (this.position >= this.end) throw broken('ends early')
    return this.source[this.position++]!
  }

  f64(): number {
    eight.set(this.take(8))
    return double[0]!
  }

  varint(): number {
    let value = 0
    let scale = 1
    for (;;) {
      const byte = this.u8()
      value += (byte & 127) * scale
      if (byte < 128) return value
      scale *= 128
      if (scale > 2 ** 56) throw broken('number too long')
    }
  }

  signed(): number {
    const value = this.varint()
    return value % 2 === 1 ? -(value + 1) / 2 : value / 2
  }

  /** The next bytes, not copied. */
  take(count: number): Uint8Array {
    const start = this.position
    if (start + count > this.end) throw broken('ends early')
    this.position = start + count
    return this.source.subarray(start, start + count)
  }
}
