import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { createBank } from '../../../server/core/bank/bank.ts'
import { createFilter } from '../../../server/core/bank/filter.ts'
import {
  births,
  type Column,
  explanations,
  giveBirth,
  isKept,
  type Kind,
  likelihood,
  observe,
  sizeOf,
} from '../../../server/core/bank/hypotheses.ts'
import { disturbances as d, rowOf, type SegmentObservation, stateMap } from '../../../server/core/bank/model.ts'
import { randomOf } from '../../../server/core/sim/random.ts'
import { duo, observer, signature } from './world.ts'

const kinds: readonly Kind[] = ['deposit', 'step', 'settling', 'tap-ramp', 'tap-step', 'stream']
const map = stateMap(duo)

/** Filter and columns over given y, every column decayed by Φ before each step; Σ r²/S from the birth on. */
function through(
  y: readonly (readonly number[])[],
  at: (k: number) => SegmentObservation[],
  born: number,
  births0: readonly Column[],
) {
  const filter = createFilter(duo, map)
  const f = filter.fresh()
  const columns = births0.map((c) => ({ ...c, response: new Float64Array(map.size), d: 0, j: 0 }))
  let sum = 0
  const hours = 1 / 120
  y.forEach((ys, k) => {
    const o = at(k)
    if (k === 0) for (const s of [0, 1]) filter.startSegment(f, s, { ...o[s]!, y: 0 })
    filter.advance(
      f,
      hours,
      o.map((x) => x.dpPa),
      [false, false, false],
    )
    for (const c of columns) {
      for (const s of [0, 1]) c.response[map.wander(s)]! *= Math.exp(-hours / d.wanderTauH)
      for (const i of map.meter) c.response[i]! *= Math.exp(-hours / d.meterTauH)
    }
    for (const s of [0, 1]) {
      const row = rowOf(duo, map, s, o[s]!, o[0]!.tapPa)
      const u = filter.update(f, row, ys[s]!, 4e-6)
      if (k >= born) {
        sum += u.innovation ** 2 / u.variance
        observe(columns, duo, s, k, o[s]!, row, u.innovation, u.variance, u.gain)
      }
    }
  })
  return { sum, columns }
}

const column = (kind: Kind, of: number, born: number): Column => ({
  kind,
  of,
  scale: 1,
  born,
  response: new Float64Array(map.size),
  d: 0,
  j: 0,
})

describe('a signature pushed through the filter', () => {
  const cases = fc.record({
    kind: fc.constantFrom(...kinds),
    of: fc.nat(2),
    born: fc.integer({ min: 2, max: 30 }),
    lasts: fc.integer({ min: 5, max: 40 }),
    size: fc.double({ min: -0.02, max: 0.02, noNaN: true }),
    seed: fc.nat(1000),
  })

  it('has L = d²/2J equal to half of Σr²/S as it is less Σr²/S without the sized signature, to 1e-7, for any birth, size and kind', () => {
    fc.assert(
      fc.property(cases, ({ kind, of, born, lasts, size, seed }) => {
        const owner = kind === 'stream' ? 0 : kind.startsWith('tap') ? of : of % 2
        const c = column(kind, owner, born)
        const r = randomOf(seed, 'exact')
        const at = observer(duo, {})
        const o = at(0)
        const a = (k: number, s: number) => (k < born ? 0 : signature(duo, c, s, k - born, o[s]!))
        const y = Array.from({ length: born + lasts }, (_, k) => [0, 1].map((s) => 0.003 * r.normal() + size * a(k, s)))
        const { sum, columns } = through(y, () => o, born, [c])
        const col = columns[0]!
        const best = sizeOf(col)
        const left = through(
          y.map((ys, k) => ys.map((v, s) => v - best * a(k, s))),
          () => o,
          born,
          [c],
        )
        expect(Math.abs(col.d ** 2 / (2 * col.j) - (sum - left.sum) / 2)).toBeLessThan(1e-7 * Math.max(1, sum))
        expect(Math.abs(left.columns[0]!.d)).toBeLessThan(1e-6 * Math.max(1, Math.sqrt(col.j)))
      }),
      { numRuns: 60, seed: 31 },
    )
  })

  it('gives back the size of a noiseless disturbance to 1e-9, and of a noisy one without bias: mean of 200 within 3 standard errors, spread 1/√J within 15 %', () => {
    const at = observer(duo, {})
    const o = at(0)
    for (const [kind, of, size] of [
      ['deposit', 0, 0.002],
      ['step', 1, -0.03],
      ['tap-ramp', 1, 0.4],
      ['stream', 0, 0.05],
    ] as const) {
      // biome-ignore format: a table
      const c = column(kind, of, 10)
      const made = (noise: (s: number) => number) =>
        Array.from({ length: 40 }, (_, k) =>
          [0, 1].map((s) => noise(s) + (k < 10 ? 0 : size * signature(duo, c, s, k - 10, o[s]!))),
        )
      const exact = through(
        made(() => 0),
        () => o,
        10,
        [c],
      ).columns[0]!
      expect(sizeOf(exact)).toBeCloseTo(size, 9)
      const r = randomOf(8, kind)
      const found = Array.from({ length: 200 }, () =>
        sizeOf(
          through(
            made(() => 0.002 * r.normal()),
            () => o,
            10,
            [c],
          ).columns[0]!,
        ),
      )
      const mean = found.reduce((a, b) => a + b, 0) / found.length
      const sd = Math.sqrt(found.reduce((a, b) => a + (b - mean) ** 2, 0) / (found.length - 1))
      expect(Math.abs(mean - size), kind).toBeLessThan((3 * sd) / Math.sqrt(200))
      // 1/√J holds the doubt about wander and meters too, which this data does not have; white noise alone may spread less, never more.
      expect(sd * Math.sqrt(exact.j), kind).toBeLessThan(1.15)
    }
  })

  it('is the same inside the bank to 1 %: a small disturbance moves every state by its column, d by J, and J not at all', () => {
    // Flow that moves at every step keeps the bank from learning noise from y, so that it is linear in y to rounding.
    const base = { lnFlow: (k: number) => (k % 2 === 0 ? 0.02 : -0.02), noisePa: 300 }
    for (const [kind, of, size] of [
      ['deposit', 1, 1e-5],
      ['tap-ramp', 1, 1e-3],
      ['stream', 0, 1e-3],
      ['settling', 0, 1e-3],
    ] as const) {
      // biome-ignore format: a table
      const born = 24
      const states = [0, size].map((a) => {
        const bank = createBank(duo, 30_000)
        const at = observer(duo, base)
        for (let k = 0; k < 60; k++) {
          const o = at(k).map((x, s) => ({
            ...x,
            y: x.y + (k + 1 < born ? 0 : a * signature(duo, { kind, of }, s, k + 1 - born, x)),
          }))
          bank.step(o, false, 0)
        }
        return bank.save()
      })
      const [without, withIt] = states as [(typeof states)[0], (typeof states)[0]]
      const pick = (s: typeof without) => s.columns.find((c) => c.kind === kind && c.of === of && c.born === born)!
      const [c0, c1] = [pick(without), pick(withIt)]
      expect(c1.j / c0.j).toBeCloseTo(1, 3)
      expect((c1.d - c0.d) / size / c0.j).toBeCloseTo(1, 3)
      without.x.forEach((x, i) => {
        const moved = (withIt.x[i]! - x) / size
        expect(Math.abs(moved - c0.response[i]!)).toBeLessThan(1e-2 * Math.max(1, Math.abs(c0.response[i]!)))
      })
    }
  })
})

describe('believable sizes', () => {
  it('L is d²/(2(J + 1/s²)): with J = 1e4 a size of 0.1 is worth 50 nats as a deposit and 25 where the size has sd 0.01', () => {
    const c = { ...column('step', 0, 0), d: 1000, j: 1e4 }
    expect(likelihood({ ...c, scale: Number.MAX_VALUE }, 10)).toBeCloseTo(50, 9)
    expect(likelihood({ ...c, scale: 0.01 }, 10)).toBeCloseTo(25, 9)
  })

  it('a ramp is held by its whole shift: 20 steps old, its slope has a twentieth of the sd', () => {
    const c = { ...column('tap-ramp', 1, 0), d: 1000, j: 1e4, scale: 0.2 }
    expect(likelihood(c, 20)).toBeCloseTo(25, 9)
  })

  it('a tap is believed to be off by 0.5 % of its span (12.5 kPa of 25 bar), a liquid by 8 %, a step by 10 %; a deposit by anything', () => {
    const columns: Column[] = []
    giveBirth(duo, columns, explanations(duo), 0, map, () => true)
    const scale = (kind: Kind) => columns.find((c) => c.kind === kind)!.scale
    expect(scale('tap-ramp')).toBeCloseTo(12.5, 9)
    expect([scale('stream'), scale('step'), scale('deposit')]).toEqual([0.08, 0.1, Number.MAX_VALUE])
  })
})

describe('births', () => {
  it('all births of 15 min are kept, every fourth to an hour, every twelfth to 3.3 h, none beyond', () => {
    const kept = (from: number, to: number) => {
      const now = 100_000
      let n = 0
      for (let born = now - to; born <= now - from; born++) if (born % births.every === 0 && isKept(now - born, born)) n++
      return n
    }
    expect(kept(0, 30)).toBe(16)
    expect(kept(31, 120)).toBe(12)
    expect(kept(121, 400)).toBe(12)
    expect(kept(401, 5000)).toBe(0)
  })
})
