import { describe, expect, it } from 'vitest'
import { createFeedRatio, type FeedPair, type FeedRatioVerdict } from '../../../server/core/exotherm/feed-ratio.ts'
import { gauss, random } from './world.ts'

interface Course {
  readonly hours?: number
  readonly scanS?: number
  readonly seed?: number
  /** Factors on feed 0 and feed 1. */
  readonly a?: (tS: number) => number
  readonly b?: (tS: number) => number
  readonly noise?: number
  readonly armedS?: number
  readonly pair?: Partial<FeedPair>
  readonly missing?: (tS: number) => boolean
}
function course({
  hours = 1,
  scanS = 1,
  seed = 1,
  a = () => 1,
  b = () => 1,
  noise = 0.006,
  armedS = 300,
  pair = {},
  missing = () => false,
}: Course) {
  const u = random(seed)
  const ratio = createFeedRatio({ of: ['B', 'A'], scanS, molPerKg: null, limits: null, ...pair })
  const out: { tS: number; v: FeedRatioVerdict }[] = []
  for (let tS = 0; tS < hours * 3600; tS += scanS) {
    const flows: [number | null, number | null] = missing(tS)
      ? [null, null]
      : [0.0008 * a(tS) * (1 + noise * gauss(u)), 0.002 * b(tS) * (1 + noise * gauss(u))]
    out.push({ tS, v: ratio.scan({ tMs: tS * 1000, flowsKgS: flows, production: true, armed: tS >= armedS }) })
  }
  return { first: out.find(({ v }) => v.over === true) ?? null, out, state: ratio.state }
}
const step = (atS: number, to: number, lagS: number) => (tS: number) =>
  tS < atS ? 1 : 1 + (to - 1) * (1 - Math.exp(-(tS - atS) / lagS))

describe('feed ratio against its usual value', () => {
  // EXO-07
  it('finds a pump 10 % fast, or 10 % slow, within 25 s and says which side and which feed moved', () => {
    for (const [to, side] of [
      [1.1, 'high'],
      [0.9, 'low'],
    ] as const) {
      const { first } = course({ a: step(2000, to, 6) })
      expect(first!.tS - 2000).toBeGreaterThanOrEqual(9)
      expect(first!.tS - 2000).toBeLessThanOrEqual(25)
      expect(first!.v).toMatchObject({ side, moved: 0, detector: 'chart' })
      expect(Math.abs(first!.v.relative! - to)).toBeLessThan(0.03)
    }
  })
  it('a step of both feeds by 20 % whose pumps take 4 and 12 s overshoots by up to 8 % and raises nothing', () => {
    const { first, out } = course({ a: step(2000, 1.2, 4), b: step(2000, 1.2, 12) })
    expect(Math.max(...out.map(({ v }) => v.relative ?? 1))).toBeGreaterThan(1.055)
    expect(first).toBe(null)
  })
  it('clean running for 20 h with 1 % noise raises nothing', () => {
    for (const seed of [1, 2, 3, 4]) expect(course({ hours: 5, seed, noise: 0.01 }).first).toBe(null)
  })
  it('the limit grows with the noise from 5.5 % to no more than 8.5 %', () => {
    expect(course({ noise: 0.004 }).out.at(-1)!.v.allowed).toBe(0.055)
    expect(course({ noise: 0.05, armedS: 1e9 }).out.at(-1)!.v.allowed).toBe(0.085)
  })
  it('a ratio kept for 15 min is the new usual one', () => {
    const { out } = course({ a: step(1000, 1.12, 6) })
    const over = out.filter(({ v }) => v.over === true).map(({ tS }) => tS)
    expect(over.at(-1)! - over[0]!).toBeGreaterThan(860)
    expect(over.at(-1)! - over[0]!).toBeLessThan(900)
    expect(Math.abs(out.at(-1)!.v.relative! - 1)).toBeLessThan(0.02)
  })
  it('says nothing while a flow is missing or before it is armed, and does not count a gap as being off', () => {
    const { first, out } = course({ a: step(2000, 1.1, 1), missing: (t) => t >= 2004 && t < 2200 })
    expect(out[2100]!.v).toMatchObject({ over: null, relative: null })
    expect(first!.tS).toBeGreaterThan(2200)
    expect(course({ a: step(200, 1.2, 1), armedS: 1e9 }).first).toBe(null)
  })
  it('at a scan of 10 s still needs two scans', () => {
    const { first } = course({ scanS: 10, a: (t) => (t === 2000 ? 1.3 : 1) })
    expect(first).toBe(null)
    expect(course({ scanS: 10, a: (t) => (t >= 2000 ? 1.3 : 1) }).first!.tS).toBe(2010)
  })
})

describe('feed ratio in mol/mol', () => {
  // 2.3 mol/L at 705 kg/m³ over 1.0 mol/L at 905 kg/m³; 0.8 g/s over 2.0 g/s: (0.8 · 2.3/0.705) / (2.0 · 1.0/0.905) = 2.610/2.210 = 1.181 by hand.
  const pair = { molPerKg: [2.3 / 0.705, 1 / 0.905] as const, limits: { low: 1.05, high: 1.25 } }
  // EXO-07
  it('0.8 g/s at 2.3 mol/L and 705 kg/m³ over 2.0 g/s at 1.0 mol/L and 905 kg/m³ is 1.181', () => {
    expect(Math.abs(course({ noise: 0, pair }).out.at(-1)!.v.molMol! - 1.181)).toBeLessThan(5e-4)
  })
  it('speaks by the limits of the skid file on either side, although the chart alone would not (7 % with noise allows 8.5 %)', () => {
    const high = course({ a: (t) => (t < 2000 ? 1 : 1.07), noise: 0.02, pair }).first!
    expect(high.v).toMatchObject({ detector: 'limit', side: 'high' })
    const low = course({ a: (t) => (t < 2000 ? 1 : 0.8), pair }).first!
    expect(low.v).toMatchObject({ detector: 'limit', side: 'low' })
    expect(low.tS - 2000).toBeLessThanOrEqual(12)
  })
  it('a ratio kept beyond a limit is never accepted as usual', () => {
    const { out } = course({ hours: 1.5, a: (t) => (t < 1000 ? 1 : 1.2), pair })
    expect(out.at(-1)!.v.over).toBe(true)
  })
})

describe('a ratio that rides on its limit of 0.95 mol/mol', () => {
  it('for two hours is one alarm, not one at every crossing; 4 % inside the limit it clears', () => {
    // b0/b1 so that the usual ratio of flows, 0.4, is 1.05 mol/mol.
    const pair = { molPerKg: [2.625, 1] as const, limits: { low: 0.95, high: 1.15 } }
    const slip = (tS: number) => (tS < 2000 ? 1 : tS < 9000 ? Math.max(0.905, 1 - (tS - 2000) / 12_000) : 0.94)
    let standing = false
    let alarms = 0
    for (const { v } of course({ hours: 3, a: slip, pair }).out) {
      if (v.over === true && !standing) alarms++
      standing = v.over === true || (standing && !v.under)
    }
    expect(alarms).toBe(1)
    expect(standing).toBe(false)
  })
})
