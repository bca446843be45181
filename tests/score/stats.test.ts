import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { binomialCdf, poissonCdf, poissonInterval, quantile, wilson } from '../../server/score/stats.ts'

describe('statistics of the score', () => {
  it.each([
    [81, 263, 0.2553, 0.3662],
    [15, 148, 0.0624, 0.1605],
    [0, 20, 0, 0.1611],
    [1, 29, 0.0061, 0.1718],
  ])(
    'gives the Wilson interval of %i in %i as R. G. Newcombe prints it (Stat. Med. 17 (1998) 857, table I, method 3)',
    (hits, n, low, high) => {
      expect(wilson(hits, n)!.low).toBeCloseTo(low, 4)
      expect(wilson(hits, n)!.high).toBeCloseTo(high, 4)
    },
  )

  it.each([
    [0, 0, 3.689],
    [1, 0.0253, 5.572],
    [5, 1.623, 11.668],
    [10, 4.795, 18.39],
  ])('gives the exact Poisson interval of a count of %i as tables after Garwood print it (from memory)', (count, low, high) => {
    expect(poissonInterval(count).low).toBeCloseTo(low, 3)
    expect(poissonInterval(count).high).toBeCloseTo(high, 3)
  })

  it('interpolates quantiles as definition 7 does: 1.75 for the first quartile of 1, 2, 3, 4', () => {
    expect(quantile([4, 2, 1, 3], 0.25)).toBe(1.75)
    expect(quantile([], 0.5)).toBeNull()
  })

  it('sums a Poisson tail of mean 800, whose terms underflow one by one, to a half within 2 %', () => {
    expect(poissonCdf(800, 800)).toBeCloseTo(0.5094, 3)
  })

  it('agrees with the binomial theorem: P(N ≤ 1) of 3 at p = 0.5 is 1/2; all n tails rise with hits', () => {
    expect(binomialCdf(1, 3, 0.5)).toBeCloseTo(0.5, 12)
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 200 }), fc.double({ min: 0.01, max: 0.99, noNaN: true }), (n, p) => {
        const tails = Array.from({ length: n + 1 }, (_, i) => binomialCdf(i, n, p))
        expect(tails.every((t, i) => i === 0 || t >= tails[i - 1]! - 1e-12)).toBe(true)
        expect(tails[n]).toBe(1)
      }),
      { numRuns: 30 },
    )
  })
})
