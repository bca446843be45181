import { describe, expect, it, onTestFinished } from 'vitest'
import { createPair } from '../../server/monitor/catalogue.ts'
import { comparedRun } from '../../server/monitor/comparison.ts'
import { type StepRow, stepBlock } from '../../server/monitor/step-log.ts'
import { openStore } from '../../server/store/open.ts'
import { twoSegments } from '../helpers/skids.ts'
import { tempDir } from './bench.ts'

const skid = twoSegments()
const stepMs = 30_000
const about = { title: 'a run', skidId: skid.skid, toolVersion: '9.9.9' }

/** Steps of an invented run: production from step `on` on, then what `of` says of its first segment. */
function runOf(steps: number, on: number, fromMs: number, of: (k: number) => { ratio: number | null; flowMlMin: number | null }) {
  const store = openStore(tempDir())
  onTestFinished(() => store.close())
  const pair = createPair(store, {
    kind: 'imported', about: 'x.csv', skidId: skid.skid, title: 'a run', skidFile: 'x.yaml', skidText: '', startedMs: fromMs, toolVersion: '9.9.9', state: 'live',
  }) // biome-ignore format: a list
  const rows = Array.from({ length: steps }, (_, k): StepRow => {
    const { ratio, flowMlMin } = k < on ? { ratio: null, flowMlMin: null } : of(k - on)
    const entry = { ratio, dpBar: ratio === null ? null : 2 * ratio, flowMlMin, tempC: -20 }
    return { tMs: fromMs + k * stepMs, production: k >= on, segments: skid.segments.map(() => entry), growth: [] }
  })
  store.sequence.append([{ run: pair.stepsRun, entries: [{ kind: 'rows', block: stepBlock(rows, skid.segments.length, null) }] }])
  return { store, skid, ...pair }
}
const id = skid.segments[0]!.id

describe('runs laid over each other', () => {
  it('two that began at other times and fed on after 5 and 50 min stand on one axis from their first step in production on', () => {
    const short = runOf(300, 10, Date.UTC(2031, 0, 1), (k) => ({ ratio: 1 + k / 1000, flowMlMin: 60 }))
    const long = runOf(2000, 100, Date.UTC(2031, 5, 7, 3), (k) => ({ ratio: 1 + k / 2000, flowMlMin: 60 }))
    for (const [p, on, slope] of [[short, 10, 1 / 1000], [long, 100, 1 / 2000]] as const) {
      const c = comparedRun(p, about, id, 'feed-on', 2000)
      const span = p.store.sequence.span(p.stepsRun)!
      expect(c.zeroMs).toBe(span.fromMs + on * stepMs)
      const at = c.x.findIndex((x) => x >= 1)
      // Hand figure: an hour is 120 steps.
      expect(c.ratio.mean[at]!).toBeCloseTo(1 + 120 * slope, 2)
      expect(c.dpBar.mean[at]!).toBeCloseTo(2 * c.ratio.mean[at]!, 6)
      expect(c.x[0]).toBeLessThan(0.01)
    }
  }) // biome-ignore format: pairs

  it('by volume an hour at 60 mL/min is 3.6 L; an hour in which no flow is known adds none and draws none', () => {
    const p = runOf(600, 0, Date.UTC(2031, 0, 1), (k) =>
      k >= 120 && k < 240 ? { ratio: null, flowMlMin: null } : { ratio: 1, flowMlMin: 60 },
    )
    const c = comparedRun(p, about, id, 'volume', 600)
    const known = c.x.filter((_, i) => c.ratio.mean[i] !== null)
    expect(known.filter((x) => x > 3.65 && x < 3.68).length).toBeLessThanOrEqual(1)
    // 600 steps less the 120 without flow, 30 mL each.
    expect(c.x.at(-1)!).toBeCloseTo(480 * 0.03, 1)
    for (let i = 1; i < c.x.length; i++) expect(c.x[i]!).toBeGreaterThanOrEqual(c.x[i - 1]!)
  })

  it('every ratio lies in the extremes of its bucket, in 30 buckets as in 2000', () => {
    const p = runOf(900, 7, Date.UTC(2031, 0, 1), (k) => ({ ratio: k === 333 ? 1.9 : 1 + 0.01 * Math.sin(k), flowMlMin: 50 }))
    for (const buckets of [30, 2000]) {
      const c = comparedRun(p, about, id, 'feed-on', buckets)
      const highs = c.ratio.max.filter((v) => v !== null)
      expect(Math.max(...highs)).toBeCloseTo(1.9, 12)
      expect(c.x.length).toBeLessThanOrEqual(buckets)
    }
  })

  it('refuses, with the mend, a segment that is not there, a run without production, and a baseline that never was', () => {
    const p = runOf(50, 10, 0, () => ({ ratio: 1, flowMlMin: 60 }))
    expect(() => comparedRun(p, about, 'R9', 'feed-on', 100)).toThrow(/no segment 'R9'/)
    expect(() => comparedRun(p, about, id, 'baseline', 100)).toThrow(/no baseline of/)
    const never = runOf(50, 50, 0, () => ({ ratio: 1, flowMlMin: 60 }))
    expect(() => comparedRun(never, about, id, 'feed-on', 100)).toThrow(/no production/)
  })
})
