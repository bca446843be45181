import { existsSync, readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { ewmaLimit, ewmaRunLength } from '../../../server/core/design/ewma-design.ts'
import { MonitorError } from '../../../server/core/errors.ts'

const read = <T>(path: string) => JSON.parse(readFileSync(path, 'utf8')) as T
const table = read<{
  cases: { lambda: number; c: number; shift: number; printed: string }[]
  limits: { lambda: number; arl0: number; c: number }[]
}>('fixtures/statistics/ewma.json')

describe('run length of the EWMA chart', () => {
  it.each(table.cases)(
    'weight $lambda, limits $c, shift $shift: $printed samples (Montgomery)',
    ({ lambda, c, shift, printed }) => {
      const half = 0.5 * 10 ** -(printed.split('.')[1]?.length ?? 0)
      expect(Math.abs(ewmaRunLength(lambda, c, shift) - Number(printed))).toBeLessThanOrEqual(half * 1.0001)
    },
  )

  it.each(table.limits)('weight $lambda and a run length of $arl0 ask for limits of $c (R spc)', ({ lambda, arl0, c }) => {
    expect(Math.abs(ewmaLimit(lambda, arl0) - c)).toBeLessThan(1e-5)
  })

  it('with weight 1 it is the Shewhart chart: limits of 3 run 370.4 samples', () => {
    expect(ewmaRunLength(1, 3, 0)).toBeCloseTo(370.4, 1)
  })

  it('refuses a weight of 0 and a run length of 1', () => {
    expect(() => ewmaLimit(0, 500)).toThrow(MonitorError)
    expect(() => ewmaLimit(0.1, 1)).toThrow(MonitorError)
  })

  const folder = '../shared/reference'
  describe.runIf(existsSync(folder))('against R spc 0.6.7, the shared reference', () => {
    it('50 run lengths with fixed limits within 1e-5, nine limits within 1e-5', () => {
      const { cases } = read<{
        cases: { in: { lambda: number; c: number; delta: number; limits: string }; out: { arl: number } }[]
      }>(`${folder}/02_ewma_arl.json`)
      const fixed = cases.filter((c) => c.in.limits === 'fix')
      expect(fixed.length).toBeGreaterThan(40)
      for (const c of fixed) expect(Math.abs(ewmaRunLength(c.in.lambda, c.in.c, c.in.delta) / c.out.arl - 1)).toBeLessThan(1e-5)
      const limits = read<{ cases: { in: { lambda: number; arl0: number }; out: { c: number } }[] }>(
        `${folder}/02_ewma_crit.json`,
      ).cases
      for (const c of limits) expect(Math.abs(ewmaLimit(c.in.lambda, c.in.arl0) - c.out.c)).toBeLessThan(1e-5)
    })
  })
})
