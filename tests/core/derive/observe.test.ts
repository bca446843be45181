import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { type Layout, layoutOf } from '../../../server/core/derive/layout.ts'
import { createObserver } from '../../../server/core/derive/observe.ts'
import type { Step } from '../../../server/core/derive/step.ts'
import { fluidOf } from '../../../server/core/fluids/fluid.ts'
import { channelOf } from '../../../server/core/hydraulics/channel.ts'
import { cleanDp } from '../../../server/core/hydraulics/clean-dp.ts'
import { loadSkid } from '../../../server/skid/check.ts'

const channel = { diameterMm: 1.5, lengthM: 12, coilDiameterMm: 80 }
/** One coiled reactor with three thermocouples and a coolant; the outlet stands 2 m above the inlet where `heightM` is 2. */
const skid = (heightM = 0): Layout =>
  layoutOf(
    loadSkid(
      `
skid: coil
title: Coil
timeZone: UTC
scanSeconds: 1
tags:
  - { tag: FT-1, quantity: massFlow, unit: kg/h, range: [0, 20] }
  - { tag: PDT-1, quantity: differentialPressure, unit: bar, range: [0, 10] }
  - { tag: TT-1, quantity: temperature, unit: degC, range: [-100, 200] }
  - { tag: TT-2, quantity: temperature, unit: degC, range: [-100, 200] }
  - { tag: TT-3, quantity: temperature, unit: degC, range: [-100, 200] }
  - { tag: TT-9, quantity: temperature, unit: degC, range: [-100, 200] }
streams:
  - { id: A, title: feed, flowTag: FT-1, fluid: { solvent: THF } }
segments:
  - { id: R, title: reactor, kind: reactor, streams: [A], dpTag: PDT-1, temperatures: [TT-1, TT-2, TT-3], coolantTemperature: TT-9,
      channel: { diameterMm: ${channel.diameterMm}, lengthM: ${channel.lengthM}, coilDiameterMm: ${channel.coilDiameterMm}, heightM: ${heightM} } }
`,
      'coil.yaml',
    ),
  )
const coil = skid()
const thf = fluidOf({ kind: 'solvent', solvent: 'tetrahydrofuran' })
const geometry = channelOf({ ...coil.segments[0]!.spec.channel! })!
/** Profile of the three thermocouples about their mean, and the coolant under it, K. */
const profile = [-2, 0.5, 1.5]
const under = -3

/** ΔP of the clean coil with a loss coefficient, from the hydraulics and the liquid alone, Pa. */
function dpOf(flowKgH: number, tempC: number, lossK: number): number {
  const { rhoKgM3, viscPaS } = thf.at(tempC + 273.15)
  const v = flowKgH / 3600 / (geometry.areaM2 * rhoKgM3)
  return cleanDp(geometry, flowKgH / 3600, rhoKgM3, viscPaS).frictionPa + (lossK * rhoKgM3 * v * v) / 2
}
/** Fittings that make 5 % of ΔP at 5 kg/h and −20 °C, as the observer assumes. */
const fittings = ((): number => {
  const bare = dpOf(5, -20, 0)
  return (0.05 * bare) / (0.95 * (dpOf(5, -20, 1) - bare))
})()

const step = (
  over: {
    flowKgH?: number
    tempC?: number
    dpPa?: number | null
    lost?: readonly number[]
    coolant?: boolean
    varPa2?: number
  } = {},
): Step => {
  const { flowKgH = 5, tempC = -20, lost = [], coolant = true, varPa2 = 0 } = over
  const k = (at: number, d: number) => (lost.includes(at) ? null : tempC + 273.15 + d)
  return {
    tMs: 0,
    stepMs: 30_000,
    seen: 1,
    gapSteps: 0,
    dpPa: ['dpPa' in over ? over.dpPa! : dpOf(flowKgH, tempC, fittings)],
    dpVarPa2: [varPa2],
    tapPa: [],
    flow: [flowKgH / 3600],
    tempK: [null, null, k(0, profile[0]!), k(1, profile[1]!), k(2, profile[2]!), coolant ? k(9, under) : null],
    production: 1,
    flush: 0,
  }
}
const taught = (layout = coil) => {
  const observer = createObserver(layout)
  for (let i = 0; i < 40; i++) observer.step(step(), true)
  return observer
}

describe('flow and viscosity taken out', () => {
  // FOU-01, FOU-03
  it('of data made from the hydraulics the ratio is 1.000 within 0.001 for any flow of 2 to 9 kg/h and any temperature of −60 to 40 °C', () => {
    const observer = taught()
    const clean = observer.step(step(), true)[0]!.observation!.y
    fc.assert(
      fc.property(fc.double({ min: 2, max: 9, noNaN: true }), fc.double({ min: -60, max: 40, noNaN: true }), (flowKgH, tempC) => {
        const { y } = observer.step(step({ flowKgH, tempC }), true)[0]!.observation!
        expect(Math.abs(Math.exp(y - clean) - 1)).toBeLessThan(1e-3)
      }),
      { numRuns: 200, seed: 41 },
    )
  })

  it('without any fittings in truth a flow step of 20 % moves it by less than 1 %: that is left to the learnt exponent', () => {
    const observer = createObserver(coil)
    const at = (flowKgH: number) => observer.step(step({ flowKgH, dpPa: dpOf(flowKgH, -20, 0) }), true)[0]!.observation!.y
    const clean = at(5)
    expect(Math.abs(at(6) - clean)).toBeLessThan(0.01)
    expect(Math.abs(at(4) - clean)).toBeLessThan(0.012)
  })

  it('a deposit shows in full at whatever flow: ΔP of 1.3 times clean is a ratio of 1.300', () => {
    const observer = taught()
    const clean = observer.step(step(), true)[0]!.observation!.y
    const { y } = observer.step(step({ flowKgH: 3.5, tempC: -10, dpPa: 1.3 * dpOf(3.5, -10, fittings) }), true)[0]!.observation!
    expect(Math.exp(y - clean)).toBeCloseTo(1.3, 3)
  })

  it('knows the slope of its model: n0 and k0 as from a change of 10 % in flow and viscosity, between laminar and turbulent', () => {
    const o = taught().step(step(), true)[0]!.observation!
    const n = Math.log(dpOf(5.5, -20, fittings) / dpOf(4.5, -20, fittings)) / Math.log(5.5 / 4.5)
    expect(o.n0).toBeCloseTo(n, 2)
    expect(o.n0).toBeGreaterThan(1)
    expect(o.n0 + o.k0).toBeCloseTo(2, 6)
    expect(o.share).toEqual([1])
  })
})

describe('a lost thermocouple', () => {
  it('does not move the mean temperature: any one or two of three gone, it stays within 0.05 K, where leaving it out would move it by up to 2 K', () => {
    const observer = taught()
    const whole = observer.step(step(), true)[0]!.tempK!
    for (const lost of [[0], [1], [2], [0, 1], [1, 2], [0, 2]])
      expect(Math.abs(observer.step(step({ lost }), true)[0]!.tempK! - whole)).toBeLessThan(0.05)
  })

  it('with all three gone the coolant stands in, with its learnt difference of 3 K; with that gone too nothing is said', () => {
    const observer = taught()
    const whole = observer.step(step(), true)[0]!.tempK!
    expect(Math.abs(observer.step(step({ lost: [0, 1, 2] }), true)[0]!.tempK! - whole)).toBeLessThan(0.05)
    expect(observer.step(step({ lost: [0, 1, 2], coolant: false }), true)[0]).toMatchObject({ tempK: null, observation: null })
  })
})

describe('what stands before resistance', () => {
  it('a zero of 30 mbar read with the pumps at rest is subtracted; one of 400 mbar is pressure still locked in and is not', () => {
    const observer = createObserver(coil)
    for (let i = 0; i < 10; i++) observer.rest(step({ flowKgH: 0, dpPa: 3000 }))
    const dp = dpOf(5, -20, fittings)
    expect(observer.step(step({ dpPa: dp + 3000 }), true)[0]!.dpPa).toBeCloseTo(dp, 6)
    const other = createObserver(coil)
    other.rest(step({ flowKgH: 0, dpPa: 40_000 }))
    expect(other.step(step({ dpPa: dp }), true)[0]!.dpPa).toBeCloseTo(dp, 6)
  })

  it('the static head of 2 m of liquid, ρ g h, is subtracted while it flows', () => {
    const dp = dpOf(5, -20, fittings)
    const head = thf.at(253.15).rhoKgM3 * 9.80665 * 2
    const [x] = createObserver(skid(2)).step(step({ dpPa: dp + head }), true)
    expect(x!.dpPa! / dp).toBeCloseTo(1, 5)
  })

  // SIG-08
  it('a ΔP below 1.5 sd of its own noise says nothing of a resistance: null, not a number', () => {
    const observer = taught()
    expect(observer.step(step({ dpPa: 1400, varPa2: 1e6 }), true)[0]!.observation).toBeNull()
    expect(observer.step(step({ dpPa: 1600, varPa2: 1e6 }), true)[0]!.observation).not.toBeNull()
    expect(observer.step(step({ dpPa: -200 }), true)[0]!.observation).toBeNull()
  })

  it('a missing ΔP, flow or temperature is no observation', () => {
    const observer = taught()
    expect(observer.step(step({ dpPa: null }), true)[0]).toMatchObject({ observation: null, dpPa: null })
    expect(observer.step({ ...step(), flow: [null] }, true)[0]).toMatchObject({ observation: null, massFlowKgS: null })
  })
})
