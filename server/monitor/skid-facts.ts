import { stepScans } from '../core/derive/step.ts'
import { molPerKg } from '../core/fluids/reagent.ts'
import type { SegmentSpec, Skid, StreamSpec } from '../core/skid.ts'
import { toSi, valueUnit } from '../core/units.ts'
import type { SegmentFacts, SkidFacts } from '../wire/skid.ts'

export const stepMsOf = (skid: Skid): number => stepScans(skid.scanSeconds) * skid.scanSeconds * 1000

/** What a page needs to draw a skid. */
export function skidFacts(skid: Skid): SkidFacts {
  const leads = skid.segments.map((s) => leadsTo(skid, s))
  const main = longestPath(leads)
  const volume = skid.segments.reduce((sum, s, i) => sum + (main.has(i) ? (s.volumeMl ?? 0) : 0), 0)
  const segments = skid.segments.map((s, i): SegmentFacts => {
    const { dp, channel: c } = s
    const to = leads[i]!
    return {
      id: s.id,
      title: s.title,
      kind: s.kind,
      streams: s.streams,
      leadsTo: to < 0 ? null : skid.segments[to]!.id,
      main: main.has(i),
      share: main.has(i) && s.volumeMl !== null && volume > 0 ? s.volumeMl / volume : null,
      volumeMl: s.volumeMl,
      channel: c === null ? null : { boreMm: c.diameterMm, lengthM: c.lengthM, parallel: c.parallel },
      pressureIn: dp.kind === 'dp' ? null : dp.pressureIn,
      pressureOut: dp.kind === 'taps' ? dp.pressureOut : null,
      dpTag: dp.kind === 'dp' ? dp.dpTag : null,
      heldOutBar: dp.kind === 'held' ? dp.outBar : null,
      temperatures: s.temperatures,
      coolantTemperature: s.coolantTemperature,
      limits: {
        dpHighBar: s.limits.dpHighBar,
        dpHighHighBar: s.limits.dpHighHighBar,
        pressureHighBar: s.limits.pressureHighBar,
        temperatureHighC: s.limits.temperatureHighC,
        temperatureHighHighC: s.limits.temperatureHighHighC,
        temperatureLowC: s.limits.temperatureLowC,
        flowLow: s.limits.flowLow,
      },
      feedRatio: s.limits.feedRatio,
    }
  })
  return {
    skid: skid.skid,
    title: skid.title,
    timeZone: skid.timeZone,
    scanSeconds: skid.scanSeconds,
    lateSeconds: skid.lateSeconds,
    stepSeconds: stepMsOf(skid) / 1000,
    detection: skid.detection,
    tags: skid.tags.map((t) => ({ tag: t.tag, quantity: t.quantity, unit: valueUnit(t), range: t.range })),
    streams: skid.streams.map((s) => ({
      id: s.id,
      title: s.title,
      flowTag: s.flowTag,
      reagent: s.reagent?.name ?? null,
      waterPpm: s.waterPpm,
      molHPerFlowUnit: molHPerFlowUnit(skid, s),
    })),
    segments,
  }
}

/** Moles of a feed's reagent in an hour at a reading of 1, from mass by the feed's density and from volume by its concentration. */
function molHPerFlowUnit(skid: Skid, s: StreamSpec): number | null {
  const tag = skid.tags.find((t) => t.tag === s.flowTag)
  if (tag === undefined || s.reagent === null) return null
  const si = toSi(1, valueUnit(tag)) - toSi(0, valueUnit(tag))
  if (tag.quantity === 'volumeFlow') return 3600 * si * 1000 * s.reagent.concentrationMolL
  const perKg = molPerKg(s)
  return tag.quantity === 'massFlow' && perKg !== null ? 3600 * si * perKg : null
}

/** Index of the segment that begins at the tap where this one ends; with no tap in common, the next that carries all its streams; −1: none. */
function leadsTo(skid: Skid, s: SegmentSpec): number {
  const end = s.dp.kind === 'taps' ? s.dp.pressureOut : null
  const byTap = skid.segments.findIndex((t) => t !== s && end !== null && t.dp.kind !== 'dp' && t.dp.pressureIn === end)
  if (byTap >= 0) return byTap
  const at = skid.segments.indexOf(s)
  return skid.segments.findIndex((t, i) => i > at && s.streams.every((id) => t.streams.includes(id)))
}

/** Indices on the longest way through; the earliest start where two are as long. */
function longestPath(leads: readonly number[]): Set<number> {
  let best: number[] = []
  leads.forEach((_, start) => {
    const path: number[] = []
    for (let i = start; i >= 0 && !path.includes(i); i = leads[i]!) path.push(i)
    if (path.length > best.length) best = path
  })
  return new Set(best)
}
