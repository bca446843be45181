import { existsSync, readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { leadErrorK, pt100Ohm, tempOfPt100 } from '../../../server/core/instruments/pt100.ts'
import { coldJunctionErrorK, emfMv, tempOfEmf } from '../../../server/core/instruments/thermocouple.ts'
import { pt100Tolerance, temperatureUncertainty, thermocoupleTolerance } from '../../../server/core/instruments/tolerance.ts'

describe('thermocouples', () => {
  // NIST tables of the ITS-90 (Monograph 175), printed to 1 µV; from memory.
  it.each([
    ['K', -100, -3.554],
    ['K', -40, -1.527],
    ['K', 25, 1.0],
    ['K', 100, 4.096],
    ['K', 1000, 41.276],
    ['T', -100, -3.379],
    ['T', -40, -1.475],
    ['T', 25, 0.992],
    ['T', 100, 4.279],
    ['T', 400, 20.872],
  ] as const)('type %s gives at %d °C the %d mV of the table', (type, tempC, mV) => {
    expect(Math.abs(emfMv(type, tempC) - mV)).toBeLessThan(6e-4)
  })
  it('are read back from their EMF to 1e-7 K, −200 °C to the end (the two published pieces of type K meet at 0 °C within 5e-8 K)', () => {
    fc.assert(
      fc.property(fc.constantFrom('K' as const, 'T' as const), fc.double({ min: 0, max: 1, noNaN: true }), (type, u) => {
        const tempC = -200 + u * (type === 'K' ? 1570 : 600)
        expect(Math.abs(tempOfEmf(type, emfMv(type, tempC)) - tempC)).toBeLessThan(1e-7)
      }),
      { numRuns: 200 },
    )
  })
  // Seebeck coefficients of the tables: 40.4 µV/K at 25 °C, 34.9 at −60 °C (from memory).
  it('a junction taken 1 K too warm shows as 1.16 K at −60 °C for type K, and as 1 K at the junction’s own temperature', () => {
    expect(coldJunctionErrorK('K', -60, 25, 1)).toBeCloseTo(1.16, 2)
    expect(coldJunctionErrorK('K', 25, 25, 1)).toBeCloseTo(1, 9)
    expect(coldJunctionErrorK('T', -60, 25, -1)).toBeLessThan(-1.1)
  })
  it('outside the tables is CONFIG_RANGE', () => {
    for (const wrong of [-271, 401, Number.NaN]) expect(() => emfMv('T', wrong)).toThrow(/no table/)
    expect(() => tempOfEmf('K', 80)).toThrow(/no EMF/)
  })
})

describe('Pt100', () => {
  // IEC 60751 table, printed to 0.01 Ω (from memory).
  it.each([
    [-100, 60.26],
    [-50, 80.31],
    [0, 100],
    [50, 119.4],
    [100, 138.51],
    [400, 247.09],
  ])('has at %d °C the %d Ω of the table', (tempC, ohm) => {
    expect(Math.abs(pt100Ohm(tempC) - ohm)).toBeLessThan(0.006)
  })
  it('is read back from its resistance to 1e-9 K, and 0.1 Ω more is 0.256 K at 0 °C (0.3908 Ω/K)', () => {
    fc.assert(
      fc.property(fc.double({ min: -200, max: 850, noNaN: true }), (t) => {
        expect(Math.abs(tempOfPt100(pt100Ohm(t)) - t)).toBeLessThan(1e-9)
      }),
    )
    expect(leadErrorK(0, 0.1)).toBeCloseTo(0.1 / 0.39083, 3)
    expect(() => tempOfPt100(5)).toThrow(/no resistance/)
    expect(() => pt100Ohm(-201)).toThrow(/no table/)
  })
})

describe('tolerances', () => {
  // SIG-04; IEC 60584-1 and IEC 60751 (from memory).
  it('type T: class 1 ±0.5 K to 125 °C, 0.4 % beyond, from −40 °C; class 3 ±1 K or 1.5 % below', () => {
    expect([0, 125, 200].map((t) => thermocoupleTolerance('T', 1, t))).toEqual([0.5, 0.5, 0.8])
    expect(thermocoupleTolerance('T', 1, -41)).toBeNull()
    expect([-60, -100].map((t) => thermocoupleTolerance('T', 3, t))).toEqual([1, 1.5])
    expect(thermocoupleTolerance('K', 2, 500)).toBe(3.75)
    expect([pt100Tolerance('A', -50), pt100Tolerance('B', 0)]).toEqual([0.25, 0.3])
  })
  it('type K at −20 °C: ±1.5 K and a cold junction to 0.5 K make 0.92 K; Pt100: ±0.4 K and 0.1 Ω make 0.27 K; unnamed 1 K', () => {
    expect(temperatureUncertainty('K', -20).uK).toBeCloseTo(Math.hypot(1.5, 0.5 * 1.055) / Math.sqrt(3), 2)
    expect(temperatureUncertainty('Pt100', -20).uK).toBeCloseTo(Math.hypot(0.4, 0.2545) / Math.sqrt(3), 2)
    expect(temperatureUncertainty(null, -20)).toEqual({ uK: 1, basis: 'sensor not named: 1 K assumed' })
    expect(temperatureUncertainty('NTC', 20).uK).toBe(1)
    expect(temperatureUncertainty('K', 5000).uK).toBe(1)
    expect(temperatureUncertainty('type K', -80).basis).toContain('class 3')
  })
})

const folder = '../shared/reference'
describe.runIf(existsSync(folder))('shared reference 13', () => {
  type Case = { in: Record<string, number | string>; out: Record<string, number | null> }
  const cases = (name: string): Case[] => JSON.parse(readFileSync(`${folder}/13_${name}.json`, 'utf8')).cases

  it('thermocouples: EMF to 1e-6 mV (table 0.6 µV), slope to 1e-4 µV/K, inverse to the 0.06 K of the polynomials', () => {
    let seen = 0
    for (const { in: i, out } of cases('thermocouple')) {
      const type = i['type'] as 'K' | 'T'
      const t = i['temperature_C'] as number | undefined
      if (t !== undefined && out['emf_mV'] != null) {
        expect(Math.abs(emfMv(type, t) - out['emf_mV'])).toBeLessThan(1e-6)
        seen++
      }
      if (t !== undefined && out['emf_mV_printed'] != null) {
        expect(Math.abs(emfMv(type, t) - out['emf_mV_printed'])).toBeLessThan(6e-4)
        seen++
      }
      if (t !== undefined && out['seebeck_uV_per_K'] != null && t > -270 && t < (type === 'K' ? 1372 : 400)) {
        const h = 1e-3
        expect(Math.abs(((emfMv(type, t + h) - emfMv(type, t - h)) / (2 * h)) * 1000 - out['seebeck_uV_per_K'])).toBeLessThan(1e-3)
        seen++
      }
      if (t !== undefined && out['inverse_polynomial_C'] != null) {
        expect(Math.abs(tempOfEmf(type, emfMv(type, t)) - out['inverse_polynomial_C'])).toBeLessThan(0.06)
        seen++
      }
      if (i['measured_mV'] !== undefined) {
        const total = (i['measured_mV'] as number) + emfMv(type, i['cold_junction_C'] as number)
        expect(Math.abs(total - out['total_emf_mV']!)).toBeLessThan(1e-6)
        expect(Math.abs(tempOfEmf(type, total) - out['temperature_C_exact']!)).toBeLessThan(1e-5)
        seen++
      }
    }
    expect(seen).toBeGreaterThan(100)
  })
  it('Pt100: resistance to 1e-6 Ω, temperature to 1e-5 K', () => {
    for (const { in: i, out } of cases('pt100')) {
      if (i['temperature_C'] !== undefined)
        expect(Math.abs(pt100Ohm(i['temperature_C'] as number) - out['resistance_ohm']!)).toBeLessThan(1e-6)
      else expect(Math.abs(tempOfPt100(i['resistance_ohm'] as number) - out['temperature_C']!)).toBeLessThan(1e-5)
    }
  })
  it('tolerances: exact', () => {
    for (const { in: i, out } of cases('sensor_tolerance')) {
      const t = i['temperature_C'] as number
      const s = i['sensor'] as string
      if (s.startsWith('Pt')) expect(pt100Tolerance(s.slice(2) as 'A' | 'B', t)).toBeCloseTo(out['tolerance']!, 12)
      else
        for (const c of [1, 2, 3] as const) {
          const want = out[`class${c}`] ?? null
          const got = thermocoupleTolerance(s as 'K' | 'T', c, t)
          if (want === null) expect(got).toBeNull()
          else expect(got).toBeCloseTo(want, 12)
        }
    }
  })
})
