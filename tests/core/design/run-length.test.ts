import { existsSync, readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { cusumRunLength, siegmundRunLength } from '../../../server/core/design/run-length.ts'
import { brookEvans } from './brook-evans.ts'

interface Printed {
  k: number
  h: number
  shift: number
  sided: 'one' | 'two'
  start: number
  printed: string
  source: string
}
const printed = JSON.parse(readFileSync('fixtures/statistics/run-lengths.json', 'utf8')) as { cases: Printed[] }

describe('mean run length of the CUSUM', () => {
  // STA-02
  it.each(printed.cases)('k $k, h $h, shift $shift, $sided-sided, start $start: $printed samples ($source)', (c) => {
    const digits = c.printed.split('.')[1]?.length ?? 0
    const half = 0.5 * 10 ** -digits
    expect(Math.abs(cusumRunLength(c, c.shift) - Number(c.printed))).toBeLessThanOrEqual(half * 1.0001)
  })

  it('agrees with a Markov chain of 100 states within 0.5 %, another method altogether', () => {
    for (const [k, h, shift] of [
      [0.5, 4, 0],
      [0.5, 5, 0],
      [0.5, 8, 0],
      [0.25, 6, 0.5],
      [1, 3, 1],
    ] as const) {
      const ratio = brookEvans(k, h, shift).mean / cusumRunLength({ k, h, sided: 'one' }, shift)
      expect(Math.abs(ratio - 1)).toBeLessThan(0.005)
    }
  })

  // The closed form is known to lie within 1 to 6 % at these settings (Siegmund 1985; common practice).
  // STA-02
  it('Siegmund’s closed form lies within 6 % for k = 0.5, h = 4 to 8, shifts 0 and 1', () => {
    for (const h of [4, 5, 8]) {
      for (const shift of [0, 1]) {
        expect(Math.abs(siegmundRunLength(0.5, h, shift) / cusumRunLength({ k: 0.5, h, sided: 'one' }, shift) - 1)).toBeLessThan(
          0.06,
        )
      }
    }
  })

  // STA-06
  it('a head start of h/2 cuts the delay at 1σ from 10.4 to 6.3 and the time between false alarms from 931 to 896 (k = 0.5, h = 5)', () => {
    const chart = { k: 0.5, h: 5, start: 2.5, sided: 'one' as const }
    expect(cusumRunLength(chart, 1)).toBeCloseTo(6.3, 1)
    expect(Math.round(cusumRunLength(chart, 0))).toBe(896)
  })

  const folder = '../shared/reference'
  describe.runIf(existsSync(folder))('against R spc 0.6.7, all cases of the shared reference', () => {
    it('842 run lengths, one- and two-sided, with and without head start, within 1e-6', () => {
      const { cases } = JSON.parse(readFileSync(`${folder}/01_cusum_arl.json`, 'utf8')) as {
        cases: { in: { k: number; h: number; delta: number; sided: 'one' | 'two'; headstart: number }; out: { arl: number } }[]
      }
      expect(cases.length).toBeGreaterThan(800)
      let worst = 0
      for (const c of cases) {
        const arl = cusumRunLength({ k: c.in.k, h: c.in.h, start: c.in.headstart, sided: c.in.sided }, c.in.delta)
        worst = Math.max(worst, Math.abs(arl / c.out.arl - 1))
      }
      console.log(`run lengths against R spc: largest relative difference ${worst.toExponential(1)} of ${cases.length}`)
      expect(worst).toBeLessThan(1e-6)
    })
  })
})
