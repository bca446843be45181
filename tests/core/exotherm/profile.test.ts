import { describe, expect, it } from 'vitest'
import { heatCentre, timeToLimit } from '../../../server/core/exotherm/profile.ts'
import { createExothermWatch } from '../../../server/core/exotherm/watch.ts'
import { twoReactors, world } from './world.ts'

describe('where the heat sits', () => {
  // EXO-05
  it('centre of 2, 6, 2 K is at 1; of 0, 2, 6 K at 1.75; null below 1 K in all or with one thermocouple', () => {
    expect(heatCentre([2, 6, 2])).toBe(1)
    expect(heatCentre([-3, 2, 6])).toBe(1.75)
    expect(heatCentre([null, 2, 6])).toBe(1.75)
    expect(heatCentre([0.3, 0.4])).toBe(null)
    expect(heatCentre([null, 6])).toBe(null)
  })
  // EXO-05
  it('3 K that move from the middle to the outlet shift the centre of 16.7 K by 3/16.7 = 0.18 spacings downstream; before it stays within 0.1', () => {
    const watch = createExothermWatch(twoReactors(1))
    const shifts = world({ scanS: 1, hours: 0.8, seed: 5 }).map(({ tMs, scans: [one, two] }, k) => {
      const by = k > 2400 ? Math.min(3, (k - 2400) / 60) : 0
      watch.scan(tMs, [{ ...one, tempsC: [one.tempsC[0]!, one.tempsC[1]! - by, one.tempsC[2]! + by] }, two])
      return watch.heatShift(0)
    })
    for (const s of shifts.slice(600, 2400)) expect(Math.abs(s!)).toBeLessThan(0.1)
    expect(Math.abs(shifts[2590]! - 0.18)).toBeLessThan(0.05)
  })
})

describe('time to a limit', () => {
  // EXO-03
  it('from −20 °C to 0 °C at 0.5 ± 0.05 K/s is 40 s, 33 to 50 s', () => {
    const t = timeToLimit(-20, 0, 0.5, 0.05)
    expect([t.s, t.latestS]).toEqual([40, 50])
    expect(t.soonestS).toBeCloseTo(20 / 0.6, 12)
  })
  it('is 0 past the limit, and open-ended where the rate may be nil', () => {
    expect(timeToLimit(1, 0, -0.1, 0.01)).toEqual({ s: 0, soonestS: 0, latestS: 0 })
    expect(timeToLimit(-20, 0, 0.1, 0.06)).toMatchObject({ latestS: null })
    expect(timeToLimit(-20, 0, -0.2, 0.01)).toEqual({ s: null, soonestS: null, latestS: null })
  })
})
