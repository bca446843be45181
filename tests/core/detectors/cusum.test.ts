import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { type CusumConfig, type CusumState, cusum } from '../../../server/core/detectors/cusum.ts'
import { MonitorError } from '../../../server/core/errors.ts'
import { normal, uniform } from '../growth/simulated-growth.ts'

const read = <T>(path: string) => JSON.parse(readFileSync(path, 'utf8')) as T
const run = (config: CusumConfig, values: readonly (number | null)[]) => {
  let state: CusumState = cusum.start(config)
  return values.map((z, i) => {
    const out = cusum.step(config, state, { tMs: 1000 * (i + 1), z })
    state = out.state
    return out
  })
}

describe('cusum', () => {
  // STA-08
  it('follows the handbook’s twenty readings: both sums, first signal at 14, change at 13, level 327.79 (NIST 6.3.2.3)', () => {
    const h = read<{ target: number; k: number; h: number; x: number[]; high: number[]; low: number[] }>(
      'fixtures/statistics/handbook-cusum.json',
    )
    const outs = run(
      { k: h.k, h: h.h, cap: null },
      h.x.map((x) => x - h.target),
    )
    outs.forEach(({ state }, i) => {
      expect(state.high.sum).toBeCloseTo(h.high[i]!, 9)
      expect(state.low.sum).toBeCloseTo(h.low[i]!, 9)
    })
    const first = outs.findIndex((o) => o.verdict.kind === 'shift')
    expect(first).toBe(13)
    const verdict = outs[13]!.verdict
    if (verdict.kind !== 'shift') throw new Error('no shift')
    expect(verdict.side).toBe('high')
    expect(verdict.onsetMs).toBe(13_000)
    expect(h.target + verdict.size).toBeCloseTo(327.79, 2)
  })

  // STA-01
  it('a steady 1σ rise is flagged on the 11th sample, when 11 × 0.5 passes h = 5, on the 6th with a head start of h/2, dated to the first', () => {
    const flagged = (headStart: number) =>
      run({ k: 0.5, h: 5, cap: null, headStart }, Array(12).fill(1)).findIndex((o) => o.verdict.kind === 'shift')
    expect(flagged(0)).toBe(10)
    expect(flagged(0.5)).toBe(5)
    const at = run({ k: 0.5, h: 5, cap: null, headStart: 0.5 }, Array(6).fill(1))[5]!.verdict
    expect(at).toMatchObject({ kind: 'shift', side: 'high', onsetMs: 1000 })
  })

  it('capped at 2h it clears h/k samples after the fault ends, however long it lasted', () => {
    const values = [...Array(500).fill(3), ...Array(20).fill(0)]
    const after = run({ k: 0.5, h: 5, cap: 10 }, values).slice(500)
    expect(after.findIndex((o) => o.verdict.kind === 'quiet')).toBe(9)
  })

  // STA-01
  it('mirrors: the verdict on −z is the verdict on z with the sides changed', () => {
    fc.assert(
      fc.property(fc.array(fc.double({ min: -4, max: 4, noNaN: true }), { maxLength: 60 }), (values) => {
        const config = { k: 0.5, h: 3, cap: 6 }
        const up = run(config, values)
        const down = run(
          config,
          values.map((z) => -z),
        )
        up.forEach(({ state }, i) => {
          expect(state.high).toEqual(down[i]!.state.low)
        })
      }),
    )
  })

  it('holds its verdict and its sums through a gap', () => {
    const outs = run({ k: 0.5, h: 5, cap: 10 }, [...Array(12).fill(1.5), null, Number.NaN, null])
    expect(outs[14]!.verdict).toEqual(outs[11]!.verdict)
    expect(outs[14]!.state).toEqual(outs[11]!.state)
  })

  it('refuses k or h of 0 or below, a cap that h never passes, a head start of h', () => {
    for (const config of [
      { k: 0, h: 5, cap: null },
      { k: 0.5, h: -1, cap: null },
      { k: 0.5, h: 5, cap: 5 },
      { k: 0.5, h: 5, cap: null, headStart: 1 },
    ])
      expect(() => cusum.start(config)).toThrow(MonitorError)
  })
})

describe('readings that remember the last one, k = 0.5, h = 5, both sides', () => {
  const { cases } = read<{ cases: { phi: number; shift: number; mode: string; arl: number; se: number }[] }>(
    'fixtures/statistics/autocorrelated.json',
  )
  // STA-04
  it.each(cases)(
    'correlation $phi, $mode, shift $shift σ: $arl samples, within four standard errors',
    ({ phi, shift, mode, arl, se }) => {
      const config: CusumConfig = { k: 0.5, h: 5, cap: null }
      const u = uniform(Math.round(1000 * phi + 10 * shift + (mode === 'raw' ? 1 : 2)))
      const runs = arl > 300 ? 1500 : 4000
      const innovation = Math.sqrt(1 - phi * phi)
      let sum = 0
      let squares = 0
      for (let i = 0; i < runs; i++) {
        let state = cusum.start(config)
        let noise = normal(u)
        let last = noise
        let n = 0
        for (;;) {
          n++
          noise = phi * noise + innovation * normal(u)
          const x = noise + shift
          const out = cusum.step(config, state, { tMs: n, z: mode === 'raw' ? x : (x - phi * last) / innovation })
          last = x
          state = out.state
          if (out.verdict.kind === 'shift') break
        }
        sum += n
        squares += n * n
      }
      const mean = sum / runs
      const own = Math.sqrt((squares / runs - mean * mean) / runs)
      expect(Math.abs(mean - arl)).toBeLessThan(4 * Math.hypot(own, se))
    },
  )
})
