import type { Band, Marks, ReadingFrame, RunDetail, StepPoint, Trends } from '../../server/wire/index.ts'
import { type ZoneClock, zoneClock } from './clock.ts'
import { type GrowingSeries, growingSeries, type Point } from './series.ts'

export interface SegmentSeries {
  readonly ratio: GrowingSeries
  readonly dpBar: GrowingSeries
  readonly flowMlMin: GrowingSeries
  /** CUSUM of the promise's chart over its decision interval, upper and lower side. */
  readonly cusum: GrowingSeries
  readonly cusumLow: GrowingSeries
}

const segmentSeries = ['ratio', 'dpBar', 'flowMlMin', 'cusum', 'cusumLow'] as const

/** What the pages know of one run. Series are those of the window last fetched, and of what came live since. */
export interface RunData {
  readonly detail: RunDetail
  readonly clock: ZoneClock
  readonly marks: Marks
  readonly segments: ReadonlyMap<string, SegmentSeries>
  readonly tags: ReadonlyMap<string, GrowingSeries>
  /** Where at least one tag read: its gaps are the gaps of the log. */
  readonly heard: GrowingSeries
  /** 1 in production, 0 not. */
  readonly production: GrowingSeries
  readonly window: { fromMs: number; toMs: number }
}

/** Of what a run of an older build does not hold. */
const unknownBand: Band = { min: [], max: [], mean: [] }

/** Longest silence of a tag that is not yet a gap (DSP-11). */
const quietMs = 15_000

export function emptyRun(detail: RunDetail, marks: Marks): RunData {
  const f = detail.skidFacts
  const stepGap = 2200 * f.stepSeconds
  return {
    detail,
    marks,
    clock: zoneClock(f.timeZone),
    segments: new Map(
      f.segments.map((s) => [
        s.id,
        Object.fromEntries(segmentSeries.map((name) => [name, growingSeries(stepGap)])) as unknown as SegmentSeries,
      ]),
    ),
    tags: new Map(f.tags.map((t) => [t.tag, growingSeries(quietMs)])),
    heard: growingSeries(quietMs),
    production: growingSeries(Infinity),
    window: { fromMs: 0, toMs: 0 },
  }
}

/** Puts a fetched window in place of what the series held; live points after its end stay, unless the window lies in the past and they would grow unseen. */
export function putTrends(data: RunData, t: Trends, keepLater = true): void {
  const end = t.fromMs + t.buckets * t.bucketMs
  const put = (series: GrowingSeries | undefined, band: Band) => {
    if (series === undefined) return
    series.spacing(t.bucketMs)
    const later = keepLater ? series.points().filter((p) => p.x >= end) : []
    const points: Point[] = band.mean.map((y, i) => ({
      x: t.fromMs + (i + 0.5) * t.bucketMs,
      y,
      low: band.min[i] ?? null,
      high: band.max[i] ?? null,
    }))
    series.clear()
    series.fill([...points, ...later])
  }
  for (const s of t.segments) {
    const own = data.segments.get(s.segment)
    for (const name of segmentSeries) put(own?.[name], s[name] ?? unknownBand)
  }
  for (const s of t.tags) put(data.tags.get(s.tag), s)
  const any = Array.from({ length: t.buckets }, (_, i) => (t.tags.some((s) => s.mean[i] != null) ? 1 : null))
  put(data.heard, { min: any, max: any, mean: any })
  const on = t.production.map((p) => (p === null ? null : p ? 1 : 0))
  put(data.production, { min: on, max: on, mean: on })
}

/** Longest stretch between two frames of a feed in order, in the run's time: three seconds of the wall, or the quiet that a log may keep. */
export const rhythmMs = (speed: number): number => Math.max(quietMs, 3000 * speed)

/** New steps and readings at the end of the series. */
export function grow(
  data: RunData,
  steps: readonly StepPoint[],
  frames: readonly ReadingFrame[],
  speed = 1,
  lastMs = Infinity,
): void {
  const ids = data.detail.skidFacts.segments.map((s) => s.id)
  for (const s of steps) {
    s.segments.forEach((v, i) => {
      const own = data.segments.get(ids[i] ?? '')
      for (const name of segmentSeries) own?.[name].push({ x: s.tMs, y: v[name] })
    })
    data.production.push({ x: s.tMs, y: s.production ? 1 : 0 })
  }
  const tags = data.detail.skidFacts.tags
  for (const f of frames) {
    // A bucket may reach past the newest reading; nothing is known there.
    const toMs = Math.min(f.toMs, lastMs)
    if (toMs < f.fromMs) continue
    const x = (f.fromMs + toMs) / 2
    // A frame longer than the feed's rhythm is what was missed while cut off: it does not stretch what counts as a gap.
    const widthMs = Math.min(toMs - f.fromMs, rhythmMs(speed))
    f.tags.forEach((v, i) => {
      const own = data.tags.get(tags[i]?.tag ?? '')
      own?.widen(widthMs)
      if (v !== null) own?.push({ x, y: v.mean, low: v.min, high: v.max })
    })
    data.heard.widen(widthMs)
    if (f.tags.some((v) => v !== null)) data.heard.push({ x, y: 1 })
  }
}

/** Points held in the longest series: past a few thousand the window is fetched again in buckets, so that memory does not grow with the run. */
export const longest = (data: RunData): number => Math.max(0, ...[...data.tags.values()].map((s) => s.points().length))
