import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { depositShare, drawnShare, exaggerationFor, openPct } from '../../web/model/bore.ts'
import { fanEdge } from '../../web/model/fan.ts'
import { layoutLine } from '../../web/model/line-layout.ts'
import { valuesAt } from '../../web/model/overlay.ts'
import { emptyRun, putTrends } from '../../web/model/run-data.ts'
import { trendKinds, trendSpec } from '../../web/model/trend-spec.ts'
import { alarmOf, factsOf, sceneOf, t0 } from '../helpers/scene.ts'

const hour = 3_600_000

describe('deposit', () => {
  // Uniform deposit, laminar, round bore: r = (1 − δ/a)^−4. Hand figures: 5, 10, 20 and 30 % off the diameter give 1.23, 1.52, 2.44 and 4.16.
  it.each([
    [1.2277, 0.05],
    [1.5242, 0.1],
    [2.4414, 0.2],
    [4.1649, 0.3],
  ])('at a ratio of %d takes %d of the radius', (ratio, share) => {
    expect(depositShare(ratio)).toBeCloseTo(share, 4)
  })
  it('is nothing at and below clean, unknown where the ratio is, and never drawn shut', () => {
    expect([depositShare(1), depositShare(0.97), drawnShare(1.015, 5)]).toEqual([0, 0, 0])
    expect([depositShare(null), drawnShare(undefined, 5), openPct(null)]).toEqual([null, null, null])
    expect(drawnShare(50, 5)).toBe(0.97)
    expect(openPct(2.4414)).toBeCloseTo(80, 2)
  })
  it('is drawn 5 times where the limit is near, less where 5 times would shut the bore before the limit', () => {
    expect([exaggerationFor([1.8]), exaggerationFor([2.4, 4]), exaggerationFor([9]), exaggerationFor([])]).toEqual([5, 4, 2, 5])
  })
})

describe('edge of the forecast', () => {
  it('runs from the ratio now to the limit at its time and bends upwards, as an even deposit does', () => {
    const edge = fanEdge(0, 1.3, 2, 4 * hour, 5)
    expect(edge[0]).toEqual({ x: 0, y: expect.closeTo(1.3, 9) })
    expect(edge.at(-1)).toEqual({ x: 4 * hour, y: expect.closeTo(2, 9) })
    const rises = edge.slice(1).map((p, i) => p.y! - edge[i]!.y!)
    for (let i = 1; i < rises.length; i++) expect(rises[i]!).toBeGreaterThan(rises[i - 1]!)
  })
  it('is empty when the limit lies below, or in the past', () => {
    expect([fanEdge(0, 2, 1.5, hour), fanEdge(hour, 1.1, 2, hour)]).toEqual([[], []])
  })
})

describe('layout of the line', () => {
  it.each([1, 2, 3, 5, 7, 8, 12])('with %d segments keeps each inside, none over another, none too narrow for its figures', (n) => {
    const l = layoutLine(factsOf({ segments: n }))
    const main = l.segments.filter((s) => s.main)
    expect(main.length).toBe(n)
    expect(l.rows.length).toBe(n > 7 ? 2 : 1)
    for (const s of l.segments) {
      expect(s.x).toBeGreaterThanOrEqual(0)
      expect(s.x + s.w).toBeLessThanOrEqual(1000)
      expect(s.w).toBeGreaterThanOrEqual(s.main ? 75 : 56)
      expect(s.y + s.half).toBeLessThan(l.height)
    }
    for (const row of l.rows.keys()) {
      const mine = main.filter((s) => s.row === row)
      for (let i = 1; i < mine.length; i++) expect(mine[i]!.x).toBeGreaterThanOrEqual(mine[i - 1]!.x + mine[i - 1]!.w)
    }
  })
  it('brings every stream in exactly once', () => {
    for (const n of [1, 3, 6, 12]) {
      const streams = layoutLine(factsOf({ segments: n })).feeds.flatMap((f) => f.streams)
      expect([...streams].sort()).toEqual(n === 1 ? ['A'] : n < 3 ? ['A', 'B'] : ['A', 'B', 'C'])
    }
  })
})

describe('a trend', () => {
  const scene = sceneOf({ gap: true, alarms: [alarmOf(1)] })
  const data = emptyRun(scene.detail, scene.marks)
  putTrends(data, scene.trends(t0, scene.endMs, 720))
  const view = { segment: 'S2', fromMs: t0, toMs: scene.endMs + 3 * hour, atMs: scene.endMs, alarms: scene.state.alarms }
  const of = (kind: (typeof trendKinds)[number], more: Partial<typeof view> = {}) =>
    trendSpec(data, scene.state, scene.marks, { ...view, ...more, kind })

  it.each(trendKinds)('of %s names its quantity and unit on the axis', (kind) => {
    expect(of(kind).yTitle).toMatch(/^[\wΔ]+ \[(–|bar|°C|kg\/h|mL\/min|mol\/mol)\]$/)
    expect(of(kind).zone).toBe('Europe/Amsterdam')
    expect(of(kind).lines.length).toBeGreaterThan(0)
  })
  it('of the feed ratio turns readings into mol/mol: 4 kg/h over 2 kg/h at 3 and 1.5 mol per kg/h is 4, within the extremes of either', () => {
    const data = emptyRun(
      {
        ...scene.detail,
        skidFacts: {
          ...scene.facts,
          streams: scene.facts.streams.map((s, i) => ({ ...s, molHPerFlowUnit: i === 0 ? 1.5 : 3 })),
        },
      },
      scene.marks,
    )
    data.tags.get('FT-1')!.push({ x: scene.endMs - 1000, y: 2, low: 1.6, high: 2.5 })
    data.tags.get('FT-3')!.push({ x: scene.endMs - 1000, y: 4, low: 3.2, high: 5 })
    const spec = trendSpec(data, scene.state, scene.marks, {
      kind: 'feed-ratio', segment: 'S3', fromMs: scene.endMs - 3_600_000, toMs: scene.endMs, atMs: scene.endMs, alarms: [],
    }) // biome-ignore format: a list
    expect(spec.yTitle).toBe('ratio [mol/mol]')
    expect(spec.lines[0]!.points.at(-1)).toEqual({ x: scene.endMs - 1000, y: 4, low: (2 * 3.2) / 2.5, high: (2 * 5) / 1.6 })
    expect(valuesAt(spec, scene.endMs)).toEqual([{ name: 'C : A', value: 4 }])
  })
  it('of ΔP shows beside it what a clean bore would show: ΔP over the ratio', () => {
    const [raw, clean] = of('dp').lines
    const at = raw!.points.findLastIndex((p) => p.y !== null)
    expect(clean!.points[at]!.y).toBeCloseTo(2.1, 9)
    expect(raw!.points[at]!.y!).toBeGreaterThan(2.2)
  })
  it('of the ratio carries baseline, limit with its change as a step, onset with interval, forecast and the gap', () => {
    const o = of('ratio').overlay
    expect(o.bands.map((b) => [b.low, b.high])).toEqual([[0.988, 1.012]])
    expect(o.limits[0]!.steps.map((s) => s.value)).toEqual([4.4 / 2.1, 4 / 2.1])
    expect(o.limits[0]!.label).toBe('ΔP limit 4.0 bar, was 4.4; demo operator')
    expect(o.onset?.label).toBe('began 00:00 (23:41 to 00:15, 90 %)')
    expect([o.fan?.lowMs, o.fan?.highMs]).toEqual([scene.endMs + 1.9 * hour, scene.endMs + 2.8 * hour])
    expect(o.fan?.mid.at(-1)?.y).toBeCloseTo(4 / 2.1, 6)
    expect(o.gaps.map((g) => g.label)).toEqual(['no data 00:35 to 00:47'])
    expect(o.notes.map((n) => n.label)).toEqual(['noticed 01:00'])
  })
  it('knows nothing later than the moment shown: no alarm, no change of limit that came after it', () => {
    const early = of('ratio', { atMs: t0 + hour }).overlay
    expect(early.alarms).toEqual([])
    expect(early.notes).toEqual([])
    expect(early.limits[0]!.steps.length).toBe(1)
  })
  it('keeps every drawn value inside its axis', () => {
    fc.assert(
      fc.property(fc.constantFrom(...trendKinds), fc.double({ min: 0.05, max: 1, noNaN: true }), (kind, share) => {
        const atMs = t0 + share * 6 * hour
        const spec = of(kind, { atMs, fromMs: t0 + share * 3 * hour })
        for (const l of spec.lines)
          for (const p of l.points)
            if (p.y !== null && p.x >= spec.fromMs && p.x <= atMs) {
              expect(p.y).toBeGreaterThanOrEqual(spec.low)
              expect(p.y).toBeLessThanOrEqual(spec.high)
            }
      }),
      { numRuns: 25 },
    )
  })
  it('hatches a ratio that is not known while production runs', () => {
    const lost = sceneOf({ ratio: null, alarms: [alarmOf(1)] })
    const d = emptyRun(lost.detail, lost.marks)
    putTrends(d, lost.trends(t0, lost.endMs, 720))
    const o = trendSpec(d, lost.state, lost.marks, { ...view, kind: 'ratio', alarms: [] }).overlay
    expect(o.gaps.map((g) => g.label)).toEqual(['no ratio 02:23 to 02:59'])
  })
})
