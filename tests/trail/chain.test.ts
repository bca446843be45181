import { describe, expect, it } from 'vitest'
import { hashOf, nothing, partsHash, rowHash } from '../../server/trail/chain.ts'
import { readingHash } from '../../server/trail/reading-hash.ts'

// Expected values by Python's hashlib and struct over the bytes as described.
// REC-10
describe('preimages', () => {
  it('a record: 32 bytes of the hash before it (zeros first), then the UTF-8 bytes of its canonical JSON', () => {
    const first = hashOf(nothing, '{"n":0}')
    expect(first.toString('hex')).toBe('cfa94966dd3f9be5b9a04717523d662aa23c2c2c1eb62fdc320fb535747ea5bb')
    expect(hashOf(first, '{"n":1,"text":"ö"}').toString('hex')).toBe(
      'c192f1bcafe15414f184c1f1b9248fa33670b9261fe77bd51c11a4be9a276179',
    )
  })
  it('parts: each behind its length in four bytes', () => {
    const parts = ['ab', '', 'c'].map((text) => new TextEncoder().encode(text))
    expect(partsHash(parts)).toBe('2cfe02211ae98daa5145daefc9c3f6f87bd1c4d9231fdd7b7bc98aea18fb7215')
    expect(partsHash([...parts].reverse())).not.toBe(partsHash(parts))
  })
  it('a row: the JSON array of its columns', () => {
    expect(rowHash([1, 'x', null])).toBe('c3462050a94ca819b16ded452c5ac9dc70605f7e5c841ab7bff396cf60e2cc67')
  })
  it('readings: counts, times, codes and values of each tag, ticks; a value under an empty code is 0', () => {
    const columns = (under: number) => ({
      width: 1, rows: 2, tMs: Float64Array.of(1000, 2000, 9), values: [Float64Array.of(1.5, under, 9)], codes: [Uint8Array.of(1, 2, 9)],
      tickAt: [1], tickMs: [1500],
    }) // biome-ignore format: a list
    expect(readingHash(columns(0))).toBe('a05ee2e40d15f9f4f9306b46057d23014e15adda5dd2fe459fee019d590846e4')
    expect(readingHash(columns(7))).toBe(readingHash(columns(0)))
  })
})
