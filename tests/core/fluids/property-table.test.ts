import { expect, it } from 'vitest'
import { fluidOf, mixByMass } from '../../../server/core/fluids/fluid.ts'
import type { ViscosityFactor } from '../../../server/core/fluids/learned-factor.ts'
import { viscosityFactors } from '../../../server/core/fluids/learned-factor.ts'
import { mixedTable, propertyTable } from '../../../server/core/fluids/property-table.ts'
import { solvents } from '../../../server/core/fluids/solvents.ts'

it('the table errs by less than 1e-4 in viscosity and density from limit to limit, every solvent, every 0.13 K', () => {
  let worst = 0
  for (const s of solvents) {
    const f = fluidOf({ kind: 'solvent', solvent: s.name })
    const t = propertyTable(f)
    for (let k = f.limitK[0]; k <= f.limitK[1]; k += 0.13) {
      const exact = f.at(k)
      worst = Math.max(worst, Math.abs(t.viscPaS(k) / exact.viscPaS - 1), Math.abs(t.rhoKgM3(k) / exact.rhoKgM3 - 1))
    }
  }
  expect(worst).toBeLessThan(1e-4)
})

it('a mixture and a user table keep the same bound', () => {
  const mixed = mixByMass([
    { fluid: fluidOf({ kind: 'solvent', solvent: 'THF' }), massFraction: 0.6 },
    { fluid: fluidOf({ kind: 'solvent', solvent: 'hexane' }), massFraction: 0.4 },
  ])
  const own = fluidOf({
    kind: 'table',
    densityKgM3: 900,
    viscosityMPaS: [
      [-40, 2],
      [-10, 1.1],
      [25, 0.6],
    ],
  })
  for (const f of [mixed, own]) {
    const t = propertyTable(f)
    for (let k = f.rangeK[0]; k <= Math.min(f.rangeK[1], 330); k += 0.17)
      expect(Math.abs(t.viscPaS(k) / f.at(k).viscPaS - 1)).toBeLessThan(1e-4)
  }
})

it('beyond the limits it clamps and says uncertain instead of throwing; so it does for what is no number', () => {
  const f = fluidOf({ kind: 'solvent', solvent: 'THF' })
  const t = propertyTable(f)
  expect(t.viscPaS(1)).toBeCloseTo(f.at(f.limitK[0]).viscPaS, 12)
  expect(t.rhoKgM3(9999)).toBeCloseTo(f.at(f.limitK[1]).rhoKgM3, 6)
  for (const k of [1, 9999, Number.NaN]) expect(t.uncertain(k)).toBe(true)
  expect(Number.isFinite(t.viscPaS(Number.NaN))).toBe(true)
  expect(t.uncertain(253.15)).toBe(false)
})

it('streams that meet mix as the fluid of the same fractions does, to 1e-4, and the fractions may be written anew between calls', () => {
  const pure = (solvent: string) => fluidOf({ kind: 'solvent', solvent })
  const now = [0.7, 0.3]
  const met = mixedTable([propertyTable(pure('THF')), propertyTable(pure('hexane'))], now)
  for (const [a, b] of [
    [0.7, 0.3],
    [0.2, 0.8],
    [1, 0],
  ] as const) {
    now[0] = 3 * a
    now[1] = 3 * b
    const exact = mixByMass([
      { fluid: pure('THF'), massFraction: a },
      { fluid: pure('hexane'), massFraction: b },
    ]).at(250)
    expect(Math.abs(met.viscPaS(250) / exact.viscPaS - 1)).toBeLessThan(1e-4)
    expect(Math.abs(met.rhoKgM3(250) / exact.rhoKgM3 - 1)).toBeLessThan(1e-4)
    expect(met.uncertain(250)).toBe(false)
  }
})

it('an aqueous quench with an organic stream is uncertain, and so is a mixed stream with water in it; one stream alone is itself', () => {
  const water = propertyTable(fluidOf({ kind: 'solvent', solvent: 'water' }))
  const thf = propertyTable(fluidOf({ kind: 'solvent', solvent: 'THF' }))
  expect(mixedTable([water, thf], [0.5, 0.5]).uncertain(290)).toBe(true)
  expect(mixedTable([water, thf], [0.5, 0.5]).water).toBe(0.5)
  expect(mixedTable([water, thf], [0.005, 0.995]).uncertain(290)).toBe(false)
  expect(mixedTable([thf], [1])).toBe(thf)
  const wet = fluidOf({
    kind: 'mixture',
    parts: [
      { solvent: 'THF', massFraction: 0.8 },
      { solvent: 'water', massFraction: 0.2 },
    ],
  })
  expect(propertyTable(wet).uncertain(290)).toBe(true)
})

it('a stream 20 % thicker than its solvent is found on three segments as 1.17 with an interval that holds 1.2, and one segment leaves a wide one', () => {
  const level = (k: number) => ({ lnLevel: k * Math.log(1.2), sd: 0.01, exponents: [k] })
  const [three] = viscosityFactors([level(1), level(0.75), level(0.9)], 1) as [ViscosityFactor]
  expect(three.factor).toBeGreaterThan(1.15)
  expect(three.low).toBeLessThan(1.2)
  expect(three.high).toBeGreaterThan(1.2)
  const [one] = viscosityFactors([level(1)], 1) as [ViscosityFactor]
  expect(one.high / one.low).toBeGreaterThan(three.high / three.low)
  expect(viscosityFactors([], 1)[0]).toMatchObject({ factor: 1, segments: 0 })
})

it('two streams are told apart by the segments each has alone; a shared one draws both; the answer does not hang on their order', () => {
  const alone = (i: number, ln: number) => ({ lnLevel: ln, sd: 0.01, exponents: [i === 0 ? 1 : 0, i === 1 ? 1 : 0] })
  const shared = { lnLevel: 0.7 * 0.2 + 0.3 * 0, sd: 0.01, exponents: [0.7, 0.3] }
  const levels = [alone(0, 0.2), alone(0, 0.2), alone(1, 0), shared]
  const [a, b] = viscosityFactors(levels, 2) as [ViscosityFactor, ViscosityFactor]
  expect(a.factor).toBeGreaterThan(1.15)
  expect(a.factor).toBeLessThan(1.222)
  expect(Math.abs(Math.log(b.factor))).toBeLessThan(0.02)
  expect([a.segments, b.segments]).toEqual([3, 2])
  expect(a.high / a.low).toBeLessThan(b.high / b.low)
  const turned = viscosityFactors(
    levels.map((l) => ({ ...l, exponents: [...l.exponents].reverse() })),
    2,
  )
  expect(turned[1]!.factor).toBeCloseTo(a.factor, 12)
  const [only, none] = viscosityFactors([shared], 2) as [ViscosityFactor, ViscosityFactor]
  expect(Math.log(only.factor) / Math.log(none.factor)).toBeCloseTo(0.7 / 0.3, 9)
})
