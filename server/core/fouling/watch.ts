import { type Bank, createBank } from '../bank/bank.ts'
import { type BankEvent, type BankSettings, bankSettings } from '../bank/bank-state.ts'
import { touches } from '../bank/verdicts.ts'
import type { StartingKnowledge } from '../baseline/starting-knowledge.ts'
import type { Layout } from '../derive/layout.ts'
import { createObserver, type SegmentStep } from '../derive/observe.ts'
import type { Step } from '../derive/step.ts'
import type { GrowthPoint, Noise } from '../growth/points.ts'
import { baselineOf, fillWindow } from './baselines.ts'
import { type ChartReading, readCharts, resumeCharts, startCharts, stepCharts } from './charts.ts'
import { creep } from './creep.ts'
import { beginGrowth, growOn, hasFallenBack } from './growths.ts'
import { createMode } from './mode.ts'
import {
  type DpLimit,
  forgetBaseline,
  freshSegment,
  type Learned,
  type SegmentNow,
  type SegmentWatch,
  shownRatio,
  steps,
  type WatchEvent,
  type WatchState,
  type WatchStep,
} from './watch-state.ts'

export interface WatchOptions {
  readonly bank?: BankSettings
  /** Whether the charts of the promise may call growth by themselves. */
  readonly charts?: boolean
  /** From an accepted step test; a saved state has it already. */
  readonly known?: readonly StartingKnowledge[]
}

const lackOf = (x: SegmentStep): 'dp' | 'flow' | 'temperature' | 'signal' =>
  x.dpPa === null ? 'dp' : x.tempK === null ? 'temperature' : x.massFlowKgS === null ? 'flow' : 'signal'

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
  const watch: SegmentWatch[] = saved?.segments ?? layout.segments.map(freshSegment)
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
  const sigmaOf = (i: number): number => {
    const n = bank.noise(i)
    return Math.hypot(n.whiteSd, n.wanderSd)
  }
  const charted = (i: number, zeroLn: number) => startCharts(promise, layout.segments.length, noiseOf(i), zeroLn)

  /** History of a segment, read as clean is known to be now. */
  function cleanPoints(i: number, last = steps.history): GrowthPoint[] {
    const out: GrowthPoint[] = []
    for (const h of history.slice(-last)) {
      const o = h.o[i]
      if (o != null) out.push({ tMs: h.tMs, lnRatio: bank.reread(i, o) })
    }
    return out
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
    bank.setBaseline(i)
    if (!provisional) {
      w.baselined = true
      // The whole window, as it reads now: a few steps would give the charts their own noise for a zero.
      const points = cleanPoints(i, steps.baseline)
      w.charts = charted(i, points.reduce((a, p) => a + p.lnRatio, 0) / Math.max(1, points.length))
    }
    events.push({ kind: 'baseline', segment: i, baseline: baselineOf(w, tMs, sigmaOf(i), provisional, bank.isCommissioned(i)) })
  }

  /** A verdict of the bank: a growth begins, or what was no growth leaves the charts. */
  function onVerdict(e: BankEvent, endMs: number, events: WatchEvent[]): void {
    if (e.kind === 'deposit' || e.kind === 'blockage') {
      baseline(e.segment, endMs, true, events)
      const w = watch[e.segment]!
      const g = beginGrowth(cleanPoints(e.segment), noiseOf(e.segment), endMs)
      w.growth = g
      w.hindsight = g.onset
      events.push({ kind: 'bank', event: e, onset: g.onset, ratio: Math.exp(g.peakLn) })
      return
    }
    // The charts look for what no explanation has taken. Until it was told it stood in them as a rise or fall; a step stays in the ratio.
    for (const i of touchedBy(e)) {
      const { charts } = watch[i]!
      if (charts !== null) resumeCharts(charts, e.kind === 'step' && !e.nearMove ? e.size : 0)
    }
    events.push({ kind: 'bank', event: e, onset: null, ratio: null })
  }

  function touchedBy(e: BankEvent): readonly number[] {
    if (e.kind === 'stream') return touches(layout, { kind: 'stream', of: e.stream })
    const tap = e.kind === 'instrument' ? layout.taps.findIndex((t) => t.name === e.tag) : -1
    return tap < 0 ? [e.segment] : touches(layout, { kind: 'tap-step', of: tap })
  }
  /** The charts of a segment begin anew from the zero they had. */
  function chartsAnew(i: number): void {
    const w = watch[i]!
    if (w.charts !== null) w.charts = charted(i, w.charts.zeroLn)
  }

  /** The segment's growth goes on, or its clean running does. */
  function follow(i: number, step: Step, segment: SegmentNow, limit: DpLimit | null, started: boolean, events: WatchEvent[]): void {
    const w = watch[i]!
    const ln = segment.lnRatio!
    if (w.growth === null) return
    if (!started) {
      const on = growOn(w.growth, step.tMs, ln, noiseOf(i), limit, w.cleanLn, stepMs)
      if (on.onset !== null) events.push({ kind: 'onset', segment: i, onset: on.onset })
      if (on.forecast) events.push({ kind: 'forecast', segment: i, forecast: w.growth.forecast })
    }
    const isFilter = layout.segments[i]!.spec.kind === 'filter'
    if (!hasFallenBack(w.growth, isFilter, sigmaOf(i))) return
    clear(i, 'fell back', events)
    bank.readmit(i, isFilter)
    w.recent = []
    if (isFilter) forgetBaseline(w)
    else chartsAnew(i)
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
      forgetBaseline(watch[i]!)
      return events
    },
    /** The promise has changed: the charts begin anew by it, from where they stood. */
    redesign(): void {
      for (let i = 0; i < watch.length; i++) chartsAnew(i)
    },

    step(step: Step, limits: readonly (DpLimit | null)[]): WatchStep {
      const m = mode.step(step)
      const events: WatchEvent[] = []
      if (m.rests) {
        const before = [...observer.state.zeroPa]
        observer.rest(step)
        bank.rested(observer.state.zeroPa.map((pa, i) => pa - before[i]!))
      }
      if (m.stops) {
        watch.forEach((w, i) => {
          clear(i, 'stopped', events)
          forgetBaseline(w)
        })
        bank.restart()
        history = []
      }
      const segs = observer.step(step, m.production)
      if (!m.production || step.seen === 0)
        return { mode: m, now: segs.map((x, i) => ({ ratio: null, step: x, lnRatio: null, ...bank.noise(i) })), events }
      const observations = segs.map((x) => x.observation)
      const endMs = step.tMs + stepMs / 2
      history.push({ tMs: step.tMs, o: observations })
      if (history.length > steps.history) history.shift()
      const out = bank.step(observations, m.armed, step.gapSteps)
      for (const e of out.events) onVerdict(e, endMs, events)

      const now = out.segments.map((b, i): SegmentNow => {
        const w = watch[i]!
        const o = observations[i] ?? null
        w.blind = o === null ? (w.blind ?? 0) + 1 : 0
        if (w.blind === steps.blind) events.push({ kind: 'unjudged', segment: i, lacks: lackOf(segs[i]!) })
        if (o === null || b.lnRatio === null) return { ratio: null, step: segs[i]!, ...b }
        const started = out.events.some((e) => (e.kind === 'deposit' || e.kind === 'blockage') && e.segment === i)
        const ln = started ? bank.reread(i, o) : b.lnRatio
        w.recent = started ? [ln] : [...w.recent, ln].slice(-steps.shown)
        const ratio = shownRatio(w)
        w.last = ratio
        if (m.armed) w.max = Math.max(w.max ?? 0, ratio)
        w.cleanLn = [...w.cleanLn, Math.log(o.dpPa) - ln].slice(-steps.clean)
        const segment = { ratio, step: segs[i]!, lnRatio: ln, whiteSd: b.whiteSd, wanderSd: b.wanderSd }
        if (w.growth !== null) follow(i, step, segment, limits[i] ?? null, started, events)
        else {
          const due = fillWindow(w, segs[i]!, step.tMs - stepMs / 2, m.armed)
          if (due !== null) baseline(i, endMs, due === 'provisional', events)
          if (w.charts !== null) stepCharts(w.charts, step.tMs, ln)
        }
        return segment
      })
      if (m.armed && options.charts !== false) events.push(...creep(layout, watch, noiseOf, endMs, bank))
      return { mode: m, now, events }
    },

    save: (): WatchState =>
      structuredClone({ mode: mode.state, observer: observer.state, bank: bank.save(), segments: watch, history }),
  }
}
export type Watch = ReturnType<typeof createWatch>
