import fc from 'fast-check'
import { linearRegression, medianAbsoluteDeviation } from 'simple-statistics'
import { describe, expect, it } from 'vitest'
import {
  chooseLag,
  coolantBlock,
  coolantScan,
  freshCoolant,
  lagBlocks,
  lagsS,
  weighLags,
} from '../../../server/core/exotherm/coolant.ts'
import { explained, freshLevel, learn } from '../../../server/core/exotherm/level.ts'
import { ago, forget, lineOf, meanOf, push, ring } from '../../../server/core/exotherm/ring.ts'
import { freshSeries, pace, remember, spread } from '../../../server/core/exotherm/series.ts'
import { gauss, random } from './world.ts'

describe('ring', () => {
  it('gives back the last values, holes as null, and null past its length', () => {
    const r = ring(3)
    for (const x of [1, 2, null, 4]) push(r, x)
    expect([0, 1, 2, 3].map((n) => ago(r, n))).toEqual([4, null, 2, null])
    expect(meanOf(r, 3)).toBe(3)
    forget(r)
    expect(meanOf(r, 3)).toBe(null)
  })
  // EXO-03
  it('line through 1, 3, 2, 5, 4 at 1 s has slope 0.8 /s and standard error √0.12 = 0.346 /s (by hand), and half of both at 2 s', () => {
    const r = ring(5)
    for (const x of [1, 3, 2, 5, 4]) push(r, x)
    const line = lineOf(r, 5, 1)!
    expect(line.slopePerS).toBeCloseTo(0.8, 12)
    expect(line.seS).toBeCloseTo(Math.sqrt(0.12), 12)
    expect(lineOf(r, 5, 2)!.slopePerS).toBeCloseTo(0.4, 12)
    expect(lineOf(r, 3, 1)).toBe(null)
  })
  it('line with holes agrees with simple-statistics on the values that are there', () => {
    const u = random(4)
    const r = ring(12)
    const points: [number, number][] = []
    for (let t = 0; t < 12; t++) {
      const x = t % 5 === 2 ? null : -25 + 0.3 * t + u()
      push(r, x)
      if (x !== null) points.push([t, x])
    }
    expect(lineOf(r, 12, 1)!.slopePerS).toBeCloseTo(linearRegression(points).m, 10)
  })
})

describe('level of one thermocouple', () => {
  it('starts with the gain of the reaction heat known to within the offset: a feed 10 % higher is explained to 0.07 K + 1 % before any step was seen', () => {
    const l = freshLevel()
    for (let i = 0; i < 40; i++) learn(l, 7 + 0.4, 1, 0, 30, i < 10)
    expect(explained(l, 1, 0)).toBeCloseTo(7.4, 2)
    expect(Math.abs(explained(l, 1.1, 0) - (7 * 1.1 + 0.4))).toBeLessThan(0.07)
  })
  it('learns offset 0.6 K and gain 5 K from flow steps of 20 %', () => {
    const u = random(2)
    const l = freshLevel()
    for (let i = 0; i < 400; i++) {
      const h = i % 80 < 40 ? 1 : 1.2
      learn(l, 5 * h + 0.6 + 0.03 * gauss(u), h, 0, 30, i < 10)
    }
    expect(Math.abs(l.o - 0.6)).toBeLessThan(0.15)
    expect(Math.abs(l.c - 5.6)).toBeLessThan(0.1)
    expect(Math.sqrt(l.poo)).toBeLessThan(0.3)
  })
  it('an excursion of 3 K for 3 min moves it by less than 0.05 K; a lasting 0.3 K is learnt to nine tenths in half an hour', () => {
    const l = freshLevel()
    for (let i = 0; i < 60; i++) learn(l, 5, 1, 0, 30, i < 10)
    for (let i = 0; i < 6; i++) learn(l, 8, 1, 0, 30, false)
    expect(l.c).toBeLessThan(5.05)
    for (let i = 0; i < 60; i++) learn(l, 5.3, 1, 0, 30, false)
    expect(l.c).toBeGreaterThan(5.27)
  })
})

describe('coolant lag', () => {
  it('is picked from a bank by a wobble of 0.2 K: a true lag of 57, 81 or 116 s is found within 1 h under 0.1 K noise', () => {
    for (const trueS of [57, 81, 116]) {
      const u = random(trueS)
      const s = freshCoolant()
      const temps = ring(lagBlocks)
      let wall = -30
      let sum = 0
      for (let t = 1; t <= 3600; t++) {
        const coolant = -30 + 0.2 * Math.sin(t / 60)
        wall += (coolant - wall) / trueS
        coolantScan(s, t * 1000, coolant, 10)
        sum += wall + 5 + 0.1 * gauss(u)
        if (t % 30 === 0) {
          coolantBlock(s)
          push(temps, sum / 30)
          weighLags(s, temps, 0)
          chooseLag(s)
          sum = 0
        }
      }
      expect(lagsS[s.best]).toBe(trueS)
    }
  })
  it('keeps what moved in a gap in doubt and forgets it with the lag', () => {
    const s = freshCoolant()
    coolantScan(s, 1000, -30, 10)
    coolantScan(s, 301_000, -28, 10)
    expect(s.unseenK).toBe(2)
    for (let t = 302; t < 302 + 81 * 3; t++) coolantScan(s, t * 1000, -28, 10)
    expect(s.unseenK).toBeCloseTo(2 * Math.exp(-3), 2)
  })
})

describe('robust spread', () => {
  it('is the sd of normal noise to 15 %, does not see the last two minutes, and needs 30 samples', () => {
    const p = pace(1)
    const u = random(9)
    const s = freshSeries(p)
    for (let i = 0; i < 29 + 12; i++) remember(s, 0.05 * gauss(u), true)
    spread(s, p)
    expect(s.sdK).toBe(0)
    for (let i = 0; i < 180; i++) remember(s, 0.05 * gauss(u), true)
    spread(s, p)
    const before = s.sdK
    expect(Math.abs(before / 0.05 - 1)).toBeLessThan(0.15)
    for (let i = 0; i < 12; i++) remember(s, 9, true)
    spread(s, p)
    expect(s.sdK).toBeLessThan(0.06)
  })
  it('is 1.4826 times the median absolute deviation by simple-statistics, ties and even counts included', () => {
    const p = pace(1)
    fc.assert(
      fc.property(fc.array(fc.integer({ min: -9, max: 9 }), { minLength: 30, maxLength: 170 }), (xs) => {
        const s = freshSeries(p)
        for (const x of xs) remember(s, x / 10, true)
        for (let i = 0; i < p.slowDelay; i++) remember(s, 7, true)
        spread(s, p)
        expect(s.sdK).toBeCloseTo(1.4826 * medianAbsoluteDeviation(xs.map((x) => x / 10)), 12)
      }),
    )
  })
  it('seconds become scans: 4, 12, 25 s are 40, 120, 250 scans at 0.1 s and 1, 1, 1 at 60 s', () => {
    expect([pace(0.1), pace(1), pace(5), pace(60)].map((p) => [p.smooth, ...p.rise])).toEqual([
      [40, 120, 250],
      [4, 12, 25],
      [1, 2, 5],
      [1, 1, 1],
    ])
  })
})
