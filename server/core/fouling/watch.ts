import { type Bank, createBank } from '../bank/bank.ts'
import { type BankEvent, type BankSettings, type BankState, bankSettings, type LearnedExponent } from '../bank/bank-state.ts'
import type { SegmentObservation } from '../bank/model.ts'
import type { StartingKnowledge } from '../baseline/starting-knowledge.ts'
import type { Layout } from '../derive/layout.ts'
import { createObserver, type ObserveState, type SegmentStep } from '../derive/observe.ts'
import type { Step } from '../derive/step.ts'
import { forecastLimit } from '../growth/forecast.ts'
import { fitOnset } from '../growth/onset.ts'
import type { GrowthPoint, Interval, Noise } from '../growth/points.ts'
import type { LimitName } from '../sequence.ts'
import { type ChartReading, type ChartState, readCharts, standing, startCharts, stepCharts } from './charts.ts'
import { createMode, type Mode, type ModeState } from './mode.ts'

export interface BaselineRecord {
  fromMs: number
  toMs: number
  dpPa: number
  sigma: number
  provisional: boolean
  flowM3S: number | null
  tempK: number | null
  /** A step test vouched for zero or exponent beneath it. */
  commissioned?: boolean
}

/** What the readings (or a step test) taught of a segment besides its level. */
export interface Learned {
  readonly flow: LearnedExponent
  readonly viscosity: LearnedExponent
  /** Zero offset of ΔP as read with the pumps at rest, Pa; null where they never stood still. */
  readonly zeroPa: number | null
}

export interface ForecastRecord extends Interval {
  readonly limit: LimitName
}

/** A deposit (or blockage) that stands in a segment. */
interface Growth {
  raisedMs: number
  onset: Interval | null
  /** Rise of ln ratio at the last fit of the onset; fitted once more at twice that, then left. */
  riseAtFit: number
  fits: number
  points: GrowthPoint[]
  peakLn: number
  forecast: ForecastRecord | null
  growthPerHour: number | null
  lastForecastMs: number
}

interface SegmentWatch {
  recent: number[]
  last: number | null
  max: number | null
  growth: Growth | null
  hindsight: Interval | null
  window: { dpPa: number[]; flow: number[]; tempK: number[]; fromMs: number }
  baselined: boolean
  /** The charts by the promise, from the final baseline on; null before. */
  charts: ChartState | null
  /** ln of the clean ΔP over the last ten minutes, newest last. */
  cleanLn: number[]
}

export interface WatchState {
  mode: ModeState
  observer: ObserveState
  bank: BankState | null
  segments: SegmentWatch[]
  history: { tMs: number; o: (SegmentObservation | null)[] }[]
}

export type WatchEvent =
  | { readonly kind: 'bank'; readonly event: BankEvent; readonly onset: Interval | null; readonly ratio: number | null }
  /** Both charts of a segment signal and no explanation of the bank has taken the rise: creeping growth. `shared`: its neighbours rise alike. */
  | {
      readonly kind: 'creep'
      readonly segment: number
      readonly onset: Interval | null
      readonly ratio: number
      readonly reading: ChartReading
      readonly shared: boolean
    }
  /** The lower side of the chart: a slow fall below clean by this share, told once. */
  | { readonly kind: 'below'; readonly segment: number; readonly ratio: number; readonly share: number }
  | { readonly kind: 'onset'; readonly segment: number; readonly onset: Interval }
  | { readonly kind: 'forecast'; readonly segment: number; readonly forecast: ForecastRecord | null }
  | { readonly kind: 'cleared'; readonly segment: number; readonly why: 'stopped' | 'fell back' }
  | { readonly kind: 'baseline'; readonly segment: number; readonly baseline: BaselineRecord }

export interface SegmentNow {
  readonly ratio: number | null
  readonly step: SegmentStep
  readonly lnRatio: number | null
  readonly whiteSd: number
  readonly wanderSd: number
}

export interface WatchStep {
  readonly mode: Mode
  readonly now: SegmentNow[]
  readonly events: WatchEvent[]
}

/** Steps: of history kept for an onset; in a baseline before it is final; averaged for the ratio shown; between forecasts. */
const steps = { history: 420, baseline: 60, provisional: 30, shown: 3, forecast: 2, clean: 20, pointsKept: 480 }

/** A neighbour on the same stream that stands at this share of a segment's rise rises with it. */
const alikeShare = 0.5

/** Share of a growth's age after which its forecast is made anew. */
const renewShare = 0.03

export interface WatchOptions {
  readonly bank?: BankSettings
  /** Whether the charts of the promise may call growth by themselves. */
  readonly charts?: boolean
  /** From an accepted step test; a saved state has it already. */
  readonly known?: readonly StartingKnowledge[]
}

/**
 * Fouling of every segment: production or not, resistance over clean, deposits with their onset and forecast, baselines. One call a
 * detector step. `limits` says how high ΔP may go now, Pa; null where no limit is set.
 */
export function createWatch(layout: Layout, stepMs: number, saved?: WatchState, options: WatchOptions = {}) {
  const settings = options.bank ?? bankSettings
  const known =
    options.known === undefined ? undefined : layout.segments.map((g) => options.known!.find((k) => k.segment === g.spec.id))
  const promise = layout.skid.detection
  const mode = createMode(layout, saved?.mode)
  const observer = createObserver(
    layout,
    saved?.observer,
    known?.map((k) => k?.zeroPa ?? null),
  )
  const bank: Bank = createBank(
    layout,
    stepMs,
    saved?.bank ?? undefined,
    settings,
    known?.map((k) => ({ zeroChecked: (k?.zeroPa ?? null) !== null, flowExponent: k?.flowExponent ?? null })),
  )
  const seg = (): SegmentWatch => ({
    recent: [],
    last: null,
    max: null,
    growth: null,
    hindsight: null,
    window: { dpPa: [], flow: [], tempK: [], fromMs: 0 },
    baselined: false,
    charts: null,
    cleanLn: [],
  })
  const watch: SegmentWatch[] = saved?.segments ?? layout.segments.map(seg)
  let history = saved?.history ?? []

  const noiseOf = (i: number): Noise => {
    const n = bank.noise(i)
    return {
      wanderSd: n.wanderSd,
      wanderTauS: settings.disturbances.wanderTauH * 3600 * Math.min(1, stepMs / 30_000),
      whiteSd: n.whiteSd,
      stepS: stepMs / 1000,
    }
  }

  function cleanPoints(i: number): GrowthPoint[] {
    const out: GrowthPoint[] = []
    for (const h of history) {
      const o = h.o[i]
      if (o != null) out.push({ tMs: h.tMs, lnRatio: bank.reread(i, o) })
    }
    return out
  }

  function begin(i: number, tMs: number): Growth {
    const points = cleanPoints(i)
    const onset = points.length === 0 ? null : fitOnset(points, noiseOf(i), points[0]!.tMs)
    const rise = points.slice(-3).reduce((a, p) => a + p.lnRatio / 3, 0)
    return {
      raisedMs: tMs,
      onset,
      riseAtFit: Math.max(rise, 0.01),
      fits: 1,
      points,
      peakLn: rise,
      forecast: null,
      growthPerHour: null,
      lastForecastMs: 0,
    }
  }

  /** Keeps the points of a long growth bounded: beyond the limit every other one of the older half goes. */
  function thin(points: GrowthPoint[]): GrowthPoint[] {
    if (points.length <= steps.pointsKept) return points
    const half = points.length >> 1
    return points.filter((_, j) => j >= half || j % 2 === 0)
  }

  function grow(
    i: number,
    g: Growth,
    tMs: number,
    ln: number,
    limitPa: { name: LimitName; pa: number } | null,
    events: WatchEvent[],
  ): void {
    g.points.push({ tMs, lnRatio: ln })
    g.points = thin(g.points)
    g.peakLn = Math.max(g.peakLn, ln)
    const recent = g.points.slice(-3).reduce((a, p) => a + p.lnRatio, 0) / Math.min(3, g.points.length)
    if (g.fits === 1 && recent > 2 * g.riseAtFit && g.onset !== null) {
      const again = fitOnset(g.points, noiseOf(i), g.points[0]!.tMs)
      g.fits = 2
      if (again !== null) {
        g.onset = again
        events.push({ kind: 'onset', segment: i, onset: again })
      }
    }
    // Made anew after a share of the growth's age: what an hour taught stands longer than what a minute did.
    const age = g.onset === null ? 0 : tMs - g.onset.atMs
    if (tMs - g.lastForecastMs < Math.max(steps.forecast * stepMs, renewShare * age)) return
    g.lastForecastMs = tMs
    const clean = watch[i]!.cleanLn
    if (limitPa === null || g.onset === null || clean.length === 0) {
      g.forecast = null
      return
    }
    const cleanPa = Math.exp(clean.reduce((a, b) => a + b, 0) / clean.length)
    const made = forecastLimit(g.points, noiseOf(i), g.onset, limitPa.pa / cleanPa, tMs)
    g.growthPerHour = made === null ? null : made.growthPerHour
    g.forecast =
      made === null ? null : { limit: limitPa.name, atMs: made.atMs, lowMs: made.lowMs, highMs: made.highMs, level: made.level }
    events.push({ kind: 'forecast', segment: i, forecast: g.forecast })
  }

  function clear(i: number, why: 'stopped' | 'fell back', events: WatchEvent[]): void {
    const w = watch[i]!
    if (w.growth === null) return
    if (w.growth.onset !== null) w.hindsight = w.growth.onset
    w.growth = null
    events.push({ kind: 'cleared', segment: i, why })
  }

  function baseline(i: number, tMs: number, provisional: boolean, events: WatchEvent[]): void {
    const w = watch[i]!
    if (w.baselined || w.window.dpPa.length === 0) return
    if (!provisional) {
      w.baselined = true
      const noise = noiseOf(i)
      const level = w.recent.reduce((a, x) => a + x, 0) / Math.max(1, w.recent.length)
      w.charts = startCharts(promise, layout.segments.length, noise, level)
    }
    bank.setBaseline(i)
    const n = bank.noise(i)
    events.push({
      kind: 'baseline',
      segment: i,
      baseline: {
        fromMs: w.window.fromMs,
        toMs: tMs,
        dpPa: median(w.window.dpPa),
        sigma: Math.hypot(n.whiteSd, n.wanderSd),
        provisional,
        flowM3S: w.window.flow.length === 0 ? null : median(w.window.flow),
        tempK: w.window.tempK.length === 0 ? null : median(w.window.tempK),
        ...(bank.isCommissioned(i) ? { commissioned: true } : {}),
      },
    })
  }

  return {
    /** Live view of what stands in a segment; read only. */
    segment: (i: number): Readonly<SegmentWatch> => watch[i]!,
    suspicion: bank.suspicion,
    noise: bank.noise,
    learned(i: number): Learned | null {
      const e = bank.exponents(i)
      return e === null ? null : { ...e, zeroPa: observer.state.zeroSteps[i]! > 0 ? observer.state.zeroPa[i]! : null }
    },
    charts: (i: number): ChartReading | null =>
      watch[i]!.charts === null ? null : readCharts(watch[i]!.charts!, promise.riseToFindPct),

    /** A person has it that a segment is clean and unlike before (a new filter, a baseline to be learnt anew): its level only begins anew. */
    anew(i: number): WatchEvent[] {
      const events: WatchEvent[] = []
      clear(i, 'fell back', events)
      bank.readmit(i, true)
      const w = watch[i]!
      w.recent = []
      w.baselined = false
      w.charts = null
      w.window = { dpPa: [], flow: [], tempK: [], fromMs: 0 }
      return events
    },
    /** The promise has changed: the charts begin anew by it, from where they stood. */
    redesign(): void {
      watch.forEach((w, i) => {
        if (w.charts !== null) w.charts = startCharts(promise, layout.segments.length, noiseOf(i), w.charts.zeroLn)
      })
    },

    step(step: Step, limits: readonly ({ name: LimitName; pa: number } | null)[]): WatchStep {
      const m = mode.step(step)
      const events: WatchEvent[] = []
      if (m.rests) observer.rest(step)
      if (m.stops) {
        layout.segments.forEach((_, i) => {
          clear(i, 'stopped', events)
          watch[i]!.baselined = false
          watch[i]!.charts = null
          watch[i]!.window = { dpPa: [], flow: [], tempK: [], fromMs: 0 }
          watch[i]!.recent = []
        })
        bank.restart()
        history = []
      }
      const segs = observer.step(step, m.production)
      const observations = segs.map((x) => (m.production && step.seen > 0 ? x.observation : null))
      if (!m.production || step.seen === 0)
        return { mode: m, now: segs.map((x, i) => ({ ratio: null, step: x, lnRatio: null, ...bank.noise(i) })), events }
      const endMs = step.tMs + stepMs / 2
      history.push({ tMs: step.tMs, o: observations })
      if (history.length > steps.history) history.shift()
      const out = bank.step(observations, m.armed, step.gapSteps)

      for (const e of out.events) {
        if (e.kind === 'deposit' || e.kind === 'blockage') {
          baseline(e.segment, endMs, true, events)
          watch[e.segment]!.growth = begin(e.segment, endMs)
          const g = watch[e.segment]!.growth!
          watch[e.segment]!.hindsight = g.onset
          events.push({ kind: 'bank', event: e, onset: g.onset, ratio: Math.exp(g.peakLn) })
        } else {
          // The charts look for what no explanation has taken: a step that stays in the ratio is no growth.
          if (e.kind === 'step' && !e.nearMove && watch[e.segment]!.charts !== null) watch[e.segment]!.charts!.zeroLn += e.size
          events.push({ kind: 'bank', event: e, onset: null, ratio: null })
        }
      }

      const now = out.segments.map((b, i): SegmentNow => {
        const w = watch[i]!
        const o = observations[i] ?? null
        if (o === null || b.lnRatio === null) return { ratio: null, step: segs[i]!, ...b }
        const started = out.events.some((e) => (e.kind === 'deposit' || e.kind === 'blockage') && e.segment === i)
        const ln = started ? bank.reread(i, o) : b.lnRatio
        w.recent = started ? [ln] : [...w.recent, ln].slice(-steps.shown)
        const ratio = Math.exp(w.recent.reduce((a, x) => a + x, 0) / w.recent.length)
        w.last = ratio
        if (m.armed) w.max = Math.max(w.max ?? 0, ratio)
        w.cleanLn = [...w.cleanLn, Math.log(o.dpPa) - ln].slice(-steps.clean)
        if (w.growth !== null) {
          if (!started) grow(i, w.growth, step.tMs, ln, limits[i] ?? null, events)
          if (hasFallenBack(i, w)) {
            const fresh = layout.segments[i]!.spec.kind === 'filter'
            clear(i, 'fell back', events)
            bank.readmit(i, fresh)
            w.recent = []
            if (fresh) {
              w.baselined = false
              w.charts = null
              w.window = { dpPa: [], flow: [], tempK: [], fromMs: 0 }
            } else if (w.charts !== null) w.charts = startCharts(promise, layout.segments.length, noiseOf(i), w.charts.zeroLn)
          }
        } else {
          learnBaseline(i, w, segs[i]!, step, m, endMs, events)
          if (w.charts !== null) stepCharts(w.charts, step.tMs, ln)
        }
        return { ratio, step: segs[i]!, lnRatio: ln, whiteSd: b.whiteSd, wanderSd: b.wanderSd }
      })
      if (m.armed && options.charts !== false) creep(endMs, events)
      return { mode: m, now, events }
    },

    save: (): WatchState =>
      structuredClone({ mode: mode.state, observer: observer.state, bank: bank.save(), segments: watch, history }),
  }

  function learnBaseline(
    i: number,
    w: SegmentWatch,
    x: SegmentStep,
    step: Step,
    m: Mode,
    endMs: number,
    events: WatchEvent[],
  ): void {
    if (w.baselined) return
    if (w.window.dpPa.length === 0) w.window.fromMs = step.tMs - stepMs / 2
    if (x.dpPa !== null) w.window.dpPa.push(x.dpPa)
    if (x.volFlowM3S !== null) w.window.flow.push(x.volFlowM3S)
    if (x.tempK !== null) w.window.tempK.push(x.tempK)
    if (!m.armed) return
    if (w.window.dpPa.length === steps.provisional) baseline(i, endMs, true, events)
    if (w.window.dpPa.length >= steps.baseline) baseline(i, endMs, false, events)
  }

  /** Creeping growth, too slow for the bank's window: the charts decide. Segments of one stream that rise together share another cause. */
  function creep(endMs: number, events: WatchEvent[]): void {
    layout.segments.forEach((g, i) => {
      const w = watch[i]!
      if (w.charts === null || w.growth !== null || w.recent.length === 0) return
      const reading = readCharts(w.charts, promise.riseToFindPct)
      if (reading.below) {
        const low = Math.exp(w.recent.reduce((a, x) => a + x, 0) / w.recent.length)
        const share = 1 - low / Math.exp(w.charts.zeroLn)
        w.charts = startCharts(promise, layout.segments.length, noiseOf(i), Math.log(low))
        events.push({ kind: 'below', segment: i, ratio: low, share })
        return
      }
      if (!reading.alarms) return
      const level = (x: SegmentWatch): number => Math.exp(x.recent.reduce((a, y) => a + y, 0) / x.recent.length)
      const ratio = level(w)
      const own = standing(w.charts)
      const alike = watch.filter((o, j) => {
        const together = j !== i && layout.segments[j]!.streams.some((x) => g.streams.includes(x))
        return together && o.charts !== null && o.growth === null && o.recent.length > 0 && standing(o.charts) > alikeShare * own
      })
      if (alike.length > 0) {
        for (const o of [w, ...alike]) {
          const j = watch.indexOf(o)
          const read = readCharts(o.charts!, promise.riseToFindPct)
          events.push({ kind: 'creep', segment: j, onset: null, ratio: level(o), reading: read, shared: true })
          o.charts = startCharts(promise, layout.segments.length, noiseOf(j), Math.log(level(o)))
        }
        return
      }
      const points = w.charts.points.map((p) => ({ tMs: p.tMs, lnRatio: p.lnRatio + w.charts!.zeroLn }))
      const noise = { ...noiseOf(i), stepS: (10 * stepMs) / 1000 }
      const onset = fitOnset(points, noise, points[0]!.tMs)
      bank.declare(i)
      w.growth = {
        raisedMs: endMs,
        onset,
        riseAtFit: Math.log(ratio),
        fits: 1,
        points,
        peakLn: Math.log(ratio),
        forecast: null,
        growthPerHour: null,
        lastForecastMs: 0,
      }
      w.hindsight = onset
      events.push({ kind: 'creep', segment: i, onset, ratio, reading, shared: false })
    })
  }

  /** The resistance came down: a filter that was changed, a deposit that let go. Six steps must agree. */
  function hasFallenBack(i: number, w: SegmentWatch): boolean {
    const g = w.growth!
    const since = g.points.slice(-6).filter((p) => p.tMs > g.raisedMs)
    if (since.length < 6) return false
    const level = median(since.map((p) => p.lnRatio))
    const n = bank.noise(i)
    const sigma = Math.hypot(n.whiteSd, n.wanderSd)
    const floor = layout.segments[i]!.spec.kind === 'filter' ? Math.max(0.35 * g.peakLn, 3 * sigma) : Math.max(0.012, 3 * sigma)
    return g.peakLn > 2 * floor && level < floor
  }
}
export type Watch = ReturnType<typeof createWatch>

function median(values: readonly number[]): number {
  const v = [...values].sort((a, b) => a - b)
  const h = v.length >> 1
  return v.length % 2 === 1 ? v[h]! : (v[h - 1]! + v[h]!) / 2
}
