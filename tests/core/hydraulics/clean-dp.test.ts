import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { fluidOf } from '../../../server/core/fluids/fluid.ts'
import { propertyTable } from '../../../server/core/fluids/property-table.ts'
import {
  annularSection,
  type ChannelGeometry,
  channelOf,
  channelVolumeM3,
  rectangularSection,
  roundArea,
} from '../../../server/core/hydraulics/channel.ts'
import { cleanDp, cleanDpAlong, exponents } from '../../../server/core/hydraulics/clean-dp.ts'
import { colebrook } from '../../../server/core/hydraulics/friction.ts'
import type { ChannelSpec } from '../../../server/core/skid.ts'
import { kFromC } from '../../../server/core/units.ts'

const fixture = JSON.parse(readFileSync(new URL('../../../fixtures/physics/friction.json', import.meta.url), 'utf8'))
const tube = (over: Partial<ChannelGeometry> = {}): ChannelGeometry => {
  const diameterM = over.diameterM ?? 0.0016
  return {
    diameterM,
    lengthM: 15,
    parallel: 1,
    roughnessM: 0,
    coilDiameterM: null,
    heightM: 0,
    bends: 0,
    areaM2: roundArea(diameterM),
    laminarFactor: 1,
    ...over,
  }
}
const spec: ChannelSpec = {
  diameterMm: 1.6,
  lengthM: 15,
  parallel: 2,
  roughnessUm: 25,
  wallMm: 1.5,
  coilDiameterMm: 80,
  heightM: 0,
  wallConductivityWMK: 15,
  outerFilmWM2K: 500,
}

describe('worked examples of White, Fluid Mechanics', () => {
  it('asphalted cast iron, 200 ft of 6 in at 6 ft/s: f 0.02 and 280 lbf/ft2 (13406 Pa) within 2 %', () => {
    const w = fixture.worked[0]
    const area = roundArea(w.diameterM)
    const channel = tube({ diameterM: w.diameterM, lengthM: w.lengthM, roughnessM: w.relRoughness * w.diameterM, areaM2: area })
    const viscPaS = (w.rhoKgM3 * w.velocityMS * w.diameterM) / w.re
    const dp = cleanDp(channel, w.rhoKgM3 * w.velocityMS * area, w.rhoKgM3, viscPaS)
    expect(dp.re).toBeCloseTo(270000, 3)
    expect(Math.abs(dp.dpPa / w.dpPa - 1)).toBeLessThan(0.02)
    expect(Math.abs(colebrook(w.re, w.relRoughness) / w.f - 1)).toBeLessThan(0.02)
  })

  it('oil up a 40 degree incline: 100 kPa drive 0.0076 m3/s at Re 810 within 1 %', () => {
    const w = fixture.worked[1]
    const channel = tube({ diameterM: w.diameterM, lengthM: w.lengthM, areaM2: roundArea(w.diameterM), heightM: w.heightM })
    const dp = cleanDp(channel, 0.0076426 * w.rhoKgM3, w.rhoKgM3, w.viscPaS)
    expect(Math.abs(dp.dpPa / w.dpPa - 1)).toBeLessThan(0.001)
    expect(Math.abs(dp.re / w.re - 1)).toBeLessThan(0.01)
    expect(Math.abs(0.0076426 / w.flowM3S - 1)).toBeLessThan(0.01)
  })
})

it('laminar straight flow is Hagen and Poiseuille, 128 μ L Q/(π d⁴), to 1e-12 below Re 600', () => {
  fc.assert(
    fc.property(
      fc.double({ min: 1e-8, max: 5e-4, noNaN: true }),
      fc.double({ min: 0.0005, max: 0.006, noNaN: true }),
      fc.double({ min: 2e-4, max: 5e-3, noNaN: true }),
      (m, d, mu) => {
        const dp = cleanDp(tube({ diameterM: d, areaM2: roundArea(d), roughnessM: 0.05 * d }), m, 900, mu)
        fc.pre(dp.re < 600)
        expect(Math.abs(dp.dpPa / ((128 * mu * 15 * (m / 900)) / (Math.PI * d ** 4)) - 1)).toBeLessThan(1e-12)
      },
    ),
  )
})

// SIG-08
it('1 m of THF column weighs 0.087 bar, and adds to ΔP when the outlet is above the inlet, flowing or not', () => {
  const still = cleanDp(tube({ heightM: 1 }), 0, 887, 5e-4)
  expect(still.dpPa).toBeCloseTo(8698, 0)
  expect(still).toMatchObject({ frictionPa: 0, bendPa: 0, re: 0, uncertain: false })
  const flowing = cleanDp(tube({ heightM: -1 }), 1e-3, 887, 5e-4)
  expect(flowing.staticPa).toBeCloseTo(-8698, 0)
  expect(flowing.dpPa).toBeCloseTo(flowing.frictionPa + flowing.staticPa, 6)
})

it('reversing the flow reverses friction and losses', () => {
  const c = tube({ coilDiameterM: 0.08, bends: 4 })
  const there = cleanDp(c, 2e-3, 900, 8e-4, { lossK: 1.5 })
  const back = cleanDp(c, -2e-3, 900, 8e-4, { lossK: 1.5 })
  expect(back.dpPa).toBeCloseTo(-there.dpPa, 6)
})

it('similar flows have the same f: scaling length by s, density by r and viscosity by v leaves ΔP ρ d²/μ² unchanged at the same Re', () => {
  const scale = fc.double({ min: 0.2, max: 5, noNaN: true })
  fc.assert(
    fc.property(
      scale,
      scale,
      scale,
      fc.double({ min: 1e-5, max: 5e-3, noNaN: true }),
      fc.constantFrom(null, 0.08),
      (s, r, v, m, coil) => {
        const a = tube({ coilDiameterM: coil, roughnessM: 2e-5 })
        const b = tube({
          diameterM: 0.0016 * s,
          areaM2: roundArea(0.0016 * s),
          lengthM: 15 * s,
          coilDiameterM: coil === null ? null : coil * s,
          roughnessM: 2e-5 * s,
        })
        const x = cleanDp(a, m, 900, 8e-4)
        const y = cleanDp(b, m * s * v, 900 * r, 8e-4 * v)
        expect(Math.abs(y.re / x.re - 1)).toBeLessThan(1e-12)
        expect(Math.abs((y.dpPa * s * s * r) / (v * v) / x.dpPa - 1)).toBeLessThan(1e-9)
      },
    ),
  )
})

it('ΔP rises with flow, viscosity, length, roughness and curvature and falls with bore and branches', () => {
  fc.assert(
    fc.property(
      fc.double({ min: 1e-5, max: 8e-3, noNaN: true }),
      fc.double({ min: 3e-4, max: 3e-3, noNaN: true }),
      fc.double({ min: 1.01, max: 2, noNaN: true }),
      (m, mu, up) => {
        const base = tube({ roughnessM: 1e-5 })
        const at = (c: ChannelGeometry, flow = m, visc = mu) => cleanDp(c, flow, 900, visc).dpPa
        const dp = at(base)
        expect(at(base, m * up)).toBeGreaterThan(dp)
        expect(at({ ...base, lengthM: 15 * up })).toBeCloseTo(dp * up, 3)
        expect(at({ ...base, roughnessM: 1e-5 * up })).toBeGreaterThanOrEqual(dp)
        expect(at({ ...base, parallel: 2 })).toBeLessThan(dp)
        expect(at(tube({ roughnessM: 1e-5, diameterM: 0.0016 * up }))).toBeLessThan(dp)
        if (cleanDp(base, m, 900, mu).re < 2000) {
          expect(at(base, m, mu * up)).toBeGreaterThan(dp)
          expect(at({ ...base, coilDiameterM: 0.05 })).toBeGreaterThanOrEqual(dp * (1 - 1e-3))
        }
      },
    ),
  )
})

it('only the range between the regimes is uncertain: straight Re 2000 to 4000, a 1.6/80 mm coil around its critical Re of 5702', () => {
  const flow = (re: number) => (re * Math.PI * 0.0016 * 8e-4) / 4
  const straight = (re: number) => cleanDp(tube(), flow(re), 900, 8e-4).uncertain
  const coil = (re: number) => cleanDp(tube({ coilDiameterM: 0.08 }), flow(re), 900, 8e-4).uncertain
  expect([1900, 2100, 3900, 4100].map(straight)).toEqual([false, true, true, false])
  expect([4000, 5500, 7000, 7500].map(coil)).toEqual([false, true, true, false])
  expect(cleanDp(tube({ roughnessM: 1e-4 }), flow(6000), 900, 8e-4).uncertain).toBe(true)
})

describe('a temperature profile', () => {
  const thf = propertyTable(fluidOf({ kind: 'solvent', solvent: 'THF' }))

  it('that is flat gives the uniform answer, one temperature or five', () => {
    const one = cleanDpAlong(tube(), 1e-3, [250], thf)!
    const five = cleanDpAlong(tube(), 1e-3, [250, 250, 250, 250, 250], thf)!
    expect(Math.abs(five.dpPa / one.dpPa - 1)).toBeLessThan(1e-12)
    expect(one.dpPa).toBe(cleanDp(tube(), 1e-3, thf.rhoKgM3(250), thf.viscPaS(250)).dpPa)
  })

  // FOU-03
  it('of 20 K, linear, is within 1 % of 400 steps by its two ends, and within 0.25 % by three', () => {
    const along = (n: number) =>
      cleanDpAlong(
        tube(),
        1e-4,
        Array.from({ length: n }, (_, i) => kFromC(-30 + (20 * i) / (n - 1))),
        thf,
      )!.dpPa
    expect(Math.abs(along(2) / along(400) - 1)).toBeLessThan(0.01)
    expect(Math.abs(along(3) / along(400) - 1)).toBeLessThan(0.0025)
  })

  it('beyond the fluid is uncertain, without any temperature null, and it never throws', () => {
    expect(cleanDpAlong(tube(), 1e-3, [50, 250], thf)!.uncertain).toBe(true)
    expect(cleanDpAlong(tube(), 1e-3, [1000], thf)!.uncertain).toBe(true)
    expect(cleanDpAlong(tube(), 1e-3, [250, 260], thf)!.uncertain).toBe(false)
    expect(cleanDpAlong(tube(), 1e-3, [], thf)).toBeNull()
  })
})

describe('exponents', () => {
  // FOU-01
  it('are 1 and 1 laminar straight, n + k = 2 in every regime at constant density', () => {
    expect(exponents(tube(), 1e-4, 900, 8e-4).n).toBeCloseTo(1, 8)
    for (const m of [1e-4, 2e-3, 8e-3])
      for (const c of [tube(), tube({ coilDiameterM: 0.08, roughnessM: 1e-5 }), tube({ bends: 10 })]) {
        const { n, k } = exponents(c, m, 900, 8e-4)
        expect(n + k).toBeCloseTo(2, 5)
      }
  })

  // FOU-01
  it('of smooth turbulent flow at Re 20000 are 1.75 and 0.25 (Blasius) within 0.03, of a laminar coil between 1.2 and 1.5', () => {
    const { n, k } = exponents(tube(), (20000 * Math.PI * 0.0016 * 8e-4) / 4, 900, 8e-4)
    expect(Math.abs(n - 1.75)).toBeLessThan(0.03)
    expect(Math.abs(k - 0.25)).toBeLessThan(0.03)
    const coil = exponents(tube({ coilDiameterM: 0.08 }), 1.5e-3, 900, 8e-4)
    expect(coil.n).toBeGreaterThan(1.2)
    expect(coil.n).toBeLessThan(1.5)
  })
})

describe('channels of the skid file', () => {
  it('come in SI, null without bore or length; two branches of 1.6 mm x 15 m hold 60.3 mL', () => {
    const c = channelOf(spec)!
    expect(c).toMatchObject({ diameterM: 0.0016, lengthM: 15, parallel: 2, coilDiameterM: 0.08, laminarFactor: 1, bends: 0 })
    expect(c.roughnessM).toBeCloseTo(2.5e-5, 12)
    expect(channelVolumeM3(c) * 1e6).toBeCloseTo(60.32, 1)
    expect(channelOf({ ...spec, diameterMm: null })).toBeNull()
    expect(channelOf({ ...spec, lengthM: null })).toBeNull()
  })

  it.each(fixture.shape.annulus as [number, number][])('a ring with core/bore %d has f Re %d (White) within 0.02 %', (k, fRe) => {
    expect(Math.abs((annularSection(0.01, 0.01 * k).laminarFactor * 64) / fRe - 1)).toBeLessThan(2e-4)
  })

  it.each(fixture.shape.rectangle as [number, number][])(
    'a rectangle of sides 1 to %d has f Re %d (White) within 0.1 %',
    (a, fRe) => {
      expect(Math.abs((rectangularSection(0.002, 0.002 * a).laminarFactor * 64) / fRe - 1)).toBeLessThan(1e-3)
      expect(rectangularSection(0.002, 0.002 * a)).toEqual(rectangularSection(0.002 * a, 0.002))
    },
  )

  it('rectangular, ring and zigzag keys are taken, and laminar ΔP between plates 0.5 mm apart and 50 mm wide is 12 μ v L/h² within 2 %', () => {
    const plates = channelOf({ ...spec, diameterMm: null, widthMm: 50, depthMm: 0.5, parallel: 1, coilDiameterMm: null })!
    const v = 0.1
    const dp = cleanDp(plates, v * plates.areaM2 * 900, 900, 1e-3)
    expect(Math.abs(dp.dpPa / ((12 * 1e-3 * v * 15) / 0.0005 ** 2) - 1)).toBeLessThan(0.02)
    expect(channelOf({ ...spec, coreMm: 0.8 })!.diameterM).toBeCloseTo(0.0008, 12)
    const zigzag = channelOf({ ...spec, bends: 100, coilDiameterMm: null })!
    expect(cleanDp(zigzag, 2e-3, 900, 8e-4).bendPa).toBeGreaterThan(0)
  })

  it('impossible sections are HYDRAULICS_RANGE', () => {
    expect(() => rectangularSection(0, 1)).toThrow(/sides above 0/)
    expect(() => annularSection(0.001, 0.001)).toThrow(/core between/)
  })
})
