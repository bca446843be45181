import type { Occurrence } from '../alarms/occurrence.ts'
import { MonitorError } from '../errors.ts'
import { type Given, type Operation, operationOf } from '../figures/operation.ts'
import { type SegmentFigures, skidFigures } from '../figures/segment-figures.ts'
import { viscosityFactors } from '../fluids/learned-factor.ts'
import type { Interval } from '../growth/points.ts'
import type { DepositReport, HeatReport, OutletReport, StreamReport } from '../report.ts'
import { type FlowSample, outletWindow } from '../rtd/outlet-window.ts'
import type { Skid } from '../skid.ts'
import { foulingResistance } from '../thermal/wall.ts'
import { cleanLevel } from './clean-level.ts'
import { depositInsight } from './deposit.ts'
import { outletOf, outletPath } from './outlet-path.ts'

/** What is known of one segment when the picture is drawn. */
export interface SegmentKnown {
  readonly baseline: { readonly dpPa: number; readonly sigma: number } | null
  readonly ratio: number | null
  /** Null without a deposit. */
  readonly growth: { readonly onset: Interval | null } | null
  /** Working point of its clean baseline. */
  readonly atBaseline: Given | null
}

export interface InsightInput {
  readonly skid: Skid
  readonly nowMs: number
  readonly now: Given | null
  readonly segments: readonly SegmentKnown[]
  readonly disturbances: readonly Occurrence[]
  /** Flow that left at the end of a segment, as `outletWindow` reads it. */
  readonly outletFlow: (segment: number) => readonly FlowSample[]
}

export interface Insight {
  readonly streams: readonly StreamReport[]
  readonly deposits: readonly (DepositReport | null)[]
  readonly heat: readonly (HeatReport | null)[]
  readonly outlet: readonly OutletReport[]
}

/** Share of a disturbance that may still be outside the window at either end (REC-14). */
const epsilon = 0.005

/** Null for what a liquid out of its range, or a bore too narrow, leaves open: nothing is drawn of it. */
function orNull<T>(f: () => T): T | null {
  try {
    return f()
  } catch (cause) {
    if (cause instanceof MonitorError) return null
    throw cause
  }
}

/** How much thicker each stream is than its solvent, by the clean levels of all segments. */
function streamsOf(x: InsightInput): StreamReport[] {
  const levels = x.segments.flatMap((s, i) => {
    const { baseline, atBaseline } = s
    if (baseline === null || atBaseline === null) return []
    const level = orNull(() => cleanLevel(x.skid, operationOf(x.skid, atBaseline), i, baseline))
    return level === null ? [] : [level]
  })
  return viscosityFactors(levels, x.skid.streams.length).map((f, i) => ({
    stream: x.skid.streams[i]?.id ?? '',
    viscosityFactor: f.segments === 0 ? null : f,
  }))
}

/** U from the readings of now and of the clean baseline, and what lies between them: R_f = 1/U − 1/U0 (FOU-01). */
function heatOf(clean: SegmentFigures | undefined, now: SegmentFigures | undefined): HeatReport | null {
  const u = now?.heat
  if (u == null || u.uNowWM2K === null || u.uNowLowWM2K === null || u.uNowHighWM2K === null) return null
  const u0 = clean?.heat?.uNowWM2K ?? null
  return {
    uWM2K: u.uNowWM2K,
    low: u.uNowLowWM2K,
    high: u.uNowHighWM2K,
    cleanUWM2K: u0,
    computedUWM2K: u.uWM2K,
    foulingM2KW: u0 === null ? null : foulingResistance(u.uNowWM2K, u0),
  }
}

/** What may be off-specification of this disturbance leaves the skid in this window, by volume (REC-14). */
function outletReport(x: InsightInput, operation: Operation, o: Occurrence): OutletReport | null {
  const at = x.skid.segments.findIndex((g) => g.id === o.segment)
  if (at < 0) return null
  const flow = x.outletFlow(at)
  const first = flow[0]
  if (first === undefined) return null
  const way = outletPath(x.skid, operation, at)
  if (way === null) return null
  const began = o.onset === null ? o.raisedMs : Math.min(o.raisedMs, Date.parse(o.onset.low))
  const startMs = Math.max(began, first.tMs)
  const w = outletWindow({ ...way, epsilon, flow, startMs, endMs: Math.max(startMs, o.clearedMs ?? x.nowMs) })
  const iso = (ms: number | null): string | null => (ms === null ? null : new Date(ms).toISOString())
  return {
    alarm: o.id,
    segment: o.segment ?? '',
    outlet: x.skid.segments[outletOf(x.skid, at)]?.id ?? '',
    from: iso(w.fromMs),
    // While the disturbance stands its end is open, whatever has left so far.
    to: o.clearedMs === null ? null : iso(w.toMs),
    firstMl: w.firstM3 * 1e6,
    lastMl: w.lastM3 * 1e6,
    divertedMl: o.clearedMs === null || w.divertedM3 === null ? null : w.divertedM3 * 1e6,
    unknownSeconds: w.unknownS,
    epsilon,
    models: w.models,
  }
}

/**
 * What a run's readings say beyond ratio and alarms: viscosity of the streams against their solvents, deposits that would explain the
 * ratios, heat transfer, and when each disturbance leaves the skid. Computed when asked for, from the present working point and those of
 * the baselines; nothing of it feeds a verdict. Null where it is not known. Errors: none of a liquid's or bore's range.
 */
export function insightOf(x: InsightInput): Insight {
  const { skid, now } = x
  const present = now === null ? null : skidFigures(skid, now).segments
  const operation = now === null ? null : orNull(() => operationOf(skid, now))
  const perSegment = x.segments.map((s, i) => {
    const { atBaseline, baseline, growth, ratio } = s
    if (atBaseline === null || baseline === null) return { deposit: null, heat: heatOf(undefined, present?.[i]) }
    const clean = skidFigures(skid, atBaseline).segments[i]
    const op = orNull(() => operationOf(skid, atBaseline))?.segments[i]
    const solidM3S = clean === undefined || clean.liohM3S === 0 ? null : clean.liohM3S
    const deposit =
      growth === null || ratio === null || op === undefined
        ? null
        : orNull(() => depositInsight({ skid, op, ratio, baseline, onset: growth.onset, nowMs: x.nowMs, solidM3S }))
    return { deposit, heat: heatOf(clean, present?.[i]) }
  })
  return {
    streams: streamsOf(x),
    deposits: perSegment.map((p) => p.deposit),
    heat: perSegment.map((p) => p.heat),
    outlet:
      operation === null
        ? []
        : x.disturbances.flatMap((o) => {
            const report = orNull(() => outletReport(x, operation, o))
            return report === null ? [] : [report]
          }),
  }
}
