import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { depositReadings, pluggedRatio } from '../../../server/core/deposit/readings.ts'
import {
  constrictionOfRatio,
  constrictionRatio,
  narrowed,
  ratioOfConstriction,
  ratioOfThickness,
  thicknessOfRatio,
} from '../../../server/core/deposit/thickness.ts'
import { type ChannelGeometry, roundArea } from '../../../server/core/hydraulics/channel.ts'

const fixture = JSON.parse(readFileSync(new URL('../../../fixtures/physics/lithium.json', import.meta.url), 'utf8'))
const tube = (over: Partial<ChannelGeometry> = {}): ChannelGeometry => {
  const diameterM = over.diameterM ?? 0.002
  return {
    diameterM,
    lengthM: 5,
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
const slow = { massFlowKgS: 2e-4, rhoKgM3: 889, viscPaS: 8e-4 }
const fast = { massFlowKgS: 0.05, rhoKgM3: 889, viscPaS: 8e-4 }

describe('a uniform deposit at constant flow', () => {
  it.each(fixture.ratioOfDiameterLoss.rows as [number, number][])(
    'that takes %d of the diameter makes the laminar ratio %d',
    (loss, ratio) => {
      expect(ratioOfThickness(tube(), slow, (loss * 0.002) / 2)).toBeCloseTo(ratio, 2)
    },
  )

  it('none makes a ratio of exactly 1, and a ratio of 1 or below no deposit', () => {
    expect(ratioOfThickness(tube(), slow, 0)).toBe(1)
    for (const r of [1, 0.9, 0]) expect(thicknessOfRatio(tube(), slow, r)).toBe(0)
  })

  it('is found again from its ratio to 1e-9, laminar, coiled, turbulent, with bends and in branches', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.001, max: 0.85, noNaN: true }),
        fc.double({ min: Math.log(1e-5), max: Math.log(0.1), noNaN: true }),
        fc.constantFrom(null, 0.08),
        fc.constantFrom(0, 10),
        fc.constantFrom(1, 3),
        (share, lnM, coilDiameterM, bends, parallel) => {
          const c = tube({ coilDiameterM, bends, parallel, roughnessM: 1e-6 })
          const at = { ...slow, massFlowKgS: Math.exp(lnM) }
          const back = thicknessOfRatio(c, at, ratioOfThickness(c, at, share * 0.001))
          expect(Math.abs(back / (share * 0.001) - 1)).toBeLessThan(1e-9)
        },
      ),
    )
  })

  it('grows the ratio without a step while the flow in the narrowing bore goes from laminar to turbulent', () => {
    const at = { ...slow, massFlowKgS: 0.0018 }
    let before = 1
    for (let share = 0.001; share < 0.8; share += 0.001) {
      const r = ratioOfThickness(tube(), at, share * 0.001)
      expect(r).toBeGreaterThan(before)
      expect(r / before).toBeLessThan(1.05)
      before = r
    }
  })

  // FOU-05
  it('has exponent 4 laminar, 4.75 within 0.06 smooth turbulent, 4 to 4.3 in a laminar coil', () => {
    const exponent = (c: ChannelGeometry, at: typeof slow) => Math.log(ratioOfThickness(c, at, 1e-6)) / -Math.log(1 - 1e-3)
    expect(exponent(tube(), slow)).toBeCloseTo(4, 6)
    expect(Math.abs(exponent(tube(), fast) - 4.75)).toBeLessThan(0.06)
    const coil = exponent(tube({ coilDiameterM: 0.08 }), { ...slow, massFlowKgS: 1.2e-3 })
    expect(coil).toBeGreaterThan(4)
    expect(coil).toBeLessThan(4.3)
  })

  it('that leaves no bore, is negative, or meets no flow is HYDRAULICS_RANGE; the largest answer leaves 2 % of the bore', () => {
    expect(() => ratioOfThickness(tube(), slow, 0.001)).toThrow(/does not leave a bore/)
    expect(() => ratioOfThickness(tube(), slow, -1e-6)).toThrow(/does not leave a bore/)
    expect(() => thicknessOfRatio(tube(), { ...slow, massFlowKgS: 0 }, 2)).toThrow(/without flow/)
    expect(thicknessOfRatio(tube(), slow, 1e12)).toBeCloseTo(0.00098, 10)
    expect(narrowed(tube(), 0.0005).areaM2).toBeCloseTo(roundArea(0.001), 15)
  })
})

describe('a local constriction', () => {
  // FOU-05
  it('over 1 % of the length at half the bore makes 1.15, at 0.3 of the bore 2.2 (closed form, laminar)', () => {
    expect(constrictionRatio(0.01, 0.5, 4)).toBeCloseTo(1.15, 3)
    expect(constrictionRatio(0.01, 0.3, 4)).toBeCloseTo(2.22, 2)
    expect(constrictionRatio(0.3, 1, 4)).toBe(1)
  })

  it('over the whole length is the uniform deposit; in full, creeping flow, it is the closed form within 0.1 %, and it is found again to 1e-9', () => {
    const creeping = { ...slow, massFlowKgS: 1e-6 }
    expect(Math.abs(ratioOfConstriction(tube(), creeping, 1, 0.6) / ratioOfThickness(tube(), creeping, 0.0004) - 1)).toBeLessThan(
      1e-3,
    )
    expect(Math.abs(ratioOfConstriction(tube(), creeping, 0.01, 0.4) / constrictionRatio(0.01, 0.4, 4) - 1)).toBeLessThan(1e-3)
    for (const r of [1.05, 1.5, 4])
      expect(ratioOfConstriction(tube(), slow, 0.02, constrictionOfRatio(tube(), slow, 0.02, r))).toBeCloseTo(r, 9)
    expect(constrictionOfRatio(tube(), slow, 0.1, 0.99)).toBe(1)
  })

  it("costs more than the closed form where the throat's ends count", () => {
    expect(ratioOfConstriction(tube(), { ...slow, massFlowKgS: 2e-3 }, 0.01, 0.4)).toBeGreaterThan(
      constrictionRatio(0.01, 0.4, 4) * 1.05,
    )
  })
})

describe('plugged branches', () => {
  it('one of two doubles the laminar resistance, one of three makes 1.5; turbulent one of two 2^1.78 within 3 %; none makes 1', () => {
    expect(pluggedRatio(tube({ parallel: 2 }), slow, 1)).toBeCloseTo(2, 10)
    expect(pluggedRatio(tube({ parallel: 3 }), slow, 1)).toBeCloseTo(1.5, 10)
    expect(Math.abs(pluggedRatio(tube({ parallel: 2 }), fast, 1) / 2 ** 1.78 - 1)).toBeLessThan(0.03)
    expect(pluggedRatio(tube({ parallel: 2 }), slow, 0)).toBe(1)
    expect(() => pluggedRatio(tube({ parallel: 2 }), slow, 2)).toThrow(/cannot be plugged/)
  })
})

describe('what a ratio may mean', () => {
  it('of 2 in two branches: a film of 16 % of the radius, narrow places, or one branch plugged, which no ratio tells apart', () => {
    const { readings, cannotTell, couldTell } = depositReadings(tube({ parallel: 2 }), slow, { value: 2, low: 1.95, high: 2.05 })
    expect(readings.map((r) => r.kind)).toEqual(['uniform', 'local', 'local', 'plugged-branch'])
    expect(readings[0]!.thicknessM! / 0.001).toBeCloseTo(1 - 2 ** -0.25, 6)
    expect(readings[0]!.volumeLost).toBeCloseTo(1 - Math.SQRT1_2, 6)
    expect(readings[2]!.boreRatio).toBeLessThan(readings[1]!.boreRatio)
    expect(readings[2]!.depositM3!).toBeLessThan(readings[0]!.depositM3! / 20)
    expect(readings[3]!.volumeLost).toBe(0.5)
    expect(cannotTell.join(' ')).toMatch(/not displaced by a flush/)
    expect(couldTell.join(' ')).toMatch(/residence-time/)
  })

  it('of 1.3 in two branches is no plugged branch, and in one channel nothing is said of branches', () => {
    expect(
      depositReadings(tube({ parallel: 2 }), slow, { value: 1.3, low: 1.2, high: 1.4 }).readings.some(
        (r) => r.kind === 'plugged-branch',
      ),
    ).toBe(false)
    expect(depositReadings(tube(), slow, { value: 2, low: 1.9, high: 2.1 }).cannotTell.join(' ')).not.toMatch(/branch/)
  })
})
