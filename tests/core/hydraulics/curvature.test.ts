import { readFileSync } from 'node:fs'
import { expect, it } from 'vitest'
import { bendLoss, expansionLoss } from '../../../server/core/hydraulics/bends.ts'
import {
  coilCriticalReynolds,
  coilFrictionFactor,
  deanNumber,
  schmidtCoilRatio,
  whiteCoilRatio,
} from '../../../server/core/hydraulics/curvature.ts'
import { colebrook, darcyFriction } from '../../../server/core/hydraulics/friction.ts'

const fixture = JSON.parse(readFileSync(new URL('../../../fixtures/physics/friction.json', import.meta.url), 'utf8'))

it.each(fixture.coil.laminar as { re: number; boreM: number; coilM: number; f: number; criticalRe: number }[])(
  'coil of $coilM m, bore $boreM m at Re $re: White gives f $f, turbulent from Re $criticalRe (Schmidt), to 1e-9',
  ({ re, boreM, coilM, f, criticalRe }) => {
    expect(Math.abs(coilFrictionFactor(re, 0, boreM, coilM) / f - 1)).toBeLessThan(1e-9)
    expect(Math.abs(coilCriticalReynolds(boreM, coilM) / criticalRe - 1)).toBeLessThan(1e-9)
  },
)

it.each(fixture.coil.turbulent as { re: number; boreM: number; coilM: number; f: number }[])(
  'turbulent coil at Re $re: Schmidt gives f $f, 1e-6 over Colebrook and 1 % over Churchill',
  ({ re, boreM, coilM, f }) => {
    const ratio = schmidtCoilRatio(re, boreM, coilM)
    expect(Math.abs((ratio * colebrook(re, 0)) / f - 1)).toBeLessThan(1e-6)
    expect(Math.abs((ratio * darcyFriction(re, 0)) / f - 1)).toBeLessThan(0.01)
  },
)

it('a coil is a straight tube below De 11.6, and ever more as its diameter grows: ratio 1 within 1e-3 at 1000 km', () => {
  expect(whiteCoilRatio(11.6)).toBe(1)
  expect(whiteCoilRatio(11.7)).toBeGreaterThan(1)
  expect(deanNumber(1000, 0.001, 0.1)).toBeCloseTo(100, 10)
  for (const re of [10, 500, 2000, 20000])
    expect(Math.abs(coilFrictionFactor(re, 0, 0.001, 1e6) / (re < 2300 ? 64 / re : darcyFriction(re, 0)) - 1)).toBeLessThan(1e-3)
})

it('coil friction is continuous and ΔP rises with Re through critical and to 1.5e5: no jump above 0.5 % for 0.02 % of Re', () => {
  for (const [d, coil] of [
    [0.0016, 0.08],
    [0.001, 0.05],
    [0.003, 0.06],
    [0.0008, 0.3],
  ] as const) {
    let before = 0
    let [least, most] = [Number.POSITIVE_INFINITY, 0]
    for (let re = 5; re < 1.5e5; re *= 1.0002) {
      const dp = coilFrictionFactor(re, 0.001, d, coil) * re * re
      if (before > 0) least = Math.min(least, dp / before)
      if (before > 0) most = Math.max(most, dp / before)
      before = dp
    }
    expect(least).toBeGreaterThan(1)
    expect(most).toBeLessThan(1.005)
  }
})

it.each(fixture.bends.rows as { re: number; boreM: number; k: number }[])(
  'a bend at Re $re in $boreM m costs K = $k (Hooper)',
  ({ re, boreM, k }) => {
    expect(Math.abs(bendLoss(re, boreM) / k - 1)).toBeLessThan(1e-9)
  },
)

it.each(fixture.bends.expansion as [number, number][])(
  'a sudden widening from %d to 1 costs K = %d (Borda, Carnot)',
  (share, k) => {
    expect(expansionLoss(share, 1)).toBeCloseTo(k, 10)
  },
)
