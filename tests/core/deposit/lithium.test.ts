import { existsSync, readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { aqueousSalt } from '../../../server/core/deposit/aqueous.ts'
import { leastWater, lithiumSalt, lithiumSalts, solubilityKgKg } from '../../../server/core/deposit/lithium-salts.ts'
import { filmVolumeM3, impliedCapture, runLengthS, USUAL_CAPTURE } from '../../../server/core/deposit/run-length.ts'
import { ratioOfThickness } from '../../../server/core/deposit/thickness.ts'
import { liohRateM3S, reagentShareLost, waterProducts } from '../../../server/core/deposit/water-in-feed.ts'
import { roundArea } from '../../../server/core/hydraulics/channel.ts'

const fixture = JSON.parse(readFileSync(new URL('../../../fixtures/physics/lithium.json', import.meta.url), 'utf8'))
const folder = new URL('../../../../shared/reference/', import.meta.url)

describe('water in a feed', () => {
  it.each(fixture.waterInFeed.rows as number[][])(
    'of %d ppm in THF becomes %d mmol, %d mg, %d mm3 LiOH a litre, %d mL gas, and takes %d %% of 0.5 mol/L',
    (ppm, mmol, mg, mm3, gas, share) => {
      const p = waterProducts(ppm!, 889)
      const within = (got: number, wanted: number, digit: number) => expect(Math.abs(got - wanted)).toBeLessThanOrEqual(digit)
      within(p.waterMolM3, mmol!, mmol! * 0.006)
      within(p.liohKgM3 * 1000, mg!, mg! * 0.006)
      within(p.liohM3M3 * 1e6, mm3!, mm3! * 0.006)
      within(p.gasM3M3 * 1000, gas!, gas! * 0.012)
      within(100 * reagentShareLost(p.waterMolM3, 1e-6, 500, 1e-6), share!, 0.051)
      expect(p.reagentLostWorstMolM3).toBe(2 * p.reagentLostMolM3)
    },
  )

  it('counts in proportion: twice the water, twice the solid; the reagent share falls with concentration and reagent flow', () => {
    fc.assert(
      fc.property(fc.double({ min: 0.1, max: 5000, noNaN: true }), fc.double({ min: 500, max: 1500, noNaN: true }), (ppm, rho) => {
        expect(Math.abs(waterProducts(2 * ppm, rho).liohM3M3 / waterProducts(ppm, rho).liohM3M3 - 2)).toBeLessThan(1e-12)
        expect(reagentShareLost(10, 1, 500, 2)).toBeCloseTo(0.01, 12)
      }),
    )
    expect(waterProducts(0, 889).liohKgM3).toBe(0)
  })

  // PRO-04
  it('6 L/h of THF at 300 ppm make 1.46 cm3 LiOH an hour; streams without a figure do not count, none at all gives null', () => {
    const wet = { waterPpm: 300, rhoKgM3: 889, flowM3S: 6e-3 / 3600 }
    expect(liohRateM3S([wet, { waterPpm: null, rhoKgM3: 700, flowM3S: 1 }])! * 3600e6).toBeCloseTo(fixture.runLength.solidCm3H, 2)
    expect(liohRateM3S([{ ...wet, waterPpm: null }])).toBeNull()
  })

  it('below 0 ppm or without reagent is FLUID_RANGE', () => {
    expect(() => waterProducts(-1, 889)).toThrow(/0 to 1e6 ppm/)
    expect(() => reagentShareLost(1, 1, 0, 1)).toThrow(/above 0/)
  })
})

describe('how long a run lasts', () => {
  const channel = {
    diameterM: 0.002,
    lengthM: 5,
    parallel: 1,
    roughnessM: 0,
    coilDiameterM: null,
    heightM: 0,
    bends: 0,
    areaM2: roundArea(0.002),
    laminarFactor: 1,
  }
  const at = { massFlowKgS: (6e-3 / 3600) * 889, rhoKgM3: 889, viscPaS: 8e-4 }
  const rate = (ppm: number) => liohRateM3S([{ waterPpm: ppm, rhoKgM3: 889, flowM3S: 6e-3 / 3600 }])!

  // PRO-04
  it('a tenth of the solid of 300 ppm reaches 1.51 in 20 h in 2 mm x 5 m, of 50 ppm 1.065 (within 1 %)', () => {
    expect(
      Math.abs(runLengthS(channel, at, fixture.runLength.ratioAfter20h300ppm, rate(300), USUAL_CAPTURE)! / 3600 / 20 - 1),
    ).toBeLessThan(0.01)
    expect(
      Math.abs(runLengthS(channel, at, fixture.runLength.ratioAfter20h50ppm, rate(50), USUAL_CAPTURE)! / 3600 / 20 - 1),
    ).toBeLessThan(0.02)
  })

  it('and the growth seen over that time gives the captured share back, from clean or from anywhere, to 1e-9', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 1.02, max: 3, noNaN: true }),
        fc.double({ min: 1.01, max: 3, noNaN: true }),
        fc.double({ min: 0.01, max: 1, noNaN: true }),
        (r1, up, capture) => {
          const s1 = runLengthS(channel, at, r1, rate(100), capture)!
          const s2 = runLengthS(channel, at, r1 * up, rate(100), capture)!
          expect(Math.abs(impliedCapture(channel, at, 1, r1, s1, rate(100))! / capture - 1)).toBeLessThan(1e-9)
          expect(Math.abs(impliedCapture(channel, at, r1, r1 * up, s2 - s1, rate(100))! / capture - 1)).toBeLessThan(1e-6)
        },
      ),
    )
  })

  it('is unknown without water or capture, and a limit of 1 is refused', () => {
    expect(runLengthS(channel, at, 2, 0, 0.1)).toBeNull()
    expect(impliedCapture(channel, at, 1, 2, 3600, 0)).toBeNull()
    expect(() => runLengthS(channel, at, 1, 1e-9, 0.1)).toThrow(/above 1/)
    expect(() => impliedCapture(channel, at, 1, 2, 0, 1e-9)).toThrow(/above 0 s/)
  })

  it('a film of half the radius fills three quarters of the volume', () => {
    expect(filmVolumeM3(channel, 0.0005) / (roundArea(0.002) * 5)).toBeCloseTo(0.75, 12)
    expect(ratioOfThickness(channel, { ...at, massFlowKgS: 1e-6 }, 0.0005)).toBeCloseTo(16, 6)
  })
})

describe('lithium salts in water', () => {
  for (const salt of ['LiOH', 'LiCl', 'LiBr'] as const)
    it.each(fixture.solubilityGPer100g[salt] as [number, number][])(
      `${salt} at %d °C dissolves to %d g in 100 g within 3 % (10 % at 100 °C)`,
      (tempC, g) => {
        expect(Math.abs((solubilityKgKg(salt, tempC) * 100) / g - 1)).toBeLessThan(tempC > 60 ? 0.101 : 0.03)
      },
    )

  // PRO-06
  it('a gram of LiOH needs 8.1 g of water at 20 °C and gives off 984 J, at most 29 K in that water', () => {
    const w = leastWater('LiOH', 1e-3, 20)
    expect(w.massKg * 1000).toBeCloseTo(8.1, 1)
    expect(w.heatJ).toBeCloseTo(984, 0)
    expect(w.riseK).toBeCloseTo(29.1, 1)
    expect(w.volumeM3 * 1e6).toBeCloseTo(8.11, 1)
    expect(leastWater('LiOH', 0, 20)).toMatchObject({ massKg: 0, riseK: 0 })
  })

  // PRO-06
  it('carbonate and fluoride do not wash out, the rest does, and less water is needed warm for LiOH but more for Li2CO3', () => {
    expect(lithiumSalts.filter((s) => !s.washesOut).map((s) => s.name)).toEqual(['LiF', 'Li2CO3'])
    expect(leastWater('LiOH', 1, 60).massKg).toBeLessThan(leastWater('LiOH', 1, 5).massKg)
    expect(leastWater('Li2CO3', 1, 60).massKg).toBeGreaterThan(leastWater('Li2CO3', 1, 5).massKg)
  })

  it('crystal densities are the CRC values within 2 %', () => {
    for (const salt of ['LiOH', 'LiCl', 'LiBr'] as const)
      expect(Math.abs(lithiumSalt(salt).densityKgM3 / fixture.crystalDensityKgM3[salt] - 1)).toBeLessThan(0.02)
  })

  it('ice, steam, a negative deposit and an unknown salt are refused', () => {
    expect(() => solubilityKgKg('LiOH', -1)).toThrow(/liquid from 0 to 100/)
    expect(() => solubilityKgKg('LiOH', 101)).toThrow(/liquid from 0 to 100/)
    expect(() => leastWater('LiOH', -1, 20)).toThrow(/0 kg or more/)
    expect(() => lithiumSalt('NaCl' as never)).toThrow(/unknown lithium salt/)
  })

  it.each(fixture.aqueous.rows as ['LiOH' | 'LiCl', number, number, number, number][])(
    '%s at mass fraction %d and %d °C: %d kg/m3 and %d Pa s to 1e-9',
    (salt, w, tempC, rho, visc) => {
      const s = aqueousSalt(salt, w, tempC)
      expect(Math.abs(s.rhoKgM3 / rho - 1)).toBeLessThan(1e-7)
      expect(Math.abs(s.viscPaS / visc - 1)).toBeLessThan(1e-9)
    },
  )

  it('10 % LiCl has the handbook density of 1054 kg/m3 within 0.5 %; no salt is water within 1 % in viscosity; out of range is uncertain, beyond it an error', () => {
    expect(Math.abs(aqueousSalt('LiCl', 0.1, 25).rhoKgM3 / 1054 - 1)).toBeLessThan(0.005)
    expect(Math.abs(aqueousSalt('LiOH', 0, 25).viscPaS / 0.89e-3 - 1)).toBeLessThan(0.01)
    expect(aqueousSalt('LiOH', 0.02, 60).uncertain).toBe(true)
    expect(aqueousSalt('LiOH', 0.02, 25).uncertain).toBe(false)
    expect(() => aqueousSalt('LiOH', 0.6, 25)).toThrow(/no figures/)
  })
})

describe.runIf(existsSync(folder))('shared reference values of lithium salts (their twins above always run)', () => {
  const load = (name: string) =>
    JSON.parse(readFileSync(new URL(name, folder), 'utf8')).cases as {
      in: Record<string, string | number>
      out: Record<string, number>
    }[]

  it('solubilities 3 % to 60 °C and 10 % above, densities 2 %, all of 07_lithium_salts', () => {
    for (const { in: i, out } of load('07_lithium_salts.json')) {
      const solid = i['solid'] as 'LiOH' | undefined
      if (solid !== undefined) {
        expect(Math.abs(lithiumSalt(solid).densityKgM3 / out['density_kg_m3']! - 1)).toBeLessThan(0.02)
        continue
      }
      const g = out['g_LiOH_per_100g_water'] ?? out['g_per_100g_water']!
      const tempC = i['temperature_C'] as number
      expect(Math.abs((solubilityKgKg(i['salt'] as 'LiOH', tempC) * 100) / g - 1), JSON.stringify(i)).toBeLessThan(
        tempC > 60 ? 0.101 : 0.03,
      )
    }
  })

  it('aqueous LiCl and LiOH to 1e-6, all of 07_aqueous_lithium', () => {
    for (const { in: i, out } of load('07_aqueous_lithium.json')) {
      const s = aqueousSalt(i['salt'] as 'LiOH', i['mass_fraction'] as number, i['temperature_C'] as number)
      expect(Math.abs(s.rhoKgM3 / out['density_kg_m3']! - 1)).toBeLessThan(1e-6)
      expect(Math.abs(s.viscPaS / out['viscosity_Pa_s']! - 1)).toBeLessThan(1e-6)
    }
  })
})
