import { describe, expect, it } from 'vitest'
import { fitOnset } from '../../../server/core/growth/onset.ts'
import type { GrowthPoint, Noise } from '../../../server/core/growth/points.ts'
import { normal, simulateGrowth, uniform } from './simulated-growth.ts'

const quiet: Noise = { wanderSd: 0.002, wanderTauS: 2400, whiteSd: 0.002, stepS: 30 }
const ramp = (n: number, from: number, slope: number, stepMs: number, sd: number, seed = 1): GrowthPoint[] => {
  const u = uniform(seed)
  return Array.from({ length: n }, (_, i) => ({ tMs: i * stepMs, lnRatio: Math.max(0, i - from) * slope + sd * normal(u) }))
}

describe('fitOnset', () => {
  // STA-07
  it('dates a noiseless ramp from step 100 of 140 to within one step', () => {
    const onset = fitOnset(ramp(140, 100, 0.002, 30_000, 0), quiet, 0)!
    expect(Math.abs(onset.atMs - 100 * 30_000)).toBeLessThan(30_000)
    expect(onset.lowMs).toBeLessThan(100 * 30_000)
    expect(onset.highMs).toBeGreaterThan(100 * 30_000)
    expect(onset.level).toBe(0.9)
  })

  it('does not depend on where the clock starts, nor on its unit', () => {
    const points = ramp(160, 110, 0.001, 30_000, 0.002, 5)
    const here = fitOnset(points, quiet, 0)!
    const shift = 1_900_000_000_000
    const there = fitOnset(
      points.map((p) => ({ ...p, tMs: p.tMs + shift })),
      quiet,
      shift,
    )!
    expect(Math.abs(there.atMs - shift - here.atMs)).toBeLessThan(50)
    const tenth = fitOnset(
      points.map((p) => ({ ...p, tMs: p.tMs / 10 })),
      { ...quiet, wanderTauS: 240, stepS: 3 },
      0,
    )!
    expect(Math.abs(10 * tenth.atMs - here.atMs)).toBeLessThan(50)
    expect(Math.abs(10 * tenth.highMs - here.highMs)).toBeLessThan(50)
  })

  it('is wider by half when the white noise is four times as large, and ragged growth is the rest', () => {
    const span = (whiteSd: number) => {
      const o = fitOnset(ramp(160, 110, 0.001, 30_000, 0.001, 5), { ...quiet, wanderSd: 0, whiteSd }, 0)!
      return o.highMs - o.lowMs
    }
    expect(span(0.008)).toBeGreaterThan(1.5 * span(0.002))
  })

  it('never dates before the search may begin', () => {
    const onset = fitOnset(ramp(140, 20, 0.002, 30_000, 0.001, 3), quiet, 60 * 30_000)!
    expect(onset.lowMs).toBeGreaterThanOrEqual(60 * 30_000)
  })

  it('keeps to the first growth when a slough-off of 10 % follows', () => {
    const points = ramp(200, 100, 0.002, 30_000, 0.001, 4).map((p, i) => (i >= 170 ? { ...p, lnRatio: p.lnRatio - 0.1 } : p))
    const onset = fitOnset(points, quiet, 0)!
    expect(Math.abs(onset.atMs - 100 * 30_000)).toBeLessThan(3 * 30_000)
  })

  it('one step caught half way through a flow change, 3.5 % off, an hour before the growth does not draw the onset to it', () => {
    const points = ramp(260, 220, 0.0008, 30_000, 0.0014, 8).map((p, i) => (i === 100 ? { ...p, lnRatio: p.lnRatio - 0.035 } : p))
    const onset = fitOnset(points, quiet, 0)!
    expect(Math.abs(onset.atMs - 220 * 30_000)).toBeLessThan(8 * 30_000)
    expect(onset.lowMs).toBeGreaterThan(180 * 30_000)
  })

  // USR-07
  it('holds a gap without bridging it: growth that began in a gap of half an hour is dated into the gap', () => {
    const points = ramp(200, 120, 0.001, 30_000, 0.0015, 6).filter((_, i) => i < 100 || i >= 160)
    const onset = fitOnset(points, quiet, 0)!
    expect(onset.lowMs).toBeLessThanOrEqual(120 * 30_000)
    expect(onset.highMs).toBeGreaterThanOrEqual(120 * 30_000)
  })

  it('gives null for fewer than four points, for no time to search, and for a steady fall', () => {
    expect(fitOnset(ramp(3, 0, 0.01, 30_000, 0), quiet, 0)).toBeNull()
    expect(fitOnset(ramp(50, 20, 0.01, 30_000, 0), quiet, 50 * 30_000)).toBeNull()
    expect(
      fitOnset(
        ramp(80, 20, 0.001, 30_000, 0).map((p) => ({ ...p, lnRatio: -p.lnRatio })),
        quiet,
        0,
      ),
    ).toBeNull()
  })

  it('leaves out non-finite points and gives the same answer twice', () => {
    const points = ramp(140, 100, 0.002, 30_000, 0.002, 7)
    const spoilt = [...points.slice(0, 50), { tMs: points[50]!.tMs - 1, lnRatio: Number.NaN }, ...points.slice(50)]
    expect(fitOnset(spoilt, quiet, 0)).toEqual(fitOnset(points, quiet, 0))
  })

  it('handles three-second steps over minutes and weeks of 30-s steps alike', () => {
    const fast = simulateGrowth(11, { hours: 0.05, cleanHours: 0.05, stepS: 3, law: 'linear', fraction: 1, limitRatio: 2 })
    const slow = simulateGrowth(12, { hours: 250, cleanHours: 120, law: 'linear', fraction: 1, limitRatio: 2 })
    for (const g of [fast, slow]) {
      const onset = fitOnset(g.points, g.noise, 0)!
      expect(Math.abs(onset.atMs - g.onsetMs) / (g.limitMs - g.onsetMs)).toBeLessThan(0.05)
      expect(onset.lowMs).toBeLessThan(g.onsetMs)
      expect(onset.highMs).toBeGreaterThan(g.onsetMs)
    }
  })
})
