import type { AlarmBook } from '../alarms/book.ts'
import type { Signal } from '../alarms/occurrence.ts'
import type { Layout, SegmentLayout } from '../derive/layout.ts'
import { createFeedRatio, type FeedPair, type FeedRatioState, type FeedRatioVerdict } from '../exotherm/feed-ratio.ts'
import { timeToLimit } from '../exotherm/profile.ts'
import type { ExothermVerdict, ReactorConfig } from '../exotherm/types.ts'
import { createExothermWatch } from '../exotherm/watch.ts'
import type { WatchState } from '../exotherm/watch-state.ts'
import { fluidOf } from '../fluids/fluid.ts'
import { feedTempK, molPerKg } from '../fluids/reagent.ts'
import type { Scan } from '../scan/grid.ts'
import { cFromK } from '../units.ts'
import type { LimitTable } from './limits.ts'

export interface ExcursionState {
  watch: WatchState | null
  ratios: FeedRatioState[]
}

interface Pair extends FeedPair {
  /** Layout index of either stream, and the segment where they meet. */
  readonly streams: readonly [number, number]
  readonly segment: string
  readonly key: string
}

/** What a reactor's thermocouples, coolant and feeds read in the scan at hand; filled anew each scan. */
interface Readings {
  readonly tempsC: (number | null)[]
  coolantC: number | null
  readonly flowsKgS: (number | null)[]
  ratioHigh: boolean
  production: boolean
  armed: boolean
}

const watchedKinds = new Set(['mixer', 'reactor', 'quench'])

/**
 * Temperature excursions of every reactor-like segment and the ratio of every pair of feeds that meet in one, scan by scan, as alarm
 * signals. `limits` as they stand now, for how far a hot spot is from them. A scan without rows is passed over: an empty cell of a jittering logger is no reading.
 */
export function createExcursions(layout: Layout, limits: LimitTable, hears: AlarmBook['hears'], saved?: ExcursionState) {
  const { skid } = layout
  const reactors = layout.segments.filter((g) => watchedKinds.has(g.spec.kind) && g.temperatures.length > 0)
  const config = {
    scanS: skid.scanSeconds,
    reactors: reactors.map(
      (g): ReactorConfig => ({
        segment: g.spec.id,
        thermocouples: g.temperatures.length,
        coolant: g.spec.coolantTemperature,
        streams: g.streams.length,
        limiting: Math.max(0, g.spec.streams.indexOf(g.spec.reaction?.limitingStream ?? '')),
        foreign: g.streams.map(
          (k) => !layout.segments.some((e) => isBefore(layout, e, g) && e.coolant === g.coolant && e.streams.includes(k)),
        ),
      }),
    ),
  }
  const watch = config.reactors.length === 0 ? null : createExothermWatch(config, saved?.watch ?? undefined)
  const pairs = feedPairs(layout)
  const ratios = pairs.map((p, i) => createFeedRatio(p, saved?.ratios[i]))
  const kgPer = skid.streams.map((s, i) =>
    layout.streams[i]!.isMass ? 1 : s.fluid === null ? 1000 : fluidOf(s.fluid).at(feedTempK).rhoKgM3,
  )

  const ratioHigh = new Uint8Array(skid.streams.length)
  const readings = reactors.map(
    (): Readings => ({ tempsC: [], coolantC: null, flowsKgS: [], ratioHigh: false, production: false, armed: false }),
  )
  const keys = reactors.map((g) => ({ key: `exotherm:${g.spec.id}`, coldKey: `temperature-limit:${g.spec.id}:cold` }))

  const flowOf = (stream: number, scan: Scan): number | null => {
    const tag = layout.streams[stream]!.tag
    return tag >= 0 && scan.used[tag]! > 0 ? scan.si[tag]! * kgPer[stream]! : null
  }
  const tempOf = (tag: number | null, scan: Scan): number | null =>
    tag !== null && tag >= 0 && scan.used[tag]! > 0 ? cFromK(scan.si[tag]!) : null

  return {
    state: (): ExcursionState => ({ watch: watch?.state ?? null, ratios: ratios.map((r) => r.state) }),
    scan(scan: Scan, tMs: number, on: { production: boolean; armed: boolean }, emit: (s: Signal) => void): void {
      if (scan.rows === 0) return
      ratioHigh.fill(0)
      for (let i = 0; i < pairs.length; i++) {
        const p = pairs[i]!
        const [a, b] = p.streams
        const { production, armed } = on
        const v = ratios[i]!.scan({ tMs, flowsKgS: [flowOf(a, scan), flowOf(b, scan)], production, armed })
        if (v.highNow) ratioHigh[a] = ratioHigh[b] = 1
        feedSignal(p, v, tMs, emit)
      }
      if (watch === null) return
      for (let i = 0; i < reactors.length; i++) read(reactors[i]!, readings[i]!, scan, on)
      const verdicts = watch.scan(tMs, readings)
      for (let i = 0; i < reactors.length; i++) heatSignal(reactors[i]!, keys[i]!, verdicts[i]!, tMs, emit)
    },
  }

  function read(g: SegmentLayout, r: Readings, scan: Scan, on: { production: boolean; armed: boolean }): void {
    for (let j = 0; j < g.temperatures.length; j++) r.tempsC[j] = tempOf(g.temperatures[j]!, scan)
    r.coolantC = tempOf(g.coolant, scan)
    r.ratioHigh = false
    for (let j = 0; j < g.streams.length; j++) {
      r.flowsKgS[j] = flowOf(g.streams[j]!, scan)
      if (ratioHigh[g.streams[j]!] === 1) r.ratioHigh = true
    }
    r.production = on.production
    r.armed = on.armed
  }

  /** How far from the highest limit that is set, at the rate found; '' where the rate is not rising or no limit is set. */
  function timeLeft(g: SegmentLayout, v: ExothermVerdict): string {
    const table = limits[layout.segments.indexOf(g)]
    const limitC = table?.temperatureHighHighC ?? table?.temperatureHighC ?? null
    if (limitC === null || v.hotSpotC === null || v.ratePerS === null) return ''
    const left = timeToLimit(v.hotSpotC, limitC, v.ratePerS, v.ratePerSSe ?? 0)
    if (left.s === null || left.soonestS === null) return ''
    return left.s === 0
      ? `; above ${limitC} °C already`
      : `; ${limitC} °C in ${left.s.toFixed(0)} s at this rate, in ${left.soonestS.toFixed(0)} s at the soonest`
  }

  function heatSignal(
    g: SegmentLayout,
    { key, coldKey }: { key: string; coldKey: string },
    v: ExothermVerdict,
    tMs: number,
    emit: (s: Signal) => void,
  ): void {
    const hottest = v.hottest === null ? null : skid.tags[g.temperatures[v.hottest]!]!.tag
    if (hears(key, v.over)) {
      const rate = v.ratePerS === null ? '' : `, ${(60 * v.ratePerS).toFixed(1)} ± ${(60 * (v.ratePerSSe ?? 0)).toFixed(1)} K/min`
      const likely =
        v.cause === 'dosing'
          ? '; feed ratio is off'
          : v.cause === 'flow'
            ? '; feed flow moved'
            : v.cause === 'coolant'
              ? '; coolant side'
              : ''
      emit({
        key,
        tMs,
        over: v.over,
        under: v.under,
        kind: 'exotherm',
        segment: g.spec.id,
        tag: hottest,
        priority: 'high',
        value: v.excessC,
        limit: v.thresholdC,
        unit: 'K',
        message: () =>
          `${g.spec.title}: ${(v.excessC ?? 0).toFixed(1)} K above what coolant and feeds explain${rate}, at ${hottest ?? 'its thermocouples'}${timeLeft(g, v)}${likely}`,
        cause: null,
        onset: null,
        detector: v.detector ?? 'excess',
        evidence: {
          for: [
            ...(v.hotSpot === null
              ? []
              : [`hot spot ${(v.hotSpotC ?? 0).toFixed(1)} °C at ${skid.tags[g.temperatures[v.hotSpot]!]!.tag}`]),
            ...(v.startMs === null ? [] : [`began about ${new Date(v.startMs).toISOString()}`]),
            ...(v.runaway ? ['temperature curves upwards and pulls away from the coolant (Hub and Jones)'] : []),
          ],
          against: [],
          notExcluded: v.cause === null || v.cause === 'reaction' ? ['reaction itself'] : [],
        },
        onDelayS: 0,
        offDelayS: 5 * Math.max(1, skid.scanSeconds),
      })
    }
    const cold = v.over === null ? null : v.cold
    if (hears(coldKey, cold))
      emit({
        key: coldKey,
        tMs,
        over: cold,
        kind: 'temperature-limit',
        segment: g.spec.id,
        tag: null,
        priority: 'low',
        value: v.excessC,
        limit: null,
        unit: 'K',
        message: `${g.spec.title}: colder than coolant and feeds explain: freezing, or reagent that gathers unreacted`,
        cause: null,
        onset: null,
        detector: 'cold excursion',
        evidence: { for: [], against: [], notExcluded: [] },
        onDelayS: 0,
        offDelayS: 30,
      })
  }

  function feedSignal(p: Pair, v: FeedRatioVerdict, tMs: number, emit: (s: Signal) => void): void {
    const { key } = p
    if (!hears(key, v.over)) return
    const off =
      v.detector === 'limit' && v.molMol !== null
        ? `${v.molMol.toFixed(3)} mol/mol, beyond its limit of ${v.side === 'high' ? p.limits!.high : p.limits!.low}`
        : v.relative === null
          ? ''
          : `${(100 * (v.relative - 1)).toFixed(1)} % off its usual value`
    emit({
      key,
      tMs,
      over: v.over,
      under: v.under,
      kind: 'feed-ratio',
      segment: p.segment,
      tag: v.moved === null ? null : skid.tags[layout.streams[p.streams[v.moved]]!.tag]!.tag,
      priority: v.side === 'high' ? 'high' : 'medium',
      value: v.molMol ?? v.relative,
      limit:
        v.detector === 'limit'
          ? v.side === 'high'
            ? p.limits!.high
            : p.limits!.low
          : v.side === 'low'
            ? 1 - v.allowed
            : 1 + v.allowed,
      unit: v.molMol === null ? 'of usual' : 'mol/mol',
      message: () => `Feed ratio ${p.of.join(' to ')} ${off}${v.moved === null ? '' : `; ${p.of[v.moved]} moved`}`,
      cause: null,
      onset: null,
      detector: v.detector ?? 'chart',
      evidence: { for: [], against: [], notExcluded: [] },
      onDelayS: 0,
      offDelayS: 5 * Math.max(1, skid.scanSeconds),
    })
  }
}
export type Excursions = ReturnType<typeof createExcursions>

/** Pairs of feeds worth a ratio: those the skid file names, then, where streams first meet, each against the first. */
function feedPairs(layout: Layout): Pair[] {
  const { skid } = layout
  const pairs: Pair[] = []
  const add = (of: readonly [string, string], segment: string, limits: Pair['limits']): void => {
    if (pairs.some((p) => p.of.includes(of[0]) && p.of.includes(of[1]))) return
    const streams = [skid.streams.findIndex((s) => s.id === of[0]), skid.streams.findIndex((s) => s.id === of[1])] as const
    if (streams[0] < 0 || streams[1] < 0) return
    const conc = [molPerKg(skid.streams[streams[0]]!), molPerKg(skid.streams[streams[1]]!)] as const
    pairs.push({
      of,
      scanS: skid.scanSeconds,
      limits,
      molPerKg: conc[0] === null || conc[1] === null ? null : [conc[0], conc[1]],
      streams,
      segment,
      key: `feed-ratio:${of.join('/')}`,
    })
  }
  for (const g of skid.segments) if (g.limits.feedRatio !== null) add(g.limits.feedRatio.of, g.id, g.limits.feedRatio)
  for (const g of skid.segments)
    if (watchedKinds.has(g.kind)) for (const s of g.streams.slice(1)) add([s, g.streams[0]!], g.id, null)
  return pairs
}

/** Whether a segment stands before another in flow order, which is the order of the skid file. */
const isBefore = (layout: Layout, a: SegmentLayout, b: SegmentLayout): boolean =>
  layout.segments.indexOf(a) < layout.segments.indexOf(b)
