import { MonitorError } from '../core/errors.ts'
import { mostBuckets } from '../store/readings.ts'
import type { ComparedBy, ComparedRun } from '../wire/comparison.ts'
import { stepTag } from './step-log.ts'
import { bandOf, marksOf, type RunParts } from './trends.ts'

type About = { readonly title: string; readonly skidId: string; readonly toolVersion: string }

/**
 * One segment of one run from its zero on, in at most `buckets` buckets.
 * Errors: TAG_UNKNOWN for a segment that the skid has not, STORE_DATA for a run without production or, by its baseline, without one.
 */
export function comparedRun(p: RunParts, about: About, segment: string, by: ComparedBy, buckets: number): ComparedRun {
  const i = p.skid.segments.findIndex((s) => s.id === segment)
  if (i < 0)
    throw new MonitorError('TAG_UNKNOWN', `the skid of run ${p.run} has no segment '${segment}'`, {
      hint: `runs can be laid over each other in a segment that both have; it has ${p.skid.segments.map((s) => s.id).join(', ')}`,
    })
  const baseline = marksOf(p).baselines.findLast((b) => b.segment === segment) ?? null
  const zeroMs = by === 'baseline' ? (baseline?.fromMs ?? null) : feedOn(p)
  if (zeroMs === null)
    throw new MonitorError(
      'STORE_DATA',
      `run ${p.run} has no ${by === 'baseline' ? `baseline of ${segment}` : 'production'} to begin at`,
      {
        hint: 'choose another run, or another beginning',
      },
    )
  const toMs = Math.max(zeroMs, p.store.sequence.span(p.stepsRun)?.toMs ?? zeroMs) + 1
  const tags = (['ratio', 'dpBar', 'flowMlMin'] as const).map((c) => stepTag(i, c))
  const e = p.store.readings.envelope(p.stepsRun, tags, zeroMs, toMs, buckets)
  const [ratio, dpBar, flow] = e.tags.map(bandOf) as [
    ReturnType<typeof bandOf>,
    ReturnType<typeof bandOf>,
    ReturnType<typeof bandOf>,
  ]
  // The first bucket of the fixed grid may begin before zero.
  const middle = (n: number): number => Math.max(zeroMs, e.fromMs + (n + 0.5) * e.bucketMs)
  let litres = 0
  const x = flow.mean.map((mlMin, n) => {
    if (by !== 'volume') return (middle(n) - zeroMs) / 3_600_000
    const begun = Math.max(zeroMs, e.fromMs + n * e.bucketMs)
    const through = ((mlMin ?? 0) * Math.max(0, e.fromMs + (n + 1) * e.bucketMs - begun)) / 60_000 / 1000
    litres += through
    return litres - through / 2
  })
  const { run } = p
  const base = baseline === null ? null : (({ segment: _, ...rest }) => rest)(baseline)
  return { run, title: about.title, skid: about.skidId, toolVersion: about.toolVersion, zeroMs, baseline: base, x, ratio, dpBar }
}

/** End of the first step in production, by looking closer until a bucket holds one step; null where there is none. */
function feedOn(p: RunParts): number | null {
  const span = p.store.sequence.span(p.stepsRun)
  if (span === null) return null
  let [fromMs, toMs] = [span.fromMs, span.toMs + 1]
  for (;;) {
    const e = p.store.readings.envelope(p.stepsRun, [0], fromMs, toMs, mostBuckets)
    const { count, max } = e.tags[0]!
    const n = max.findIndex((v, k) => count[k]! > 0 && v >= 0.5)
    if (n < 0) return null
    const begin = Math.max(fromMs, e.fromMs + n * e.bucketMs)
    const end = Math.min(toMs, e.fromMs + (n + 1) * e.bucketMs)
    if (end - begin <= 1 || (begin === fromMs && end === toMs)) return begin
    ;[fromMs, toMs] = [begin, end]
  }
}
