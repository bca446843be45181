import { existsSync, readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { madSd, median, memoryInflation, theilSen } from '../../../server/core/stats/robust.ts'
import { normal, uniform } from '../growth/simulated-growth.ts'

describe('median and spread', () => {
  it('the median of 1, 9, 2 is 2 and of 1, 2, 9, 4 is 3; the spread of 1, 1, 2, 2, 4, 6, 9 is 1.4826 (median deviation 1)', () => {
    expect(median([1, 9, 2])).toBe(2)
    expect(median([1, 2, 9, 4])).toBe(3)
    expect(madSd([1, 1, 2, 2, 4, 6, 9])).toBeCloseTo(1.4826, 12)
  })
})

describe('Theil–Sen', () => {
  // Data and slope of the example in P. K. Sen, J. Am. Stat. Assoc. 63 (1968) 1379 (from memory).
  it('the example of Sen 1968 has slope 4', () => {
    const x = [1, 2, 3, 4, 10, 12, 18]
    const y = [9, 15, 19, 20, 45, 55, 78]
    const fit = theilSen(x, y, 0.93)!
    expect(fit.slope).toBeCloseTo(4, 12)
    expect(fit.low).toBeLessThan(4)
    expect(fit.high).toBeGreaterThan(4)
  })

  it('is exact on a line, follows scale and shift, and is unmoved by one wild value in four', () => {
    fc.assert(
      fc.property(fc.double({ min: -5, max: 5, noNaN: true }), fc.double({ min: -100, max: 100, noNaN: true }), (slope, level) => {
        const x = Array.from({ length: 21 }, (_, i) => i)
        const y = x.map((v) => level + slope * v)
        expect(theilSen(x, y, 0.95)!.slope).toBeCloseTo(slope, 9)
        const wild = y.map((v, i) => (i % 4 === 2 ? v + 1e6 : v))
        expect(Math.abs(theilSen(x, wild, 0.95)!.slope - slope)).toBeLessThan(1e-6)
      }),
    )
  })

  it('a 95 % interval covers the slope in 93 to 97 % of 2000 series of 20 independent readings', () => {
    const u = uniform(77)
    let held = 0
    const x = Array.from({ length: 20 }, (_, i) => i)
    for (let run = 0; run < 2000; run++) {
      const fit = theilSen(
        x,
        x.map((v) => 0.3 * v + normal(u)),
        0.95,
      )!
      if (fit.low <= 0.3 && 0.3 <= fit.high) held++
    }
    expect(held / 2000).toBeGreaterThan(0.93)
    expect(held / 2000).toBeLessThan(0.97)
  })

  it('gives null when all x are the same', () => {
    expect(theilSen([1, 1, 1], [1, 2, 3], 0.9)).toBeNull()
  })

  it('readings of correlation 0.6 widen the variance about (1 + 0.6)/(1 − 0.6) = 4-fold, independent ones hardly', () => {
    const u = uniform(5)
    const series = (phi: number) => {
      let r = normal(u)
      return Array.from({ length: 400 }, () => (r = phi * r + Math.sqrt(1 - phi * phi) * normal(u)))
    }
    expect(memoryInflation(series(0.6))).toBeGreaterThan(3)
    expect(memoryInflation(series(0.6))).toBeLessThan(5.5)
    expect(memoryInflation(series(0))).toBeLessThan(1.25)
    expect(memoryInflation([3, 3, 3])).toBe(1)
  })

  const file = '../shared/reference/05_robust.json'
  describe.runIf(existsSync(file))('against scipy 1.10.1, the series of the shared reference with outliers and ties', () => {
    it('median, spread, slope, intercept and 95 % interval within 1e-6 of the scale', () => {
      const { cases } = JSON.parse(readFileSync(file, 'utf8')) as {
        cases: { in: { x: number[]; y: number[] }; out: Record<string, number> & { theil_sen_ci95: [number, number] } }[]
      }
      expect(cases.length).toBeGreaterThan(4)
      for (const { in: data, out } of cases) {
        const fit = theilSen(data.x, data.y, 0.95)!
        expect(median(data.y)).toBeCloseTo(out['median']!, 9)
        expect(madSd(data.y)).toBeCloseTo(out['mad_times_1.4826']!, 9)
        expect(fit.slope).toBeCloseTo(out['theil_sen_slope']!, 9)
        expect(fit.intercept).toBeCloseTo(out['theil_sen_intercept_separate']!, 8)
        expect(fit.low).toBeCloseTo(out.theil_sen_ci95[0], 9)
        expect(fit.high).toBeCloseTo(out.theil_sen_ci95[1], 9)
      }
    })
  })
})
