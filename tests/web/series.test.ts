import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { emptyRun, grow, longest, putTrends } from '../../web/model/run-data.ts'
import { gapsOf, growingSeries, type Point, thin } from '../../web/model/series.ts'
import { sceneOf, t0 } from '../helpers/scene.ts'

const at = (x: number, y = 1): Point => ({ x, y })

describe('a growing series', () => {
  it('puts an empty point between neighbours further apart than the gap, and none between others', () => {
    const s = growingSeries(25)
    for (const x of [0, 10, 20, 60, 70]) s.push(at(x))
    expect(s.points().map((p) => [p.x, p.y])).toEqual([
      [0, 1],
      [10, 1],
      [20, 1],
      [40, null],
      [60, 1],
      [70, 1],
    ])
    expect(gapsOf(s.points())).toEqual([{ fromMs: 20, toMs: 60 }])
  })
  it('fills what was missed while cut off and keeps live points of the same time', () => {
    const s = growingSeries(25)
    for (const x of [0, 10, 60]) s.push(at(x, 2))
    s.fill([at(10, 9), at(20), at(30), at(40), at(50)])
    expect(s.points().map((p) => [p.x, p.y])).toEqual([
      [0, 2],
      [10, 2],
      [20, 1],
      [30, 1],
      [40, 1],
      [50, 1],
      [60, 2],
    ])
  })
  it('stays flat in memory: a million points with room for 1000 keep no more than 1250', () => {
    const s = growingSeries(2, 1000)
    let most = 0
    for (let x = 0; x < 1e6; x += 1) {
      s.push(at(x))
      if (x % 5000 === 0) most = Math.max(most, s.points().length)
    }
    expect(most).toBeLessThanOrEqual(1252)
  })
  it('drops points that do not come later than the last, so that a line never runs back', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 0, max: 100 })), (xs) => {
        const s = growingSeries(5)
        for (const x of xs) s.push(at(x))
        const got = s.points().map((p) => p.x)
        expect(got).toEqual([...got].sort((a, b) => a - b))
      }),
    )
  })
})

describe('thinning', () => {
  it('keeps a spike of one sample in 100 000 visible in 1000 buckets', () => {
    const points = Array.from({ length: 100_000 }, (_, i) => at(i, i === 54_321 ? 9 : 1))
    const out = thin(points, 1000)
    expect(out.length).toBeLessThanOrEqual(1000)
    expect(Math.max(...out.map((p) => p.high ?? 0))).toBe(9)
  })
  it('never widens the range, never closes a gap and never gives more than asked plus its gaps', () => {
    const point = fc.record({
      step: fc.integer({ min: 1, max: 9 }),
      y: fc.oneof(fc.constant(null), fc.double({ min: -5, max: 5, noNaN: true })),
    })
    fc.assert(
      fc.property(fc.array(point, { minLength: 50, maxLength: 300 }), (raw) => {
        let x = 0
        const points: Point[] = raw.map((p) => {
          x += p.step
          return { x, y: p.y }
        })
        const out = thin(points, 20)
        const known = points.flatMap((p) => (p.y === null ? [] : [p.y]))
        const kept = out.flatMap((p) => (p.y === null ? [] : [p.low ?? p.y, p.high ?? p.y]))
        if (known.length > 0) {
          expect(Math.min(...kept)).toBe(Math.min(...known))
          expect(Math.max(...kept)).toBe(Math.max(...known))
        }
        const gaps = points.filter((p, i) => p.y === null && points[i - 1]?.y != null).length
        expect(out.length).toBeLessThanOrEqual(20 + 3 * gaps + 2)
      }),
    )
  })
})

describe('what a page knows of a run', () => {
  const scene = sceneOf({ gap: true })
  it('takes fetched buckets, then live steps and frames after them, without a seam', () => {
    const data = emptyRun(scene.detail, scene.marks)
    putTrends(data, scene.trends(t0, scene.endMs, 720))
    const before = data.segments.get('S2')!.ratio.points().length
    const segments = scene.facts.segments.map(() => ({ ratio: 1.2, dpBar: 2, flowMlMin: 150, tempC: -18, cusum: 0.2, cusumLow: 0 }))
    grow(
      data,
      [{ tMs: scene.endMs + 15_000, production: true, segments }],
      [{ fromMs: scene.endMs, toMs: scene.endMs + 15_000, tags: scene.facts.tags.map(() => ({ min: 1, max: 3, mean: 2 })) }],
    )
    expect(data.segments.get('S2')!.ratio.points().length).toBe(before + 1)
    expect(data.tags.get('PT-00')!.points().at(-1)).toEqual({ x: scene.endMs + 7500, y: 2, low: 1, high: 3 })
    // No row from minute 216 to 226.8: of 30 s buckets, the last known is centred on 215.75, the next on 227.25.
    expect(gapsOf(data.heard.points()).map((g) => (g.toMs - g.fromMs) / 60_000)).toEqual([11.5])
    expect(longest(data)).toBeGreaterThan(600)
  })
  it('a frame that holds a whole outage does not stretch what counts as a gap', () => {
    const data = emptyRun(scene.detail, scene.marks)
    const frame = (from: number, to: number, value: number | null) => ({
      fromMs: from,
      toMs: to,
      tags: scene.facts.tags.map(() => (value === null ? null : { min: value, max: value, mean: value })),
    })
    grow(data, [], [frame(0, 1000, 1), frame(1000, 3_600_000, 1), frame(3_600_000, 3_601_000, 1), frame(4_300_000, 4_301_000, 1)])
    expect(gapsOf(data.heard.points()).length).toBe(3)
  })
})
