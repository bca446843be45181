import { existsSync, readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { cusum } from '../../../server/core/detectors/cusum.ts'
import type { Verdict } from '../../../server/core/detectors/detector.ts'
import { drift } from '../../../server/core/detectors/drift.ts'
import { madSd, median } from '../../../server/core/stats/robust.ts'

/*
 * Series of the Turing change-point data set (MIT; Nile from R, GPL-2) with the change its readers agree on. The twin without the
 * folder is the handbook's example in cusum.test.ts.
 */
const folder = '../shared/datasets/changepoint-classics/open'
const series = (name: string) =>
  readFileSync(`${folder}/${name}`, 'utf8')
    .trim()
    .split('\n')
    .slice(1)
    .map((line) => Number(line.split(',').at(-1)))

/** The chart with its baseline from the first readings; time in readings, from 0. */
function chart(values: number[], baseline: number, k: number, h: number) {
  const clean = values.slice(0, baseline)
  const centre = median(clean)
  const sd = madSd(clean)
  const config = { k, h, cap: null }
  let state = cusum.start(config)
  const verdicts: Verdict[] = values.map((x, i) => {
    const out = cusum.step(config, state, { tMs: i, z: (x - centre) / sd })
    state = out.state
    return out.verdict
  })
  const at = verdicts.findIndex((v) => v.kind === 'shift')
  const verdict = verdicts[at]
  return { at, verdict: verdict?.kind === 'shift' ? verdict : null, centre, sd }
}

describe.runIf(existsSync(folder))('change-point classics of the shared data sets', () => {
  // k for a fall of 2σ, h = 2.665 for 1000 years between false alarms (R spc). With k = 0.5 the median of 25 years is too poor a baseline.
  it('Nile: the fall after the dam of 1898 is found within three years and dated to 1899 (index 28), from the first 25 years', () => {
    const { at, verdict } = chart(series('nile.csv'), 25, 1, 2.665)
    expect(verdict?.side).toBe('low')
    expect(verdict?.onsetMs).toBe(28)
    expect(at).toBeLessThanOrEqual(30)
  })

  it('quality control 2: the step of 1.5σ at 97 is found within ten readings and dated within three', () => {
    const { at, verdict } = chart(series('quality_control_2.csv'), 80, 0.5, 5)
    expect(verdict?.side).toBe('high')
    expect(Math.abs((verdict?.onsetMs ?? 0) - 97)).toBeLessThanOrEqual(3)
    expect(at).toBeLessThanOrEqual(107)
  })

  it('quality control 5, no change: quiet at h = 6 after a baseline of 100, and no drift', () => {
    const values = series('quality_control_5.csv')
    const { at, centre, sd } = chart(values, 100, 0.5, 6)
    expect(at).toBe(-1)
    const config = { windowHours: 4, leastPerHour: 0.2, level: 0.99 }
    let state = drift.start(config)
    for (const [i, x] of values.entries()) {
      const out = drift.step(config, state, { tMs: 60_000 * i, z: (x - centre) / sd })
      state = out.state
      expect(out.verdict.kind).toBe('quiet')
    }
  })
})
