import type { PipelineEvent } from '../core/pipeline/events.ts'
import { limitNames } from '../core/sequence.ts'
import type { Skid } from '../core/skid.ts'
import { valueUnit } from '../core/units.ts'
import type { RunId } from '../store/keys.ts'
import type { EnvelopeOfTag } from '../store/readings.ts'
import type { Band, Marks, ReadingFrame, StepPoint, Trends } from '../wire/trend.ts'
import { limitChanges, limitsOfSkid } from './live-state.ts'
import type { MonitorStore } from './needs.ts'
import { chartTag, hasCharts, readSteps, type StepRow, stepPoint, stepTag } from './step-log.ts'
import { baselineOf } from './stored-rows.ts'

export interface RunParts {
  readonly store: MonitorStore
  readonly skid: Skid
  readonly run: RunId
  readonly stepsRun: RunId
}

export const bandOf = (e: EnvelopeOfTag): Band => {
  const list = (of: Float64Array) => Array.from(of, (v, i) => (e.count[i] === 0 ? null : v))
  return { min: list(e.min), max: list(e.max), mean: list(e.mean) }
}

/** Trends over a span in at most so many buckets; ratios and what goes with them of all segments, readings of the tags asked for. */
export function trendsOf(p: RunParts, fromMs: number, toMs: number, buckets: number, tags: readonly string[]): Trends {
  const index = tags.map((tag) => p.skid.tags.findIndex((t) => t.tag === tag))
  const n = p.skid.segments.length
  const stepTags = [
    0,
    ...p.skid.segments.flatMap((_, i) => (['ratio', 'dpBar', 'flowMlMin', 'tempC'] as const).map((c) => stepTag(i, c))),
  ]
  if (hasCharts(n, p.store.sequence.count(p.stepsRun).width))
    stepTags.push(...p.skid.segments.flatMap((_, i) => (['cusum', 'cusumLow'] as const).map((c) => chartTag(n, i, c))))
  const steps = p.store.readings.envelope(p.stepsRun, stepTags, fromMs, toMs, buckets)
  const readings = p.store.readings.envelope(p.run, index, fromMs, toMs, buckets)
  return {
    run: p.run,
    fromMs: steps.fromMs,
    bucketMs: steps.bucketMs,
    buckets: steps.buckets,
    segments: p.skid.segments.map((s, i) => {
      const [ratio, dpBar, flowMlMin, tempC] = steps.tags.slice(1 + 4 * i, 5 + 4 * i).map(bandOf) as [Band, Band, Band, Band]
      const [cusum, cusumLow] = steps.tags.slice(1 + 4 * n + 2 * i, 3 + 4 * n + 2 * i).map(bandOf)
      return { segment: s.id, ratio, dpBar, flowMlMin, tempC, cusum: cusum ?? null, cusumLow: cusumLow ?? null }
    }),
    tags: readings.tags.map((e, i) => ({ tag: tags[i]!, unit: valueUnit(p.skid.tags[index[i]!]!), ...bandOf(e) })),
    production: Array.from(steps.tags[0]!.mean, (v, i) => (steps.tags[0]!.count[i] === 0 ? null : v >= 0.5)),
  }
}

/** Stored steps that ended in (afterMs, toMs], oldest first. */
export const stepsBetween = ({ store, skid, stepsRun }: RunParts, afterMs: number, toMs: number): StepRow[] =>
  readSteps(store, stepsRun, skid.segments.length, afterMs + 1, toMs + 1)

/** What a page that was cut off at `sinceMs` has missed: steps, at most the latest `most`, and readings in at most 600 frames. */
export function missedSince(p: RunParts, sinceMs: number, toMs: number, most = 2000) {
  const steps = stepsBetween(p, sinceMs, toMs)
  const points: StepPoint[] = steps.slice(-most).map(stepPoint)
  const readings: ReadingFrame[] = []
  if (toMs > sinceMs) {
    const e = p.store.readings.envelope(
      p.run,
      p.skid.tags.map((_, i) => i),
      sinceMs,
      toMs,
      600,
    )
    for (let b = 0; b < e.buckets; b++) {
      if (e.tags.every((t) => t.count[b] === 0)) continue
      const fromMs = e.fromMs + b * e.bucketMs
      readings.push({
        fromMs,
        toMs: fromMs + e.bucketMs,
        tags: e.tags.map((t) => (t.count[b] === 0 ? null : { min: t.min[b]!, max: t.max[b]!, mean: t.mean[b]! })),
      })
    }
  }
  return { steps: points, readings, moreFromMs: steps.length > most ? sinceMs : null }
}

/** What trends are drawn over: baselines, onsets, limits and their changes, forecasts, notes. */
export function marksOf({ store, skid, run }: RunParts): Marks {
  const fromMs = store.sequence.span(run)?.fromMs ?? 0
  const limits: Marks['limits'][number][] = limitsOfSkid(skid).flatMap((own, i) =>
    limitNames.map((limit) => ({
      segment: skid.segments[i]!.id,
      limit,
      fromMs,
      value: own[limit],
      person: null,
      reason: null,
    })),
  )
  const baselines: Marks['baselines'][number][] = []
  const onsets: Marks['onsets'][number][] = []
  const forecasts: Marks['forecasts'][number][] = []
  const notes: Marks['notes'][number][] = []
  // Of a run recorded before there were versions the acts tell of changed limits.
  const told = store.events.list(run)
  const hasVersions = told.some((e) => e.kind === 'configuration')
  for (const { tMs, body } of told) {
    const e = body as unknown as PipelineEvent
    if (e.kind === 'baseline') baselines.push({ segment: e.segment, ...baselineOf(e.baseline) })
    else if (e.kind === 'onset') {
      const { atMs, lowMs, highMs, level } = e.onset
      onsets.push({ segment: e.segment, foundMs: tMs, atMs, lowMs, highMs, level })
    } else if (e.kind === 'note') notes.push({ tMs: e.tMs, text: e.text })
    else if (e.kind === 'timeline') {
      for (const { segment, forecast: f } of e.points)
        if (f !== null)
          forecasts.push({
            segment,
            knownMs: e.tMs,
            limit: f.limit,
            atMs: f.atMs,
            lowMs: f.lowMs,
            highMs: f.highMs,
            level: f.level,
          })
    } else if (e.kind === 'configuration') {
      const { person, reason } = e.applied
      for (const { segment, limit, value } of limitChanges(e.applied.changes))
        limits.push({ segment, limit, fromMs: Math.max(e.tMs, fromMs), value, person, reason })
    } else if (!hasVersions && e.kind === 'act' && e.act.kind === 'limit') {
      const { segment, limit, value, person, reason } = e.act
      limits.push({ segment, limit, fromMs: e.act.tMs, value, person, reason })
    }
  }
  return { run, baselines, onsets, limits, forecasts, notes }
}
