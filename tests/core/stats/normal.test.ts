import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { normalCdf, normalQuantile } from '../../../server/core/stats/normal.ts'

const table = JSON.parse(readFileSync('fixtures/statistics/normal.json', 'utf8')) as {
  cdf: { x: number; p: number }[]
  quantile: { p: number; x: number }[]
}

describe('standard normal distribution', () => {
  it.each(table.cdf)('P($x) = $p (Abramowitz and Stegun 26.1)', ({ x, p }) => {
    expect(normalCdf(x)).toBeCloseTo(p, 14)
    expect(normalCdf(-x)).toBeCloseTo(1 - p, 14)
  })

  // Q(5), Q(10) of Abramowitz and Stegun table 26.2: −log10 Q = 6.54265, 23.11805.
  it('far tails: −log10 of Φ(−5) is 6.54265, of Φ(−10) 23.11805', () => {
    expect(-Math.log10(normalCdf(-5))).toBeCloseTo(6.54265, 5)
    expect(-Math.log10(normalCdf(-10))).toBeCloseTo(23.11805, 5)
    expect(normalCdf(-50)).toBe(0)
  })

  it.each(table.quantile)('the quantile of $p is $x', ({ p, x }) => {
    expect(normalQuantile(p)).toBeCloseTo(x, 12)
    expect(normalQuantile(1 - p)).toBeCloseTo(-x, 12)
  })

  it('quantile and distribution are inverse of each other and odd about one half', () => {
    fc.assert(
      fc.property(fc.double({ min: 1e-12, max: 0.5, noNaN: true }), (p) => {
        expect(Math.abs(normalCdf(normalQuantile(p)) / p - 1)).toBeLessThan(1e-10)
      }),
    )
    expect(normalQuantile(0)).toBe(-Infinity)
    expect(normalQuantile(1)).toBe(Infinity)
    expect(normalQuantile(2)).toBeNaN()
  })
})
