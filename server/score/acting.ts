import type { Cause } from '../core/report.ts'
import type { Truth } from '../core/sim/truth.ts'
import type { SegmentSpec, Skid } from '../core/skid.ts'

export const ms = (time: string): number => Date.parse(time)
export const within = (t: number, spans: readonly { readonly from: string; readonly to: string }[]): boolean =>
  spans.some((s) => t >= ms(s.from) && t < ms(s.to))
export const production = (truth: Truth) => truth.phases.filter((p) => p.phase === 'production')

/**
 * How long after it happened a thing may still be the reason of an alarm, seconds: a slug is gone in minutes, what shifts a level is
 * noticed by a chart within an hour or two. The project's own choice; the same for every tool that is scored.
 */
const lingers: Readonly<Record<string, { readonly cause: Cause; readonly seconds: number }>> = {
  gasSlug: { cause: 'gas', seconds: 600 },
  backPressure: { cause: 'back-pressure', seconds: 3600 },
  feedConcentration: { cause: 'composition', seconds: 7200 },
  pumpSlip: { cause: 'pump', seconds: 3600 },
}

/** Tags whose fault would change what is computed of a segment's ΔP: its taps and the flows of its streams. */
export function tagsOf(segment: SegmentSpec, skid: Skid): readonly string[] {
  const dp = segment.dp
  const taps = dp.kind === 'taps' ? [dp.pressureIn, dp.pressureOut] : dp.kind === 'dp' ? [dp.dpTag] : [dp.pressureIn]
  return [...taps, ...skid.streams.filter((s) => segment.streams.includes(s.id)).map((s) => s.flowTag)]
}

/**
 * What other than a deposit truly acts on a segment at an instant, as causes an alarm may name. A step of flow or coolant is not among
 * them: a change that flow or viscosity explains should raise nothing, whatever it is called.
 */
export function actingCauses(truth: Truth, skid: Skid, segmentId: string, tMs: number): ReadonlySet<Cause> {
  const causes = new Set<Cause>()
  const segment = skid.segments.find((s) => s.id === segmentId)
  for (const c of truth.confounders) {
    const rule = lingers[c.kind]
    if (rule === undefined) continue
    const stream = c['stream']
    if (typeof stream === 'string' && segment !== undefined && !segment.streams.includes(stream)) continue
    const until = c.until === undefined ? ms(c.at) + (c.overS ?? 0) * 1000 : ms(c.until)
    if (tMs >= ms(c.at) && tMs <= until + rule.seconds * 1000) causes.add(rule.cause)
  }
  const tags = segment === undefined ? [] : tagsOf(segment, skid)
  for (const f of truth.sensorFaults) {
    if (tags.includes(f.tag) && tMs >= ms(f.start) && tMs <= ms(f.end) + 600_000) causes.add('sensor')
  }
  for (const f of truth.fouling) {
    if (f.cause === 'filter' && f.segment === segmentId && tMs >= ms(f.onset) && tMs <= ms(f.end)) causes.add('filter')
  }
  return causes
}
