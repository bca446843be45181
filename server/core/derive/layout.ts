import type { SegmentSpec, Skid } from '../skid.ts'
import { units, valueUnit } from '../units.ts'

/** A skid file with every name turned into an index, so that the hot path touches arrays only. */
export interface Layout {
  readonly skid: Skid
  readonly streams: readonly StreamLayout[]
  readonly segments: readonly SegmentLayout[]
  /** Pressure tags used as taps, in order of first use. */
  readonly taps: readonly TapLayout[]
}

export interface StreamLayout {
  readonly id: string
  readonly tag: number
  readonly isMass: boolean
  /** Span of the flow tag in SI; 0 where the file gives no range. */
  readonly spanSi: number
}

export interface TapLayout {
  readonly tag: number
  readonly name: string
  /** Segments it feeds (as inlet) or ends (as outlet). */
  readonly inletOf: readonly number[]
  readonly outletOf: readonly number[]
  readonly spanPa: number | null
}

export interface SegmentLayout {
  readonly spec: SegmentSpec
  readonly streams: readonly number[]
  /** Index into `taps`; null for a dp cell or a held outlet. */
  readonly tapIn: number | null
  readonly tapOut: number | null
  readonly dpTag: number | null
  readonly dpSpanPa: number | null
  /** Tag index of the inlet pressure, for limits; null with a dp cell. */
  readonly inTag: number | null
  readonly outHeldPa: number
  readonly temperatures: readonly number[]
  readonly coolant: number | null
}

export function layoutOf(skid: Skid): Layout {
  const tagIndex = new Map(skid.tags.map((t, i) => [t.tag, i]))
  const index = (tag: string): number => tagIndex.get(tag) ?? -1
  const streamIndex = new Map(skid.streams.map((s, i) => [s.id, i]))
  const spanOf = (i: number): number | null => {
    const spec = skid.tags[i]
    const unit = spec === undefined ? null : valueUnit(spec)
    return spec?.range == null || unit === null ? null : (spec.range[1] - spec.range[0]) * units[unit].factor
  }
  const streams = skid.streams.map((s) => {
    const tag = index(s.flowTag)
    return { id: s.id, tag, isMass: skid.tags[tag]?.quantity === 'massFlow', spanSi: spanOf(tag) ?? 0 }
  })
  const taps: { tag: number; name: string; inletOf: number[]; outletOf: number[]; spanPa: number | null }[] = []
  const tap = (name: string): number => {
    const found = taps.findIndex((t) => t.name === name)
    if (found >= 0) return found
    return taps.push({ tag: index(name), name, inletOf: [], outletOf: [], spanPa: spanOf(index(name)) }) - 1
  }
  const segments = skid.segments.map((spec, s): SegmentLayout => {
    const dp = spec.dp
    const tapIn = dp.kind === 'dp' ? null : tap(dp.pressureIn)
    const tapOut = dp.kind === 'taps' ? tap(dp.pressureOut) : null
    if (tapIn !== null) taps[tapIn]!.inletOf.push(s)
    if (tapOut !== null) taps[tapOut]!.outletOf.push(s)
    return {
      spec,
      streams: spec.streams.map((id) => streamIndex.get(id) ?? -1).filter((i) => i >= 0),
      tapIn,
      tapOut,
      dpTag: dp.kind === 'dp' ? index(dp.dpTag) : null,
      dpSpanPa: dp.kind === 'dp' ? spanOf(index(dp.dpTag)) : null,
      inTag: tapIn === null ? null : taps[tapIn]!.tag,
      outHeldPa: dp.kind === 'held' ? dp.outBar * 1e5 : 0,
      temperatures: spec.temperatures.map(index),
      coolant: spec.coolantTemperature === null ? null : index(spec.coolantTemperature),
    }
  })
  return { skid, streams, segments, taps }
}
