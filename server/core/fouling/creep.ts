import type { Bank } from '../bank/bank.ts'
import type { Layout } from '../derive/layout.ts'
import { fitOnset } from '../growth/onset.ts'
import type { Noise } from '../growth/points.ts'
import { type ChartState, readCharts, standing, startCharts, stepsPerPoint } from './charts.ts'
import { growthFrom } from './growths.ts'
import { type SegmentWatch, shownRatio, type WatchEvent } from './watch-state.ts'

/** A neighbour on the same stream that stands at this share of a segment's rise rises with it. */
const alikeShare = 0.5

/**
 * Creeping growth, too slow for the bank's window: the charts decide. Segments of one stream that rise together share another cause; a fall below
 * clean is told once. Their charts begin anew from where they stand. While the bank weighs another explanation, within half an hour, its verdict is
 * waited for.
 */
export function creep(
  layout: Layout,
  watch: readonly SegmentWatch[],
  noiseOf: (segment: number) => Noise,
  endMs: number,
  bank: Pick<Bank, 'declare' | 'weighs'>,
): WatchEvent[] {
  const promise = layout.skid.detection
  const events: WatchEvent[] = []
  const anew = (i: number, ratio: number): ChartState => startCharts(promise, layout.segments.length, noiseOf(i), Math.log(ratio))
  layout.segments.forEach((g, i) => {
    const w = watch[i]!
    if (w.charts === null || w.growth !== null || w.recent.length === 0) return
    const reading = readCharts(w.charts, promise.riseToFindPct)
    const ratio = shownRatio(w)
    if (reading.below) {
      const share = 1 - ratio / Math.exp(w.charts.zeroLn)
      w.charts = anew(i, ratio)
      events.push({ kind: 'below', segment: i, ratio, share })
      return
    }
    if (!reading.alarms || bank.weighs(i)) return
    const own = standing(w.charts)
    const alike = watch.filter((o, j) => {
      const together = j !== i && layout.segments[j]!.streams.some((x) => g.streams.includes(x))
      return together && o.charts !== null && o.growth === null && o.recent.length > 0 && standing(o.charts) > alikeShare * own
    })
    if (alike.length > 0) {
      for (const o of [w, ...alike]) {
        const j = watch.indexOf(o)
        const read = readCharts(o.charts!, promise.riseToFindPct)
        events.push({ kind: 'creep', segment: j, onset: null, ratio: shownRatio(o), reading: read, shared: true })
        o.charts = anew(j, shownRatio(o))
      }
      return
    }
    const points = w.charts.points.map((p) => ({ tMs: p.tMs, lnRatio: p.lnRatio + w.charts!.zeroLn }))
    const noise = noiseOf(i)
    const onset = fitOnset(points, { ...noise, stepS: stepsPerPoint * noise.stepS }, points[0]!.tMs)
    bank.declare(i)
    w.growth = growthFrom(points, onset, Math.log(ratio), endMs)
    w.hindsight = onset
    events.push({ kind: 'creep', segment: i, onset, ratio, reading, shared: false })
  })
  return events
}
