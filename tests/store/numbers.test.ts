import fc from 'fast-check'
import { expect, it } from 'vitest'
import { ByteReader, ByteWriter } from '../../server/store/bytes.ts'
import { readNumbers, writeNumbers } from '../../server/store/numbers.ts'
import { anyDouble, bitsOf, noise } from './helpers.ts'

function encode(values: readonly number[]): Uint8Array {
  const out = new ByteWriter()
  writeNumbers(out, Float64Array.from(values), values.length)
  return out.sealed()
}
function decode(bytes: Uint8Array, n: number): number[] {
  const out = new Float64Array(n)
  readNumbers(ByteReader.open(bytes), out, n)
  return Array.from(out)
}
function same(values: readonly number[]): void {
  expect(decode(encode(values), values.length).map(bitsOf)).toEqual(values.map(bitsOf))
}

it('gives back every bit of any mixture of doubles: grid values, NaN, −0, infinities, denormals', () => {
  fc.assert(fc.property(fc.array(anyDouble, { maxLength: 400 }), same), { numRuns: 300 })
})

it('gives back every bit of runs of like numbers with a hostile one among them', () => {
  const run = fc.tuple(
    anyDouble,
    anyDouble,
    fc.integer({ min: 1, max: 200 }),
    fc.integer({ min: -1000, max: 1000 }),
    fc.integer({ min: 0, max: 6 }),
  )
  const values = fc
    .array(run, { minLength: 1, maxLength: 5 })
    .map((runs) =>
      runs.flatMap(([start, odd, n, step, d]) => [
        ...Array.from({ length: n }, (_, i) => Math.round(start * 10 ** d + i * step) / 10 ** d),
        odd,
      ]),
    )
  fc.assert(fc.property(values, same), { numRuns: 300 })
})

it('keeps a NaN with its payload and its sign', () => {
  const words = new Uint32Array([0x12345678, 0x7ff80001, 0x1, 0xfff80000])
  const out = new ByteWriter()
  writeNumbers(out, new Float64Array(words.buffer), 2)
  const back = new Float64Array(2)
  readNumbers(new ByteReader(out.view()), back, 2)
  expect(Array.from(new Uint32Array(back.buffer))).toEqual(Array.from(words))
})

it('codes a set point of 4,096 readings and regular times of 4,096 rows in under 20 bytes each', () => {
  expect(encode(Array(4096).fill(12.5)).length).toBeLessThan(20)
  expect(encode(Array.from({ length: 4096 }, (_, i) => 1_700_000_000_000 + 100 * i)).length).toBeLessThan(20)
})

// Steps of 94 to 106 ms take 4 bits; a block of 64 rows has a head of 1 + 4 + 2 bytes: 0.61 bytes a row.
it('codes times with ±3 ms of jitter in 0.61 bytes a row', () => {
  const next = noise(7)
  expect(encode(Array.from({ length: 4096 }, (_, i) => 1_700_000_000_000 + 100 * i + Math.floor(next() * 7))).length).toBeLessThan(
    4096 * 0.61,
  )
})

it('never needs more than 8 + 1/64 bytes a number and 20 bytes', () => {
  fc.assert(
    fc.property(fc.array(fc.double({ noDefaultInfinity: true }), { minLength: 1, maxLength: 500 }), (values) => {
      expect(encode(values).length).toBeLessThanOrEqual(values.length * 8 + Math.ceil(values.length / 64) + 24)
    }),
  )
})

it('codes values that a float32 holds in 4 bytes, and one off-grid value spoils its 64 neighbours only', () => {
  const next = noise(3)
  const singles = Array.from({ length: 4096 }, () => Math.fround(next() * 100))
  same(singles)
  expect(encode(singles).length).toBeLessThan(4096 * 4.1)
  const decimals = Array.from({ length: 4096 }, () => Math.round(next() * 255) / 100)
  const plain = encode(decimals).length
  decimals[2000] = Math.PI
  same(decimals)
  expect(encode(decimals).length).toBeLessThan(plain + 64 * 8)
})

it('refuses bytes with any single bit turned', () => {
  const bytes = encode(Array.from({ length: 300 }, (_, i) => Math.sin(i)))
  fc.assert(
    fc.property(fc.integer({ min: 0, max: bytes.length * 8 - 1 }), (bit) => {
      const broken = bytes.slice()
      broken[bit >> 3] = broken[bit >> 3]! ^ (1 << (bit & 7))
      expect(() => decode(broken, 300)).toThrow('checksum')
    }),
  )
})
