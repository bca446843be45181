import fc from 'fast-check'
import { expect, it } from 'vitest'
import { fluidOf, mixByMass } from '../../../server/core/fluids/fluid.ts'
import { mixState } from '../../../server/core/fluids/mixture.ts'
import { tableFluid } from '../../../server/core/fluids/table-fluid.ts'

const thf = fluidOf({ kind: 'solvent', solvent: 'THF' })
const hexane = fluidOf({ kind: 'solvent', solvent: 'hexane' })
const water = fluidOf({ kind: 'solvent', solvent: 'water' })

it('a mixture of a liquid with itself is that liquid, and one part alone too, to 1e-12', () => {
  const s = thf.at(253.15)
  const mixed = mixState([s, s], [0.3, 0.7])
  for (const k of ['viscPaS', 'rhoKgM3', 'cpJKgK', 'condWMK'] as const) expect(Math.abs(mixed[k] / s[k] - 1)).toBeLessThan(1e-12)
  expect(
    mixByMass([
      { fluid: thf, massFraction: 1 },
      { fluid: hexane, massFraction: 0 },
    ]),
  ).toBe(thf)
})

it('every property of a mixture lies between those of its parts and does not depend on order or on the sum of the fractions', () => {
  fc.assert(
    fc.property(
      fc.double({ min: 0.01, max: 0.99, noNaN: true }),
      fc.double({ min: 200, max: 320, noNaN: true }),
      fc.double({ min: 0.1, max: 50, noNaN: true }),
      (w, t, scale) => {
        const a = thf.at(t)
        const b = hexane.at(t)
        const m = mixState([a, b], [w, 1 - w])
        const n = mixState([b, a], [(1 - w) * scale, w * scale])
        for (const k of ['viscPaS', 'rhoKgM3', 'cpJKgK', 'condWMK'] as const) {
          expect(m[k]).toBeGreaterThanOrEqual(Math.min(a[k], b[k]) * (1 - 1e-12))
          expect(m[k]).toBeLessThanOrEqual(Math.max(a[k], b[k]) * (1 + 1e-12))
          expect(Math.abs(m[k] / n[k] - 1)).toBeLessThan(1e-10)
        }
      },
    ),
  )
})

it('half toluene, half heptane by mass at 25 °C: density by ideal volumes is 762 kg/m3 (hand computation, 2/(1/863.9+1/681.5))', () => {
  const m = fluidOf({
    kind: 'mixture',
    parts: [
      { solvent: 'toluene', massFraction: 0.5 },
      { solvent: 'heptane', massFraction: 0.5 },
    ],
  })
  expect(m.at(298.15).rhoKgM3).toBeCloseTo(761.96, 1)
  expect(m.at(298.15).uncertain).toBe(false)
  expect(m.viscosityErrorPct).toBeGreaterThanOrEqual(10)
})

it('water with an organic liquid is uncertain from 2 % of either, and the mixture knows its freezing bound and miscibility', () => {
  const wet = mixByMass([
    { fluid: thf, massFraction: 0.9 },
    { fluid: water, massFraction: 0.1 },
  ])
  expect(wet.at(293.15).uncertain).toBe(true)
  expect(wet.freezingK).toBeCloseTo(273.15, 6)
  expect(
    mixByMass([
      { fluid: thf, massFraction: 0.99 },
      { fluid: water, massFraction: 0.01 },
    ]).at(293.15).uncertain,
  ).toBe(false)
  expect(
    mixByMass([
      { fluid: thf, massFraction: 0.5 },
      { fluid: hexane, massFraction: 0.5 },
    ]).waterMiscible,
  ).toBe('none')
  expect(
    mixByMass([
      { fluid: thf, massFraction: 0.97 },
      { fluid: hexane, massFraction: 0.03 },
    ]).waterMiscible,
  ).toBe('full')
  expect(
    mixByMass([
      { fluid: thf, massFraction: 0.5 },
      { fluid: tableFluid(800, [[20, 1]]), massFraction: 0.5 },
    ]).freezingK,
  ).toBeNull()
})

it.each([[[0.5, 0.4]], [[-0.1, 1.1]], [[Number.NaN, 1]]])('mass fractions %j are refused', (w) => {
  expect(() =>
    mixByMass([
      { fluid: thf, massFraction: w[0]! },
      { fluid: hexane, massFraction: w[1]! },
    ]),
  ).toThrow(/mass fractions/)
  expect(() => mixState([thf.at(290)], [0])).toThrow(/at least one part/)
})
