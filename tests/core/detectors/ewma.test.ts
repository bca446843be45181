import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { type EwmaConfig, ewma } from '../../../server/core/detectors/ewma.ts'
import { MonitorError } from '../../../server/core/errors.ts'
import { normal, uniform } from '../growth/simulated-growth.ts'

const table = JSON.parse(readFileSync('fixtures/statistics/ewma.json', 'utf8')) as {
  timeVarying: { lambda: number; c: number; shift: number; arl: number }[]
}

describe('ewma', () => {
  it('λ = 0.5: readings 2, 0, −2 average to 1, 0.5, −0.75, and the side began with the third', () => {
    const config: EwmaConfig = { lambda: 0.5, c: 3 }
    let state = ewma.start(config)
    const averages = [2, 0, -2].map((z, i) => {
      state = ewma.step(config, state, { tMs: i, z }).state
      return state.average
    })
    expect(averages).toEqual([1, 0.5, -0.75])
    expect(state.fromMs).toBe(2)
  })

  // R spc 0.6.7, limits that widen with the first readings; four standard errors of the simulation.
  it.each(table.timeVarying)('weight $lambda, limits $c, shift $shift: $arl samples to the signal', ({ lambda, c, shift, arl }) => {
    const config: EwmaConfig = { lambda, c }
    const u = uniform(Math.round(lambda * 100 + shift))
    const runs = arl > 100 ? 1500 : 6000
    let sum = 0
    let squares = 0
    for (let i = 0; i < runs; i++) {
      let state = ewma.start(config)
      for (let n = 1; ; n++) {
        const out = ewma.step(config, state, { tMs: n, z: normal(u) + shift })
        state = out.state
        if (out.verdict.kind === 'quiet') continue
        sum += n
        squares += n * n
        break
      }
    }
    const mean = sum / runs
    expect(Math.abs(mean - arl)).toBeLessThan(4 * Math.sqrt((squares / runs - mean * mean) / runs))
  })

  it('tells side, size and onset of a rise of 2σ that began with the 21st reading', () => {
    const config: EwmaConfig = { lambda: 0.2, c: 3 }
    let state = ewma.start(config)
    const verdicts = Array.from({ length: 60 }, (_, i) => {
      const out = ewma.step(config, state, { tMs: i, z: i < 20 ? -0.1 : 2 })
      state = out.state
      return out.verdict
    })
    expect(verdicts.slice(0, 20).every((v) => v.kind === 'quiet')).toBe(true)
    const last = verdicts[59]!
    if (last.kind !== 'shift') throw new Error('no shift')
    expect(last).toMatchObject({ side: 'high', onsetMs: 20 })
    expect(last.size).toBeCloseTo(2, 3)
  })

  it('refuses a weight of 0 or above 1 and limits of 0', () => {
    for (const bad of [
      { lambda: 0, c: 3 },
      { lambda: 1.1, c: 3 },
      { lambda: 0.1, c: 0 },
    ])
      expect(() => ewma.start(bad)).toThrow(MonitorError)
  })
})
