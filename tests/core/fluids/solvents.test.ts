import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { MonitorError } from '../../../server/core/errors.ts'
import { fluidOf } from '../../../server/core/fluids/fluid.ts'
import { solventNamed, solvents } from '../../../server/core/fluids/solvents.ts'
import { FAR_K } from '../../../server/core/fluids/state.ts'
import { kFromC } from '../../../server/core/units.ts'

const fixture = JSON.parse(readFileSync(new URL('../../../fixtures/physics/fluids.json', import.meta.url), 'utf8'))
const pure = (solvent: string) => fluidOf({ kind: 'solvent', solvent })
const worse = new Map<string, number>(
  fixture.viscosityKnownWorse.rows.map((r: [string, number, number]) => [`${r[0]} ${r[1]}`, r[2]]),
)

describe('viscosity agrees with the handbook within 5 % (10 % below -20 °C), where sources differ by more within that', () => {
  it.each([...fixture.viscosityMPaS.rows, ...fixture.viscosityEthers.rows] as [string, number, number][])(
    '%s at %d °C: %d mPa s',
    (name, tempC, mPaS) => {
      const tolerance = (worse.get(`${name} ${tempC}`) ?? (tempC < -20 ? 10 : 5)) / 100
      const { viscPaS, uncertain } = pure(name).at(kFromC(tempC))
      expect(Math.abs(viscPaS * 1000 - mPaS) / mPaS).toBeLessThan(tolerance)
      expect(uncertain).toBe(false)
    },
  )
})

it.each(fixture.densityKgM3.rows as [string, number, number][])(
  'density of %s at %d °C is %d kg/m3 within 0.5 %',
  (name, tempC, rho) => {
    expect(Math.abs(pure(name).at(kFromC(tempC)).rhoKgM3 / rho - 1)).toBeLessThan(0.005)
  },
)

it.each(fixture.cpJKgK.rows as [string, number][])('heat capacity of %s at 25 °C is %d J/(kg K) within 0.1 %', (name, cp) => {
  expect(Math.abs(pure(name).at(298.15).cpJKgK / cp - 1)).toBeLessThan(0.001)
})

it('water follows IAPWS within 0.05 % in viscosity and conductivity and 0.002 % in density, 0 to 60 °C', () => {
  for (const row of fixture.water.rows) {
    const s = pure('water').at(kFromC(row.tempC))
    expect(Math.abs(s.viscPaS / row.viscPaS - 1)).toBeLessThan(5e-4)
    expect(Math.abs(s.rhoKgM3 / row.rhoKgM3 - 1)).toBeLessThan(2e-5)
    if (row.condWMK !== undefined) expect(Math.abs(s.condWMK / row.condWMK - 1)).toBeLessThan(5e-4)
  }
})

it('all eighteen solvents answer by full and short name, in any case, and every state is positive and falls with temperature as liquids do', () => {
  expect(solvents).toHaveLength(18)
  for (const word of [
    'THF',
    'thf',
    '2-MeTHF',
    'dcm',
    'DMF',
    'dme',
    'MTBE',
    'Diethyl ether',
    'ethyl acetate',
    'dioxane',
    '1,4-Dioxane',
    'n-hexane',
  ])
    expect(solventNamed(word), word).not.toBeNull()
  expect(solventNamed('unobtainium')).toBeNull()
  for (const s of solvents) {
    const f = pure(s.name)
    let last = Number.POSITIVE_INFINITY
    for (let t = f.limitK[0]; t <= f.limitK[1]; t += 1) {
      const state = f.at(t)
      expect(Math.min(state.viscPaS, state.rhoKgM3, state.cpJKgK, state.condWMK), `${s.name} ${t} K`).toBeGreaterThan(0)
      if (t >= f.rangeK[0] && t <= Math.min(f.rangeK[1], kFromC(s.boilingC))) {
        expect(state.viscPaS, `${s.name} ${t} K`).toBeLessThan(last)
        last = state.viscPaS
      }
    }
  }
})

// FOU-03
it('outside the published range the state is uncertain and continuous, more than 60 K outside it is FLUID_RANGE', () => {
  expect(FAR_K).toBe(60)
  for (const s of solvents) {
    const f = pure(s.name)
    for (const edge of [s.viscosity.lowK, s.viscosity.highK]) {
      if (edge < f.limitK[0] || edge > f.limitK[1] || edge < s.density.lowK || edge > s.density.highK) continue
      const a = f.at(edge - 1e-6)
      const b = f.at(edge + 1e-6)
      expect(Math.abs(a.viscPaS / b.viscPaS - 1), s.name).toBeLessThan(1e-6)
    }
    if (s.name === 'water') continue
    expect(f.at(f.rangeK[0] - 1).uncertain, s.name).toBe(true)
    expect(() => f.at(f.limitK[0] - 0.01)).toThrow(MonitorError)
    expect(() => f.at(f.limitK[1] + 0.01)).toThrow(/no properties at/)
    expect(() => f.at(Number.NaN)).toThrow(MonitorError)
  }
  expect(() => pure('THF').at(kFromC(500))).toThrow(MonitorError)
})

it('water below 0 °C is uncertain: there it is ice or about to be', () => {
  expect(pure('water').at(kFromC(-1)).uncertain).toBe(true)
  expect(pure('water').at(kFromC(0.1)).uncertain).toBe(false)
})

it('an unknown solvent is FLUID_UNKNOWN and the hint lists what there is', () => {
  expect(() => pure('kryptonol')).toThrow(/unknown solvent 'kryptonol'/)
})
