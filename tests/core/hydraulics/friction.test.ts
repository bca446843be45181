import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { colebrook, darcyFriction, reynolds } from '../../../server/core/hydraulics/friction.ts'

const fixture = JSON.parse(readFileSync(new URL('../../../fixtures/physics/friction.json', import.meta.url), 'utf8'))
const roughness = fc.double({ min: 0, max: 0.05, noNaN: true })
const lnRe = (low: number, high: number) => fc.double({ min: Math.log(low), max: Math.log(high), noNaN: true }).map(Math.exp)

it.each(fixture.smooth.rows as [number, number][])('smooth pipe at Re %d has f %d (White, four decimals)', (re, f) => {
  expect(Math.abs(colebrook(re, 0) - f)).toBeLessThan(0.5001e-4)
  if (re >= 10000) expect(Math.abs(darcyFriction(re, 0) / f - 1)).toBeLessThan(0.025)
})

it.each(fixture.colebrook.rows as [number, number, number][])('Colebrook at Re %d, roughness %d is %d to 1e-10', (re, e, f) => {
  expect(Math.abs(colebrook(re, e) / f - 1)).toBeLessThan(1e-10)
})

it.each(fixture.churchill.rows as [number, number, number][])('Churchill at Re %d, roughness %d is %d to 1e-10', (re, e, f) => {
  expect(Math.abs(darcyFriction(re, e) / f - 1)).toBeLessThan(1e-10)
})

describe('Colebrook', () => {
  it('is solved to machine precision: what is left of the equation is below 4 rounding units, Re 4000 to 1e8, roughness to 0.05', () => {
    fc.assert(
      fc.property(lnRe(4000, 1e8), roughness, (re, e) => {
        const x = 1 / Math.sqrt(colebrook(re, e))
        const right = -2 * Math.log10(e / 3.7 + (2.51 * x) / re)
        expect(Math.abs(right / x - 1)).toBeLessThan(4 * Number.EPSILON)
      }),
    )
  })
})

describe('Churchill over all regimes', () => {
  it('is 64/Re to 1e-13 below Re 900 for every roughness up to 0.05 (Re → 0 is Hagen and Poiseuille)', () => {
    fc.assert(
      fc.property(lnRe(1e-6, 899.9), roughness, (re, e) => {
        expect(Math.abs((darcyFriction(re, e) * re) / 64 - 1)).toBeLessThan(1e-13)
      }),
    )
  })

  it('stays within 2.2 % of Colebrook from Re 10000 to 1e8 and 3.1 % from 4000, roughness up to 0.05', () => {
    let worst = 0
    let worstFrom4000 = 0
    for (let i = 0; i <= 200; i++)
      for (const e of [0, 1e-6, 1e-5, 1e-4, 1e-3, 0.01, 0.03, 0.05]) {
        const re = 4000 * 25000 ** (i / 200)
        const apart = Math.abs(darcyFriction(re, e) / colebrook(re, e) - 1)
        if (re >= 10000) worst = Math.max(worst, apart)
        worstFrom4000 = Math.max(worstFrom4000, apart)
      }
    expect(worst).toBeLessThan(0.022)
    expect(worstFrom4000).toBeLessThan(0.031)
  })

  it('is continuous, and ΔP (f Re²) rises with Re, from 1 to 1e8 without a step, in jumps of 0.1 % of Re', () => {
    for (const e of [0, 1e-4, 0.01, 0.05]) {
      let before = darcyFriction(1, e)
      let [least, most] = [Number.POSITIVE_INFINITY, 0]
      for (let re = 1.001; re < 1e8; re *= 1.001) {
        const dp = darcyFriction(re, e) * re * re
        least = Math.min(least, dp / before)
        most = Math.max(most, dp / before)
        before = dp
      }
      expect(least).toBeGreaterThan(1)
      expect(most).toBeLessThan(1.01)
    }
  })
})

it('Re of 1 kg/s of water-like liquid in 50 mm is 4/(π·0.05·0.001) = 25465, whichever way it flows', () => {
  expect(reynolds(1, 0.05, 0.001)).toBeCloseTo(25464.79, 1)
  expect(reynolds(-1, 0.05, 0.001)).toBe(reynolds(1, 0.05, 0.001))
})
