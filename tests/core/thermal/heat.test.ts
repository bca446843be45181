import fc from 'fast-check'
import { expect, it } from 'vitest'
import { MonitorError } from '../../../server/core/errors.ts'
import { coilCriticalReynolds } from '../../../server/core/hydraulics/curvature.ts'
import { effectiveness, exchanger, lmtd, uFromReadings } from '../../../server/core/thermal/exchanger.ts'
import {
  filonenko,
  gnielinskiLaminar,
  hausen,
  manlapazChurchill,
  nusselt,
  schmidtCoil,
} from '../../../server/core/thermal/nusselt.ts'
import { hotSpot, plugFlowProfile, type TubeHeat } from '../../../server/core/thermal/profile.ts'
import { adiabaticRise, mtsr, mtsrStoppedFlow } from '../../../server/core/thermal/reaction-heat.ts'
import { foulingResistance, overallU } from '../../../server/core/thermal/wall.ts'

const num = (min: number, max: number) => fc.double({ min, max, noNaN: true })
const tube: TubeHeat = {
  lengthM: 10,
  massFlowKgS: 2e-3,
  cpJKgK: 1800,
  uaPerMWMK: 2,
  inletK: 273,
  coolantK: 253,
  residenceS: 20,
  adiabaticRiseK: 60,
  rateAtInletS: 0.3,
  activationJMol: 0,
}

it('meets the laminar limits: Nu 3.66 far down the tube, 1.615 Gz^(1/3) at the entrance (Leveque)', () => {
  expect(hausen(1e-6)).toBeCloseTo(3.66, 5)
  expect(gnielinskiLaminar(1e-9)).toBeCloseTo(3.66, 2)
  expect(gnielinskiLaminar(1e9) / (1.615 * 1e3)).toBeCloseTo(1, 2)
})

it('reproduces the Graetz solution (Shah & London 1978: mean Nu 4.64 at 1/Gz = 0.07, 13.8 at 0.001 in units of x+ = 1/Gz) within 6 %', () => {
  // mean Nusselt by 1.615 x^(-1/3) - 0.7 and 3.657 + 0.0499/x, Shah & London's own fit (from memory), good to 3 %
  const shahLondon = (x: number) => (x <= 0.03 ? 1.615 * x ** (-1 / 3) - (x > 0.005 ? 0.2 : 0.7) : 3.657 + 0.0499 / x)
  for (const x of [0.001, 0.004, 0.01, 0.02, 0.05, 0.1, 1])
    expect(Math.abs(gnielinskiLaminar(1 / x) / shahLondon(x) - 1)).toBeLessThan(0.06)
})

it('agrees with Colebrook for a smooth tube within 2 % from Re 1e4 to 1e6 (Filonenko)', () => {
  for (const re of [1e4, 1e5, 1e6]) {
    let x = 5
    for (let i = 0; i < 60; i++) x = -2 * Math.log10((2.51 * x) / re)
    expect(Math.abs(filonenko(re) * x * x - 1)).toBeLessThan(0.02)
  }
})

it('has no jump over Re in straight tube or coil: 0.5 % in Re moves Nu by under 5 %', () => {
  fc.assert(
    fc.property(
      num(1, 60_000),
      num(1, 100),
      num(20, 5000),
      fc.option(num(0.012, 0.1), { nil: null }),
      (re, pr, lengthOverDiameter, curvature) => {
        const at = (r: number) => nusselt({ re: r, pr, lengthOverDiameter, curvature, heated: true }).nu
        expect(Math.abs(at(re * 1.005) / at(re) - 1)).toBeLessThan(0.05)
      },
    ),
  )
})

it('never lets a coil fall below the straight laminar tube, and Schmidt and Manlapaz-Churchill agree within 36 % for Re 200 to 2000, Pr 2 to 7', () => {
  fc.assert(
    fc.property(num(200, 2000), num(2, 7), num(0.015, 0.1), (re, pr, curvature) => {
      fc.pre(re < coilCriticalReynolds(curvature, 1))
      expect(nusselt({ re, pr, lengthOverDiameter: 5000, curvature, heated: false }).nu).toBeGreaterThanOrEqual(
        gnielinskiLaminar((re * pr) / 5000),
      )
      expect(Math.abs(Math.log(schmidtCoil(re, pr, curvature) / manlapazChurchill(re, pr, curvature)))).toBeLessThan(Math.log(1.36))
    }),
  )
})

it('keeps its value inside its own range and says transitional between 2300 and 4000', () => {
  const n = nusselt({ re: 3000, pr: 10, lengthOverDiameter: 500, curvature: null, heated: true })
  expect(n.regime).toBe('transitional')
  expect(n.low).toBeLessThan(n.nu)
  expect(n.high).toBeGreaterThan(n.nu)
  expect(() => nusselt({ re: 0, pr: 10, lengthOverDiameter: 500, curvature: null, heated: true })).toThrow(MonitorError)
})

it('recomputes the handbook oil cooler (Incropera & DeWitt, example 11.1, from memory): U 37.8 W/(m2 K), 43.2 K, 66.5 m', () => {
  const oil = 0.1 * 2131
  const duty = oil * 40
  const difference = lmtd(100 - (30 + duty / (0.2 * 4178)), 60 - 30) ?? 0
  const u = overallU({
    innerDiameterM: 0.025,
    outerDiameterM: 0.025,
    wallConductivityWMK: 400,
    innerFilmWM2K: 2250,
    outerFilmWM2K: 38.4,
    foulingM2KW: 0,
  }).uInnerWM2K
  expect(difference).toBeCloseTo(43.2, 1)
  expect(u).toBeCloseTo(37.8, 1)
  expect(duty / (u * difference * Math.PI * 0.025)).toBeCloseTo(66.5, 0)
})

it('gives duty = UA LMTD for any exchanger, counterflow never worse than parallel, isothermal the limit of Cr = 0', () => {
  fc.assert(
    fc.property(num(0.01, 5), num(0.01, 1), (ntu, ratio) => {
      for (const arrangement of ['counterflow', 'parallel'] as const) {
        const r = exchanger({ arrangement, hotWK: 10, coldWK: 10 / ratio, hotInK: 350, coldInK: 280, uaWK: ntu * 10 })
        expect(r.dutyW / (ntu * 10 * (r.lmtdK ?? Number.NaN))).toBeCloseTo(1, 6)
      }
      expect(effectiveness('counterflow', ntu, ratio)).toBeGreaterThanOrEqual(effectiveness('parallel', ntu, ratio) - 1e-12)
      expect(effectiveness('counterflow', ntu, 0)).toBeCloseTo(effectiveness('isothermal', ntu, 0), 12)
      expect(effectiveness('counterflow', ntu, 1 - 1e-7)).toBeCloseTo(ntu / (1 + ntu), 6)
    }),
  )
})

it('reads back from a cooled tube the U it was made with, and none once the outlet stands at the coolant', () => {
  const u = 250
  const area = Math.PI * 1.6e-3 * 5
  const out = 253 + 20 * Math.exp((-u * area) / (2e-3 * 1800))
  expect(uFromReadings(2e-3, 1800, area, 273, out, 253, 0.1)?.uWM2K).toBeCloseTo(u, 8)
  expect(uFromReadings(2e-3, 1800, area, 273, 253.2, 253, 0.1)).toBeNull()
  expect(uFromReadings(2e-3, 1800, area, 273, 280, 253, 0.1)).toBeNull()
})

it('finds the deposit that was put in: 1/U - 1/U0 = 1.0e-4 m2 K/W', () => {
  const wall = { innerDiameterM: 1.6e-3, outerDiameterM: 4.6e-3, wallConductivityWMK: 15, innerFilmWM2K: 800, outerFilmWM2K: 500 }
  const clean = overallU({ ...wall, foulingM2KW: 0 }).uInnerWM2K
  const dirty = overallU({ ...wall, foulingM2KW: 1e-4 }).uInnerWM2K
  expect(foulingResistance(dirty, clean)).toBeCloseTo(1e-4, 12)
})

it('practice 5.5: 1 M organolithium into water in THF (-220 kJ/mol, 889 kg/m3, 1.72 kJ/(kg K)) rises 144 K, near the 150 K stated', () => {
  expect(adiabaticRise(-220e3, 1000, 889, 1720)).toBeCloseTo(143.9, 1)
})

it('reproduces the closed profile of a first-order reaction under constant coolant to 1e-6 K', () => {
  const profile = plugFlowProfile(tube)
  const k = tube.rateAtInletS * (tube.residenceS / tube.lengthM)
  const b = tube.uaPerMWMK / (tube.massFlowKgS * tube.cpJKgK)
  for (const { zM, tempK, conversion } of profile) {
    const exact =
      tube.coolantK +
      (tube.inletK - tube.coolantK) * Math.exp(-b * zM) +
      ((tube.adiabaticRiseK * k) / (b - k)) * (Math.exp(-k * zM) - Math.exp(-b * zM))
    expect(Math.abs(tempK - exact)).toBeLessThan(1e-6)
    expect(Math.abs(conversion + Math.expm1(-k * zM))).toBeLessThan(1e-8)
  }
})

// EXO-01
it('follows T = T_in + X dT_ad without cooling, with and without activation energy', () => {
  for (const activationJMol of [0, 50e3]) {
    for (const p of plugFlowProfile({ ...tube, uaPerMWMK: 0, activationJMol }))
      expect(Math.abs(p.tempK - tube.inletK - p.conversion * tube.adiabaticRiseK)).toBeLessThan(1e-5)
  }
})

it('closes the heat balance of a cooled, activated tube: m cp (T_out - T_in) + duty = m cp X dT_ad within 0.2 %', () => {
  const p = plugFlowProfile({ ...tube, activationJMol: 40e3 }, { maxStep: 0.05 })
  const capacity = tube.massFlowKgS * tube.cpJKgK
  let duty = 0
  for (let i = 1; i < p.length; i++) {
    const [a, b] = [p[i - 1], p[i]]
    if (a !== undefined && b !== undefined) duty += tube.uaPerMWMK * (b.zM - a.zM) * ((a.tempK + b.tempK) / 2 - tube.coolantK)
  }
  const last = p.at(-1)
  expect(((last?.tempK ?? 0) - tube.inletK + duty / capacity) / ((last?.conversion ?? 0) * tube.adiabaticRiseK)).toBeCloseTo(1, 2)
})

it('moves the hot spot down with more cooling and never above the adiabatic end', () => {
  fc.assert(
    fc.property(num(0.1, 5), num(0.05, 3), (ua, rate) => {
      const spot = (uaPerMWMK: number) =>
        hotSpot(plugFlowProfile({ ...tube, uaPerMWMK, rateAtInletS: rate }, { relTol: 1e-6, absTol: 1e-6 })).tempK
      expect(spot(ua * 2)).toBeLessThanOrEqual(spot(ua) + 1e-6)
      expect(spot(ua)).toBeLessThanOrEqual(tube.inletK + tube.adiabaticRiseK + 1e-6)
    }),
    { numRuns: 25 },
  )
})

// EXO-01
it('states the MTSR of a stopped tube as the worst of T + (1 - X) dT_ad: at least the inlet plus the whole rise', () => {
  expect(mtsr(253, 1, 60)).toBe(313)
  expect(mtsr(253, 0, 60)).toBe(253)
  expect(mtsr(253, 0.5, -10)).toBe(253)
  expect(mtsrStoppedFlow(plugFlowProfile(tube), 60)).toBeGreaterThanOrEqual(333)
  expect(() => mtsr(253, 1.2, 60)).toThrow(MonitorError)
})
