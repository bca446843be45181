import fc from 'fast-check'
import { expect, it } from 'vitest'
import { fluidOf } from '../../../server/core/fluids/fluid.ts'
import { monotoneCubic } from '../../../server/core/fluids/monotone.ts'
import { tableFluid } from '../../../server/core/fluids/table-fluid.ts'
import { kFromC } from '../../../server/core/units.ts'

const risingTable = fc
  .array(fc.tuple(fc.double({ min: 0.5, max: 30, noNaN: true }), fc.double({ min: 0, max: 2, noNaN: true })), {
    minLength: 2,
    maxLength: 8,
  })
  .map((steps) => {
    const sum = (k: 0 | 1, upTo: number): number => steps.slice(0, upTo + 1).reduce((a, step) => a + step[k], 0)
    return steps.map((_, i) => [sum(0, i), sum(1, i)] as const)
  })

it('monotone interpolation passes through its points and is monotone between rising ones (Fritsch and Carlson 1980)', () => {
  fc.assert(
    fc.property(risingTable, (points) => {
      const f = monotoneCubic(
        points.map((p) => p[0]),
        points.map((p) => p[1]),
      )
      for (const [x, y] of points) expect(f(x)).toBeCloseTo(y, 10)
      const first = points[0]![0]
      const last = points.at(-1)![0]
      let before = Number.NEGATIVE_INFINITY
      for (let i = 0; i <= 200; i++) {
        const y = f(first + ((last - first) * i) / 200)
        expect(y).toBeGreaterThanOrEqual(before - 1e-9)
        before = y
      }
    }),
    { numRuns: 60 },
  )
})

it('a table of THF taken every 20 K gives the viscosity between its points within 0.3 % and goes on 20 K outside within 3 %, marked uncertain', () => {
  const thf = fluidOf({ kind: 'solvent', solvent: 'THF' })
  const rows = [-60, -40, -20, 0, 20].map((c) => [c, thf.at(kFromC(c)).viscPaS * 1000] as const)
  const t = fluidOf({ kind: 'table', densityKgM3: 900, viscosityMPaS: rows })
  for (let c = -60; c <= 20; c += 2.5) {
    expect(Math.abs(t.at(kFromC(c)).viscPaS / thf.at(kFromC(c)).viscPaS - 1), `${c}`).toBeLessThan(0.003)
    expect(t.at(kFromC(c)).uncertain).toBe(false)
  }
  for (const c of [-80, 40]) {
    expect(Math.abs(t.at(kFromC(c)).viscPaS / thf.at(kFromC(c)).viscPaS - 1), `${c}`).toBeLessThan(0.03)
    expect(t.at(kFromC(c)).uncertain).toBe(true)
  }
  expect(t.assumed.length).toBeGreaterThan(0)
})

it('a single point is trusted for 5 K, then thickens in the cold like a light organic liquid and is uncertain', () => {
  const t = tableFluid(880, [[20, 0.5]])
  expect(t.at(kFromC(24)).uncertain).toBe(false)
  expect(t.at(kFromC(-20)).uncertain).toBe(true)
  expect(t.at(kFromC(-20)).viscPaS / t.at(kFromC(20)).viscPaS).toBeCloseTo(Math.exp(900 * (1 / 253.15 - 1 / 293.15)), 10)
  expect(() => t.at(kFromC(90))).toThrow(/no properties/)
})

it.each([
  [0, [[20, 1]], /density/],
  [900, [], /empty/],
  [
    900,
    [
      [20, 1],
      [20, 2],
    ],
    /twice/,
  ],
  [900, [[20, -1]], /above 0/],
] as const)('a table that makes no sense is refused: density %d, %j', (rho, rows, message) => {
  expect(() => tableFluid(rho, rows as never)).toThrow(message)
})
