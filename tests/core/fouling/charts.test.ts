import { describe, expect, it } from 'vitest'
import { type ChartState, chartReport, readCharts, startCharts, stepCharts } from '../../../server/core/fouling/charts.ts'
import { randomOf } from '../../../server/core/sim/random.ts'

const promise = { falseAlarmDays: 30, riseToFindPct: 5 }
const noise = { whiteSd: 0.004, wanderSd: 0.0022, wanderTauS: 2400, stepS: 30 }
const perDay = 2880

/** Steps of 30 s: white noise and a mean-reverting wander as designed for, plus what happens. */
function feed(c: ChartState, steps: number, seed: number, ln: (k: number) => number, at: (k: number) => boolean = () => true) {
  const r = randomOf(seed, 'charts')
  const phi = Math.exp(-noise.stepS / noise.wanderTauS)
  let w = noise.wanderSd * r.normal()
  const first: { over: number | null; alarm: number | null } = { over: null, alarm: null }
  for (let k = 0; k < steps; k++) {
    w = phi * w + noise.wanderSd * Math.sqrt(1 - phi * phi) * r.normal()
    stepCharts(c, 30_000 * k, at(k) ? ln(k) + w + noise.whiteSd * r.normal() : null)
    if (c.over) first.over ??= k
    if (k % 10 === 9 && readCharts(c, promise.riseToFindPct).alarms) first.alarm ??= k
  }
  return first
}

describe('the charts by the promise', () => {
  // STA-03
  it('are designed for one false alarm of the skid in 30 days: 6 charts share it, each once in 180 days', () => {
    const one = startCharts(promise, 1, noise, 0)
    const six = startCharts(promise, 6, noise, 0)
    expect(one.design.falseAlarmHours / 720).toBeCloseTo(1, 6)
    expect(six.design.falseAlarmHours / 720).toBeCloseTo(1, 6)
    expect((six.design.arl0 * 300) / 3600 / 720).toBeGreaterThan(5.5)
    expect(six.design.h).toBeGreaterThan(one.design.h)
  })

  it('keep it: 40 chart-months of clean noise as large as designed for (0.4 % of model error a point included) make the CUSUM signal 40 times within 3 Poisson sd, the pair never; without the model error never at all', () => {
    for (const [model, most] of [
      [0.004, 40 + 3 * Math.sqrt(40)],
      [0, 0],
    ] as const) {
      // biome-ignore format: a table
      let signals = 0
      let alarms = 0
      for (let i = 0; i < 8; i++) {
        const c = startCharts(promise, 1, noise, 0)
        const r = randomOf(i, 'model error')
        let error = 0
        const off = (k: number) => {
          if (k % 10 === 0) error = model * r.normal()
          return error
        }
        if (feed(c, 5 * 30 * perDay, 100 + i, off).alarm !== null) alarms++
        signals += c.signals
      }
      expect(alarms).toBe(0)
      expect(signals).toBeLessThanOrEqual(most)
      // Far fewer would mean an interval wider than the promise asks for: growth found later than it could be.
      expect(signals).toBeGreaterThanOrEqual(model > 0 ? 40 - 3 * Math.sqrt(40) : 0)
    }
  }, 60_000)

  it('find 1 % a day within 10 days, and not before it has risen by 3 %', () => {
    for (const seed of [1, 2, 3]) {
      const c = startCharts(promise, 6, noise, 0)
      const { alarm } = feed(c, 10 * perDay, seed, (k) => (0.01 * k) / perDay)
      expect(alarm).not.toBeNull()
      expect((0.01 * alarm!) / perDay).toBeGreaterThan(0.026)
      expect((0.01 * alarm!) / perDay).toBeLessThan(0.07)
      const { drift } = readCharts(c, 5)
      expect(drift!.perHour * 24).toBeGreaterThan(0.008)
      expect(drift!.perHour * 24).toBeLessThan(0.012)
    }
  })

  it('hold through gaps: with every other six hours missing the same growth is found as well', () => {
    const c = startCharts(promise, 6, noise, 0)
    const { alarm } = feed(
      c,
      10 * perDay,
      4,
      (k) => (0.01 * k) / perDay,
      (k) => k % 1440 < 720,
    )
    expect(alarm).not.toBeNull()
  })

  it('stand on their own zero: a baseline at 1.02 is no rise', () => {
    const c = startCharts(promise, 6, noise, Math.log(1.02))
    expect(feed(c, 5 * perDay, 5, () => Math.log(1.02))).toEqual({ over: null, alarm: null })
  })

  it('say nothing on one hour at +20 %: the CUSUM speaks, the robust slope does not', () => {
    const c = startCharts(promise, 6, noise, 0)
    const first = feed(c, 3 * perDay, 6, (k) => (k > 4000 && k < 4120 ? 0.2 : 0))
    expect(first.over).not.toBeNull()
    expect(first.alarm).toBeNull()
  })

  it('keep their state small: below 60 kB of JSON after a month', () => {
    const c = startCharts(promise, 6, noise, 0)
    feed(c, 30 * perDay, 7, () => 0)
    expect(JSON.stringify(c).length).toBeLessThan(60_000)
  })
})

describe('the lower side of the charts', () => {
  it('speaks of a slow fall: 1 % a day below clean is told once it stands 5 % below, within 9 days, and no alarm is raised', () => {
    for (const seed of [11, 12, 13]) {
      const c = startCharts(promise, 6, noise, 0)
      let below: number | null = null
      let alarmed = false
      feed(c, 10 * perDay, seed, (k) => {
        const now = readCharts(c, promise.riseToFindPct)
        if (now.below) below ??= k
        alarmed ||= now.alarms
        return (-0.01 * k) / perDay
      })
      expect(alarmed).toBe(false)
      expect(below).not.toBeNull()
      expect((0.01 * below!) / perDay).toBeGreaterThan(0.045)
      expect((0.01 * below!) / perDay).toBeLessThan(0.09)
    }
  })

  it('is silent on 120 days of clean noise and while resistance rises', () => {
    for (const [seed, slope] of [
      [21, 0],
      [22, 0],
      [23, 0],
      [24, 0],
      [25, 0.01],
    ] as const) {
      // biome-ignore format: a table
      const c = startCharts(promise, 6, noise, 0)
      let below = false
      feed(c, (slope === 0 ? 30 : 8) * perDay, seed, (k) => {
        below ||= readCharts(c, promise.riseToFindPct).below
        return (slope * k) / perDay
      })
      expect(below).toBe(false)
    }
  })

  it('mirrors the upper one in the report: the low sum on −x is the high sum on x', () => {
    const [up, down] = [startCharts(promise, 6, noise, 0), startCharts(promise, 6, noise, 0)]
    const r = randomOf(31, 'mirror')
    for (let k = 0; k < 600; k++) {
      const x = 0.01 + 0.004 * r.normal()
      stepCharts(up, 30_000 * k, x)
      stepCharts(down, 30_000 * k, -x)
    }
    const [a, b] = [chartReport(up, 5, 30), chartReport(down, 5, 30)]
    expect(a.cusum).toBeGreaterThan(1)
    expect(b.cusumLow).toBe(a.cusum)
    expect(b.cusum).toBe(a.cusumLow)
  })
})
