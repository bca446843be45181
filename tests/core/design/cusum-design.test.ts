import { existsSync, readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { baselineDoubt, falseAlarmRate, inControlRunLength } from '../../../server/core/design/baseline-doubt.ts'
import { designCusum } from '../../../server/core/design/cusum-design.ts'
import { cusumRunLength } from '../../../server/core/design/run-length.ts'
import { MonitorError } from '../../../server/core/errors.ts'
import { normal, uniform } from '../growth/simulated-growth.ts'
import { brookEvans } from './brook-evans.ts'

const read = <T>(path: string) => JSON.parse(readFileSync(path, 'utf8')) as T
const intervals = read<{ cases: { k: number; arl0: number; sided: 'one' | 'two'; h: number }[] }>(
  'fixtures/statistics/decision-intervals.json',
)
const memory = read<{
  cases: { phi: number; shift: number; mode: string; arl: number; se: number }[]
  estimated: { phi: number; training: number; mean: number; se: number; median: number }[]
}>('fixtures/statistics/autocorrelated.json')
/** One chart, one step a second: the promise is the run length. */
const forRunLength = (k: number, arl0: number, sided: 'one' | 'two') =>
  designCusum({ falseAlarmHours: arl0 / 3600, stepS: 1, charts: 1, sigma: 1, shift: 2 * k, sided })

describe('designCusum', () => {
  it.each(intervals.cases)('k $k and a run length of $arl0 give h = $h (R spc)', ({ k, arl0, sided, h }) => {
    expect(Math.abs(forRunLength(k, arl0, sided).h - h)).toBeLessThan(1e-6)
  })

  // Common practice table for one-sided charts with k = 0.5, by Markov chain: h to two digits for one false alarm in 1, 7, 16, 30 days.
  // A chain of a hundred states is 0.3 % low in run length, which is 0.003 in h; half a digit is 0.005.
  it.each([
    [10, 24, 7.22],
    [10, 168, 9.16],
    [10, 384, 9.99],
    [10, 720, 10.62],
    [60, 24, 5.43],
    [60, 168, 7.37],
    [60, 384, 8.2],
    [60, 720, 8.82],
  ])('steps of %i s, one false alarm in %i h, k = 0.5: h = %f', (stepS, falseAlarmHours, h) => {
    expect(Math.abs(designCusum({ falseAlarmHours, stepS, charts: 1, sigma: 1, shift: 1 }).h - h)).toBeLessThan(0.008)
  })

  // STA-02
  it('seven days of 10-s and 60-s steps find 1σ in 3.1 and 15 min', () => {
    const delay = (stepS: number) => designCusum({ falseAlarmHours: 168, stepS, charts: 1, sigma: 1, shift: 1 }).expectedDelayS / 60
    expect(delay(10)).toBeCloseTo(3.1, 1)
    expect(Math.round(delay(60))).toBe(15)
  })

  // STA-03
  it('shares the promise: six charts with one false alarm in 720 h together run as one chart with one in 4320 h', () => {
    const shared = designCusum({ falseAlarmHours: 720, stepS: 30, charts: 6, sigma: 1, shift: 1 })
    const alone = designCusum({ falseAlarmHours: 4320, stepS: 30, charts: 1, sigma: 1, shift: 1 })
    expect(shared.h).toBeCloseTo(alone.h, 9)
    expect(shared.falseAlarmHours).toBeCloseTo(720, 3)
    expect(shared.arl0).toBeCloseTo((4320 * 3600) / 30, 0)
  })

  it('holds the promise whatever the numbers, and a larger shift is found no later', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 1, max: 2000, noNaN: true }),
        fc.integer({ min: 1, max: 12 }),
        fc.double({ min: 0.6, max: 4, noNaN: true }),
        (falseAlarmHours, charts, shift) => {
          const d = designCusum({ falseAlarmHours, stepS: 30, charts, sigma: 1, shift })
          expect(Math.abs(d.falseAlarmHours / falseAlarmHours - 1)).toBeLessThan(1e-6)
          expect(cusumRunLength({ k: d.k, h: d.h, sided: 'one' }, shift * 1.2)).toBeLessThanOrEqual(d.arl1)
          expect(d.arl1HeadStart).toBeLessThanOrEqual(d.arl1)
        },
      ),
      { numRuns: 25 },
    )
  })

  // Two-sided k = 0.5, h = 5 on whitened readings, a shift of 1 marginal σ: 16, 27, 64 samples (Monte Carlo, see fixtures/statistics).
  it.each(memory.cases.filter((c) => c.mode === 'white' && c.shift === 1))(
    'whitened readings of correlation $phi show a shift of 1σ after $arl samples',
    ({ phi, arl, se }) => {
      const sigma = Math.sqrt(1 - phi * phi)
      expect(Math.abs(cusumRunLength({ k: 0.5, h: 5, sided: 'two' }, (1 - phi) / sigma, 1 / sigma) - arl)).toBeLessThan(4 * se)
    },
  )

  // STA-04
  it('counts the correlation: with φ = 0.8 the whitened σ is 0.6 of a step’s and a lasting shift shrinks to a third', () => {
    const d = designCusum({ falseAlarmHours: 720, stepS: 30, charts: 1, sigma: 0.01, shift: 0.01, correlation: 0.8 })
    expect(d.chartSigma).toBeCloseTo(0.006, 12)
    expect(d.k).toBeCloseTo(1 / 6, 12)
  })

  it('refuses what makes no chart', () => {
    const good = { falseAlarmHours: 720, stepS: 30, charts: 6, sigma: 0.004, shift: 0.05 }
    for (const bad of [
      { sigma: 0 },
      { shift: Number.NaN },
      { charts: -1 },
      { correlation: 1 },
      { baselineSteps: 5 },
      { headStart: 1 },
    ])
      expect(() => designCusum({ ...good, ...bad })).toThrow(MonitorError)
  })

  const file = '../shared/reference/01_cusum_crit.json'
  describe.runIf(existsSync(file))('against R spc 0.6.7, the decision intervals of the shared reference with k up to 1', () => {
    it('h within 1e-6, printed ones within half a digit', () => {
      const { cases } = read<{
        cases: { in: { k: number; arl0: number; sided: 'one' | 'two' }; out: { h?: number; h_printed?: number } }[]
      }>(file)
      const reached = cases.filter((c) => c.in.k <= 1)
      expect(reached.length).toBeGreaterThan(50)
      for (const c of reached) {
        const { h } = forRunLength(c.in.k, c.in.arl0, c.in.sided)
        if (c.out.h !== undefined) expect(Math.abs(h - c.out.h)).toBeLessThan(1e-6)
        else expect(Math.abs(h - c.out.h_printed!)).toBeLessThan(0.0051)
      }
    })
  })
})

describe('a baseline that is only an estimate', () => {
  // Common practice: σ taken 10 % too small cuts 931 to 387, 20 % to 178; a mean off by 0.1σ to 413 (k = 0.5, h = 5, one-sided).
  // STA-05
  it('a σ 10 or 20 % too small and a mean 0.1σ off cut 931 to 387, 178 and 413', () => {
    const chart = { k: 0.5, h: 5, sided: 'one' as const }
    expect(Math.round(cusumRunLength({ k: 0.5 * 0.9, h: 5 * 0.9, sided: 'one' }, 0))).toBe(387)
    expect(Math.round(cusumRunLength({ k: 0.5 * 0.8, h: 5 * 0.8, sided: 'one' }, 0))).toBe(178)
    expect(Math.round(cusumRunLength(chart, 0.1))).toBe(413)
  })

  it('the median run length is the Markov chain’s within 1 % when the baseline is known', () => {
    const { median } = inControlRunLength({ k: 0.5, h: 5, sided: 'one' }, null)
    expect(Math.abs(median / brookEvans(0.5, 5, 0).median - 1)).toBeLessThan(0.01)
  })

  // Estimated φ = 0.5 and residual σ, known mean, two-sided k = 0.5, h = 5 (Monte Carlo). The doubt is a first-order account: 10 %.
  it.each(memory.estimated)(
    'a correlation estimated from $training steps gives a mean of $mean and a median of $median, within 10 %',
    (c) => {
      const doubt = { ...baselineDoubt(c.training, c.phi), meanSd: 0 }
      const { mean, median } = inControlRunLength({ k: 0.5, h: 5, sided: 'two' }, doubt)
      expect(Math.abs(mean / c.mean - 1)).toBeLessThan(0.1)
      expect(Math.abs(median / c.median - 1)).toBeLessThan(0.1)
    },
  )

  it('false alarms with baselines of 80 steps come as often as the designed chart says, within 10 % in 4000 simulated baselines', () => {
    const steps = 80
    const chart = { k: 0.5, h: 6, sided: 'one' as const }
    const told = falseAlarmRate(chart, baselineDoubt(steps, null))
    const u = uniform(20)
    const length = 1500
    let alarms = 0
    let samples = 0
    for (let run = 0; run < 4000; run++) {
      let sum = 0
      let squares = 0
      for (let i = 0; i < steps; i++) {
        const x = normal(u)
        sum += x
        squares += x * x
      }
      const mean = sum / steps
      const sd = Math.sqrt((squares - steps * mean * mean) / (steps - 1))
      let s = 0
      for (let i = 0; i < length; i++) {
        s = Math.max(0, s + (normal(u) - mean) / sd - chart.k)
        if (s > chart.h) {
          alarms++
          s = 0
        }
      }
      samples += length
    }
    const seen = alarms / samples
    console.log(
      `false alarms per 1000 steps, baselines of ${steps}: designed ${(1000 * told).toFixed(3)}, simulated ${(1000 * seen).toFixed(3)}`,
    )
    expect(Math.abs(told / seen - 1)).toBeLessThan(0.1)
  })

  // STA-05
  it('a shorter baseline asks for a wider interval, and one too short for the promise says so', () => {
    const h = (baselineSteps: number | null) =>
      designCusum({ falseAlarmHours: 720, stepS: 30, charts: 6, sigma: 1, shift: 2, baselineSteps }).h
    expect(h(60)).toBeGreaterThan(h(400))
    expect(h(400)).toBeGreaterThan(h(null))
    const hopeless = designCusum({ falseAlarmHours: 720, stepS: 30, charts: 6, sigma: 1, shift: 0.3, baselineSteps: 30 })
    expect(hopeless.h).toBe(60)
    expect(hopeless.falseAlarmHours).toBeLessThan(720)
  })
})
