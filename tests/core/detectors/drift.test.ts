import { describe, expect, it } from 'vitest'
import type { Verdict } from '../../../server/core/detectors/detector.ts'
import { type DriftConfig, drift } from '../../../server/core/detectors/drift.ts'
import { MonitorError } from '../../../server/core/errors.ts'
import { normal, uniform } from '../growth/simulated-growth.ts'

const usual: DriftConfig = { windowHours: 4, leastPerHour: 0.2, level: 0.99 }
/** Thirty-second steps: noise of 1σ and correlation phi, then a rise [σ/h] from `from` hours on. */
const watch = (config: DriftConfig, hours: number, rise: number, from: number, phi: number, seed: number, spoil = 0) => {
  const u = uniform(seed)
  let state = drift.start(config)
  let noise = normal(u)
  const verdicts: { tMs: number; verdict: Verdict }[] = []
  for (let tMs = 0; tMs < hours * 3_600_000; tMs += 30_000) {
    noise = phi * noise + Math.sqrt(1 - phi * phi) * normal(u)
    const wild = u() < spoil ? 40 : 0
    const out = drift.step(config, state, { tMs, z: noise + wild + rise * Math.max(0, tMs / 3_600_000 - from) })
    state = out.state
    expect(state.means.length).toBeLessThanOrEqual(60)
    verdicts.push({ tMs, verdict: out.verdict })
  }
  return verdicts
}

describe('drift', () => {
  it('tells a rise of 2σ an hour within two hours of its start, with an interval around it and an onset', () => {
    const hit = watch(usual, 5, 2, 2, 0, 3).find((v) => v.tMs > 2 * 3_600_000 && v.verdict.kind === 'rising')!
    if (hit.verdict.kind !== 'rising') throw new Error('not rising')
    expect(hit.tMs).toBeLessThan(4 * 3_600_000)
    expect(hit.verdict.lowPerHour).toBeGreaterThan(0.2)
    expect(hit.verdict.onset!.lowMs).toBeLessThan(2.1 * 3_600_000)
    expect(hit.verdict.onset!.highMs).toBeGreaterThan(1.9 * 3_600_000)
  })

  it('with one reading in ten 40σ off, the slope of a steady 1σ an hour stays within its interval', () => {
    const last = watch(usual, 4, 1, 0, 0, 8, 0.1).at(-1)!.verdict
    if (last.kind !== 'rising') throw new Error('not rising')
    expect(last.lowPerHour).toBeLessThan(1)
    expect(last.highPerHour).toBeGreaterThan(1)
  })

  it('is quiet for 97 % of the time on 40 clean runs of 12 h, independent and of correlation 0.7', () => {
    for (const phi of [0, 0.7]) {
      let rising = 0
      let all = 0
      for (let seed = 1; seed <= 20; seed++) {
        for (const { verdict } of watch(usual, 12, 0, 0, phi, 100 + seed)) {
          all++
          if (verdict.kind === 'rising') rising++
        }
      }
      console.log(`drift, correlation ${phi}: rising ${((100 * rising) / all).toFixed(2)} % of the time on clean runs`)
      expect(rising / all).toBeLessThan(0.03)
    }
  })

  it('the window is forgotten: two windows after a rise has ended the verdict is quiet again', () => {
    let state = drift.start(usual)
    let last: Verdict = { kind: 'quiet' }
    const u = uniform(2)
    for (let tMs = 0; tMs < 14 * 3_600_000; tMs += 30_000) {
      const out = drift.step(usual, state, { tMs, z: 3 * Math.min(2, tMs / 3_600_000) + normal(u) })
      state = out.state
      last = out.verdict
      if (tMs === 2 * 3_600_000) expect(last.kind).toBe('rising')
    }
    expect(last.kind).toBe('quiet')
  })

  it('refuses a window of 0, a slope below 0, a level of 1', () => {
    for (const bad of [{ windowHours: 0 }, { leastPerHour: -1 }, { level: 1 }])
      expect(() => drift.start({ ...usual, ...bad })).toThrow(MonitorError)
  })
})
