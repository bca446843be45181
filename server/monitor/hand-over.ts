import type { HandOver } from '../wire/alarm-story.ts'
import { storyLines } from './alarm-story.ts'
import { alarmsAt, storedState } from './stored-state.ts'
import type { RunParts } from './trends.ts'

/** Stretches of a shift in which no tag read anything, in steps of at least ten seconds. */
function gapsOf(p: RunParts, fromMs: number, toMs: number): { gaps: HandOver['gaps']; stepMs: number } {
  const buckets = Math.max(2, Math.min(2000, Math.floor((toMs - fromMs) / Math.max(10_000, 2000 * p.skid.scanSeconds))))
  const all = p.skid.tags.map((_, i) => i)
  const e = p.store.readings.envelope(p.run, all, fromMs, toMs, buckets)
  const gaps: { fromMs: number; toMs: number }[] = []
  for (let i = 0; i < e.buckets; i++) {
    const from = Math.max(fromMs, e.fromMs + i * e.bucketMs)
    const to = Math.min(toMs, e.fromMs + (i + 1) * e.bucketMs)
    if (to <= from || e.tags.some((t) => t.count[i]! > 0)) continue
    const last = gaps.at(-1)
    if (last !== undefined && last.toMs === from) last.toMs = to
    else gaps.push({ fromMs: from, toMs: to })
  }
  // A bucket only partly in the shift may be empty by its cut alone.
  return { gaps: gaps.filter((g) => g.toMs - g.fromMs >= e.bucketMs), stepMs: e.bucketMs }
}

/** The latest step of each segment whose flush has begun and neither come to its last step's end nor been aborted. */
function flushInCourse(p: RunParts, toMs: number): HandOver['flush'] {
  const latest = new Map<string, HandOver['flush'][number]>()
  for (const { act } of p.store.sequence.acts(p.run))
    if (act.kind === 'flush-step' && act.tMs <= toMs && act.state !== 'refused')
      latest.set(act.segment, { segment: act.segment, step: act.step, state: act.state, atMs: act.tMs, person: act.person })
  return [...latest.values()].filter((f) => f.state !== 'aborted' && !(f.step === 'F6' && f.state !== 'started'))
}

/**
 * What stands at the end of a shift and what happened in it, from the run alone: the same again whenever it is asked for. Gaps are looked for up to
 * `heardToMs`, which lies before the end where the run's clock runs ahead of its readings.
 */
export function handOverOf(p: RunParts, fromMs: number, toMs: number, heardToMs = toMs): HandOver {
  const state = storedState(p, toMs)
  const rows = alarmsAt(p, toMs).all()
  const lines = storyLines(p, rows, fromMs, toMs)
  const raised = rows.filter((r) => r.raisedMs > fromMs && r.raisedMs <= toMs)
  const count = (priority: string) => raised.filter((r) => r.priority === priority).length
  const { gaps, stepMs } = gapsOf(p, fromMs, Math.max(fromMs + 1, Math.min(toMs, heardToMs)))
  return {
    run: p.run,
    fromMs,
    toMs,
    production: state.mode.production,
    segments: state.segments.map((s) => ({
      segment: s.segment,
      ratio: s.ratio,
      limitFromMs: s.forecast?.lowMs ?? null,
      limitToMs: s.forecast?.highMs ?? null,
    })),
    open: state.alarms.filter((a) => !['SHELVED', 'SBD', 'OOS'].includes(a.state)),
    shelved: state.alarms.filter((a) => a.state === 'SHELVED'),
    suppressed: state.alarms.filter((a) => a.state === 'SBD'),
    outOfService: state.alarms.filter((a) => a.state === 'OOS'),
    raised: {
      high: count('high'),
      medium: count('medium'),
      low: count('low'),
      over: raised.filter((r) => r.state === 'NORM').length,
    },
    flush: flushInCourse(p, toMs),
    advice: state.advice.map(({ atMs, action, segments, reason }) => ({ atMs, action, segments, reason })),
    gaps,
    gapStepMs: stepMs,
    badTags: state.tags.flatMap((t) => (t.quality === 'bad' ? [{ tag: t.tag, reason: t.reason }] : [])),
    changes: lines.filter((l) => l.what === 'change'),
    comments: lines.filter((l) => l.what === 'comment'),
  }
}
