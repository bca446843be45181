import { existsSync, readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { brokenStick } from '../../../server/core/stats/broken-stick.ts'
import { normal, uniform } from '../growth/simulated-growth.ts'

describe('brokenStick', () => {
  it('finds the bend of an exact line, between two readings and on one', () => {
    for (const c of [7, 7.3]) {
      const x = Array.from({ length: 20 }, (_, i) => i)
      const fit = brokenStick(
        x,
        x.map((v) => 1 + 0.2 * v + 3 * Math.max(0, v - c)),
        0.95,
      )!
      expect(fit.at).toBeCloseTo(c, 6)
      expect(fit.slopeBefore).toBeCloseTo(0.2, 6)
      expect(fit.slopeAfter).toBeCloseTo(3.2, 6)
    }
  })

  it('a 90 % profile interval covers the bend in 86 to 94 % of 400 noisy lines', () => {
    const u = uniform(31)
    const x = Array.from({ length: 50 }, (_, i) => i)
    let held = 0
    for (let run = 0; run < 400; run++) {
      const c = 15 + 20 * u()
      const fit = brokenStick(
        x,
        x.map((v) => 0.4 * Math.max(0, v - c) + normal(u)),
        0.9,
      )!
      if (fit.low <= c && c <= fit.high) held++
    }
    expect(held / 400).toBeGreaterThan(0.86)
    expect(held / 400).toBeLessThan(0.94)
  })

  it('gives null for fewer than six readings or one x', () => {
    expect(brokenStick([1, 2, 3], [1, 2, 3], 0.9)).toBeNull()
    expect(brokenStick([1, 1, 1, 1, 1, 1], [1, 2, 3, 4, 5, 6], 0.9)).toBeNull()
  })

  const file = '../shared/reference/04_broken_stick.json'
  describe.runIf(existsSync(file))('against an exact global search and R segmented, the series of the shared reference', () => {
    it('bend within 1e-3 of the range, residuals 1e-8, slopes 1e-3, profile interval 2e-3 of the range', () => {
      const { cases } = JSON.parse(readFileSync(file, 'utf8')) as {
        cases: {
          in: { x: number[]; y: number[]; level: number }
          out: {
            global_ls_breakpoint: number
            global_ls_rss: number
            global_ls_slope1: number
            global_ls_slope2: number
            profile_ci95: [number, number]
          }
        }[]
      }
      expect(cases.length).toBeGreaterThan(8)
      for (const { in: data, out } of cases) {
        const fit = brokenStick(data.x, data.y, data.level)!
        const range = data.x[data.x.length - 1]! - data.x[0]!
        const slope = Math.max(Math.abs(out.global_ls_slope1), Math.abs(out.global_ls_slope2))
        expect(Math.abs(fit.at - out.global_ls_breakpoint)).toBeLessThan(1e-3 * range)
        expect(Math.abs(fit.rss / out.global_ls_rss - 1)).toBeLessThan(1e-8)
        expect(Math.abs(fit.slopeBefore - out.global_ls_slope1)).toBeLessThan(1e-3 * slope)
        expect(Math.abs(fit.slopeAfter - out.global_ls_slope2)).toBeLessThan(1e-3 * slope)
        expect(Math.abs(fit.low - out.profile_ci95[0])).toBeLessThan(2e-3 * range)
        expect(Math.abs(fit.high - out.profile_ci95[1])).toBeLessThan(2e-3 * range)
      }
    })
  })
})
