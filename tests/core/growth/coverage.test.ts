import { describe, expect, it } from 'vitest'
import { forecastLimit } from '../../../server/core/growth/forecast.ts'
import { fitOnset } from '../../../server/core/growth/onset.ts'
import { alarmIndex, randomGrowth } from './simulated-growth.ts'

/*
 * Intervals against simulated deposits (simulated-growth.ts, an independent source of truth; seeds fixed before the settings were).
 * With n deposits a 90 % interval that holds its promise covers 90 % ± 1.7 (one standard error of 300), an 80 % one 80 % ± 2.3.
 */
const percent = (part: number, of: number) => (100 * part) / of
const middle = (v: number[]) => [...v].sort((a, b) => a - b)[v.length >> 1]!
const holds = (low: number, truth: number, high: number) => low <= truth && truth <= high

describe('coverage on 300 simulated deposits: linear, saturating, accelerating, a third on part of the length', () => {
  const score = { n: 0, raised: 0, later: 0, error: [] as number[], width: [] as number[] }
  const forecasts = [0.25, 0.5, 0.75].map((part) => ({
    part,
    asked: 0,
    given: 0,
    held: 0,
    error: [] as number[],
    width: [] as number[],
  }))
  for (let seed = 1; seed <= 300; seed++) {
    const g = randomGrowth(9_000_000 + seed)
    const alarm = alarmIndex(g)
    const life = g.limitMs - g.onsetMs
    if (alarm < 0 || !Number.isFinite(life)) continue
    const from = g.points[0]!.tMs
    const onset = fitOnset(g.points.slice(0, alarm + 1), g.noise, from)
    if (onset === null) continue
    score.n++
    if (holds(onset.lowMs, g.onsetMs, onset.highMs)) score.raised++
    score.error.push(Math.abs(onset.atMs - g.onsetMs) / life)
    score.width.push((onset.highMs - onset.lowMs) / life)
    for (const f of forecasts) {
      const nowMs = g.onsetMs + f.part * life
      const known = g.points.filter((p) => p.tMs + 15_000 <= nowMs)
      if (known.length <= alarm) continue
      if (f.part === 0.5) {
        const again = fitOnset(known, g.noise, from)
        if (again !== null && holds(again.lowMs, g.onsetMs, again.highMs)) score.later++
      }
      f.asked++
      const forecast = forecastLimit(known, g.noise, onset, g.limitRatio, nowMs)
      if (forecast === null) continue
      f.given++
      if (holds(forecast.lowMs, g.limitMs, forecast.highMs)) f.held++
      f.error.push(Math.abs(forecast.atMs - g.limitMs) / (g.limitMs - nowMs))
      f.width.push((forecast.highMs - forecast.lowMs) / (g.limitMs - nowMs))
    }
  }
  console.log(
    `onset of ${score.n}: 90 % interval covers ${percent(score.raised, score.n).toFixed(1)} % as raised, ${percent(score.later, score.n).toFixed(1)} % half way; error median ${middle(score.error).toFixed(4)}, width ${middle(score.width).toFixed(3)} of onset to limit`,
  )
  for (const f of forecasts) {
    console.log(
      `forecast at ${f.part}: given ${percent(f.given, f.asked).toFixed(0)} %, 80 % interval covers ${percent(f.held, f.given).toFixed(1)} %; error median ${middle(f.error).toFixed(3)}, width ${middle(f.width).toFixed(2)} of the time left`,
    )
  }

  // STA-07
  it('the 90 % onset interval covers 86 to 95 %, as raised and refitted half way', () => {
    expect(score.n).toBeGreaterThan(280)
    expect(percent(score.raised, score.n)).toBeGreaterThan(86)
    expect(percent(score.raised, score.n)).toBeLessThan(95)
    expect(percent(score.later, score.n)).toBeGreaterThan(86)
    expect(percent(score.later, score.n)).toBeLessThan(95)
  })

  it('the onset is off by less than 0.01 of onset to limit in the median', () => {
    expect(middle(score.error)).toBeLessThan(0.01)
    expect(middle(score.width)).toBeLessThan(0.07)
  })

  // FOU-06
  it('the 80 % forecast interval covers 76 to 86 % half way, off by less than 0.22 of the time left in the median, given in 95 %', () => {
    const half = forecasts[1]!
    expect(percent(half.held, half.given)).toBeGreaterThan(76)
    expect(percent(half.held, half.given)).toBeLessThan(86)
    expect(middle(half.error)).toBeLessThan(0.22)
    expect(middle(half.width)).toBeLessThan(0.9)
    expect(percent(half.given, half.asked)).toBeGreaterThan(95)
  })
})
