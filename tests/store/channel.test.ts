import fc from 'fast-check'
import { expect, it } from 'vitest'
import { cell } from '../../server/core/reading.ts'
import { ByteReader, ByteWriter } from '../../server/store/bytes.ts'
import { readChannel, writeChannel } from '../../server/store/channel.ts'
import { anyDouble, bitsOf, noise } from './helpers.ts'

function encode(values: Float64Array, codes: Uint8Array): Uint8Array {
  const out = new ByteWriter()
  writeChannel(out, values, codes, codes.length)
  return out.sealed()
}

const anyCode = fc.constantFrom(...Object.values(cell))
/** Codes in runs of any length, numbers where they carry one; now and then a number where none belongs. */
const stretch = fc.tuple(anyCode, fc.integer({ min: 1, max: 60 }), anyDouble, fc.boolean(), fc.integer({ min: 0, max: 40 }))

it('gives back every code and every bit of the numbers of any mixture of runs of codes', () => {
  fc.assert(
    fc.property(fc.array(stretch, { maxLength: 12 }), fc.boolean(), (stretches, odd) => {
      const codes: number[] = []
      const values: number[] = []
      for (const [code, length, value, mixed, other] of stretches) {
        for (let i = 0; i < length; i++) {
          const k = mixed && i % 3 === 1 ? other % 6 : code
          const carries = k === cell.value || k === cell.uncertain || k === cell.bad
          codes.push(k)
          values.push(carries || (odd && i === 7) ? value : 0)
        }
      }
      const n = codes.length
      const back = { values: new Float64Array(n).fill(9), codes: new Uint8Array(n).fill(9) }
      const plain = readChannel(
        ByteReader.open(encode(Float64Array.from(values), Uint8Array.from(codes))),
        back.values,
        back.codes,
        n,
      )
      expect(Array.from(back.codes)).toEqual(codes)
      expect(Array.from(back.values, bitsOf)).toEqual(values.map(bitsOf))
      if (plain) expect(codes.every((k) => k === cell.value)).toBe(true)
    }),
    { numRuns: 300 },
  )
})

it('costs nothing for a tag that is never named, and next to nothing for one named in every 24th row of a long log', () => {
  const n = 4096
  expect(encode(new Float64Array(n), new Uint8Array(n)).length).toBeLessThan(10)
  const codes = Uint8Array.from({ length: n }, (_, i) => (i % 24 === 5 ? cell.value : cell.absent))
  const values = Float64Array.from(codes, (k) => (k === cell.value ? 12.5 : 0))
  expect(encode(values, codes).length).toBeLessThan(30)
})

it('codes hostile codes in three bits each beside the numbers they carry', () => {
  const n = 4096
  const next = noise(2)
  const codes = Uint8Array.from({ length: n }, () => 1 + Math.floor(next() * 5))
  const values = Float64Array.from(codes, (k) => (k === cell.missing || k === cell.unreadable ? 0 : next()))
  const carrying = codes.filter((k) => k !== cell.missing && k !== cell.unreadable).length
  expect(encode(values, codes).length).toBeLessThan(carrying * (8 + 1 / 64) + (n * 3) / 8 + 40)
})
