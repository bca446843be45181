import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { filmOfRatio, growthShape, ratioOfFilm } from '../../../server/core/growth/law.ts'

describe('thickness law', () => {
  // Hagen–Poiseuille: bore lost 5, 10, 20, 30 % gives (1 − loss)^−4 (common practice, printed as 1.23, 1.52, 2.44, 4.16).
  it.each([
    [0.05, 1.23],
    [0.1, 1.52],
    [0.2, 2.44],
    [0.3, 4.16],
  ])('a film of %f of the radius all along gives a ratio of %f', (film, ratio) => {
    expect(ratioOfFilm(film, 1)).toBeCloseTo(ratio, 2)
  })

  // Resistances in series: 1 % of the length at half the bore 1.15, at 0.3 of the bore 2.2 (common practice).
  it('a constriction over 1 % of the length gives 1.15 at half the bore and 2.2 at 0.3 of it', () => {
    expect(ratioOfFilm(0.5, 0.01)).toBeCloseTo(1.15, 2)
    expect(ratioOfFilm(0.7, 0.01)).toBeCloseTo(2.22, 2)
  })

  it('film and ratio are inverse of each other', () => {
    fc.assert(
      fc.property(fc.double({ min: 0, max: 0.8, noNaN: true }), fc.double({ min: 0.05, max: 1, noNaN: true }), (film, fraction) => {
        expect(filmOfRatio(ratioOfFilm(film, fraction), fraction)).toBeCloseTo(film, 9)
      }),
    )
  })

  it('every growth shape runs from 0 at the onset to 1 at the limit and rises', () => {
    fc.assert(
      fc.property(fc.double({ min: -3, max: 4, noNaN: true }), fc.double({ min: 0, max: 0.99, noNaN: true }), (k, s) => {
        expect(growthShape(k, 0)).toBe(0)
        expect(growthShape(k, 1)).toBeCloseTo(1, 12)
        expect(growthShape(k, s + 0.01)).toBeGreaterThan(growthShape(k, s))
      }),
    )
  })
})
