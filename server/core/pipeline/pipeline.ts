import { type AdviserState, createAdviser, type SegmentForAdvice } from '../advice/adviser.ts'
import { type BookState, createBook } from '../alarms/book.ts'
import type { Signal } from '../alarms/occurrence.ts'
import type { BankEvent, BankSettings } from '../bank/bank.ts'
import type { StartingKnowledge } from '../baseline/starting-knowledge.ts'
import { layoutOf } from '../derive/layout.ts'
import { createStepper, type Step, type StepperState, stepScans } from '../derive/step.ts'
import { MonitorError } from '../errors.ts'
import { planFlush } from '../flush/plan.ts'
import { findingOf } from '../fouling/evidence.ts'
import { createWatch, type ForecastRecord, type WatchEvent, type WatchState } from '../fouling/watch.ts'
import type { Interval } from '../growth/points.ts'
import { createPresent, type PresentState } from '../insight/present.ts'
import type { RowBlock } from '../reading.ts'
import type { OnsetReport } from '../report.ts'
import { createGrid, type GridState, type Scan } from '../scan/grid.ts'
import type { Act, Entry, LimitName } from '../sequence.ts'
import { createExcursions, type ExcursionState } from '../signals/excursions.ts'
import { createInstruments, type InstrumentState } from '../signals/instruments.ts'
import { createLimits, type LimitTable, limitsOf } from '../signals/limits.ts'
import { siteRules } from '../signals/site-rules.ts'
import type { Skid } from '../skid.ts'
import { barFromPa, cFromK, mlMinFromM3s, paFromBar } from '../units.ts'
import type { PipelineEvent } from './events.ts'

/** Everything the pipeline knows, as plain JSON: stop anywhere, resume, and what follows is the same to the byte. */
export interface PipelineState {
  readonly version: 1
  grid: GridState
  stepper: StepperState
  watch: WatchState
  book: BookState
  instruments: InstrumentState
  excursions: ExcursionState
  adviser: AdviserState
  /** Missing in a state of an older build: learnt anew. */
  present?: PresentState
  limits: LimitTable
  /** Alarms that clear by themselves at a time. */
  timed: { key: string; untilMs: number }[]
  timelineN: number
  production: boolean
  armed: boolean
  inferred: boolean
  /** By segment: ratio at the last step and when. */
  ratio: (number | null)[]
  ratioMs: number
}

export interface PipelineOptions {
  /** Each closed scan, for live screens; the object is reused. */
  readonly onScan?: (scan: Scan, tMs: number) => void
  readonly configVersion?: string
  /** From an accepted step test; a saved state has it already. */
  readonly known?: readonly StartingKnowledge[]
  /** Other sizes and explanations than the defaults, to see what each is worth. */
  readonly bank?: BankSettings
  readonly charts?: boolean
}

const timelineMs = 600_000
const nothing: readonly PipelineEvent[] = []
/** A shift of a stream's viscosity or of a tap is taken into the model; its alarm stands so long, then returns to normal by itself. */
const standsMs = 30 * 60_000
const belowClean = 'slough-off of what the baseline held, a leak or bypass, or an instrument'
const noEvidence = { for: [], against: [], notExcluded: [] }

/**
 * source → quality → scan → derive → detect → alarm → advise on one recorded sequence. Pure: what comes out depends on the skid and on
 * the entries pushed, in their order, and on nothing else. How rows are cut into blocks makes no difference.
 * Errors: STATE_VERSION for a state of another version.
 */
export function createPipeline(skid: Skid, saved?: PipelineState, options: PipelineOptions = {}) {
  if (saved !== undefined && saved.version !== 1)
    throw new MonitorError('STATE_VERSION', `state version ${String(saved.version)} is not 1`, {
      hint: 'analyse the record from its start',
    })
  const layout = layoutOf(skid)
  const scanMs = skid.scanSeconds * 1000
  const stepMs = stepScans(skid.scanSeconds) * scanMs
  let events: PipelineEvent[] = []

  const site = siteRules(skid)
  const book = createBook({ configVersion: options.configVersion ?? skid.skid, policyOf: site.policyOf }, saved?.book)
  const watch = createWatch(layout, stepMs, saved?.watch, options)
  const instruments = createInstruments(layout, saved?.instruments)
  const present = createPresent(layout, saved?.present)
  const adviser = createAdviser(saved?.adviser, (segment, ratios) =>
    planFlush({
      // Limits as they stand now, a person may have changed them.
      skid: {
        ...skid,
        segments: skid.segments.map((g, i) => ({ ...g, limits: { ...g.limits, dpHighBar: limits[i]!.dpHighBar } })),
      },
      segments: [segment],
      ratios,
      given: present.forFlush(layout.segments.findIndex((g) => g.spec.id === segment)),
    }),
  )
  const limits: LimitTable = saved?.limits ?? limitsOf(layout)
  const excursions = createExcursions(layout, limits, book.hears, saved?.excursions)
  const limitChecks = createLimits(layout, limits, book.hears, site)
  const fouled = (i: number): boolean => watch.segment(i).growth !== null
  const s = {
    timed: saved?.timed ?? [],
    timelineN: saved?.timelineN ?? 0,
    production: saved?.production ?? false,
    armed: saved?.armed ?? false,
    inferred: saved?.inferred ?? false,
    ratio: saved?.ratio ?? layout.segments.map((): number | null => null),
    ratioMs: saved?.ratioMs ?? -1,
  }
  const grid = createGrid(skid, onScan, saved?.grid)
  const stepper = createStepper(layout, onStep, saved?.stepper)
  grid.setFlowing(s.production)

  const forAdvice = (): SegmentForAdvice[] =>
    layout.segments.map((g, i) => ({
      id: g.spec.id,
      kind: g.spec.kind,
      ratio: s.ratio[i] ?? null,
      growth: watch.segment(i).growth,
    }))
  const signal = (x: Signal) => book.signal(site.apply(x))

  function drainBook(): void {
    const { changes, records } = book.drain()
    for (const change of changes) {
      events.push({ kind: 'alarm', change })
      for (const advice of adviser.raised(change, forAdvice())) events.push({ kind: 'advice', tMs: change.tMs, advice })
    }
    for (const record of records) events.push({ kind: 'transition', record })
  }

  function onScan(scan: Scan): void {
    const endMs = scan.tMs + scanMs
    stepper.scan(scan)
    const silent = instruments.scan(scan, endMs, grid.state, signal)
    limitChecks.scan(scan, endMs, { production: s.production, silent, fouled }, signal)
    excursions.scan(scan, endMs, { production: s.production, armed: s.armed }, signal)
    for (const t of s.timed) if (endMs >= t.untilMs) end(t.key, endMs)
    if (s.timed.length > 0) s.timed = s.timed.filter((t) => endMs < t.untilMs)
    book.tick(endMs)
    drainBook()
    timeline(endMs)
    options.onScan?.(scan, endMs)
  }

  function onStep(step: Step): void {
    const endMs = step.tMs + stepMs / 2
    const out = watch.step(
      step,
      layout.segments.map((_, i) => highestDp(limits, i)),
    )
    if (out.mode.production !== s.production) {
      s.production = out.mode.production
      grid.setFlowing(s.production)
    }
    if (s.production) present.take(step)
    s.inferred = out.mode.inferred
    s.armed = out.mode.armed
    out.now.forEach((n, i) => {
      s.ratio[i] = n.ratio
    })
    s.ratioMs = endMs
    for (const e of out.events) onWatch(e, endMs)
    if (out.mode.stops) endAll(endMs)
    drainBook()
    for (const advice of adviser.step(endMs, forAdvice())) events.push({ kind: 'advice', tMs: endMs, advice })
    events.push({
      kind: 'step',
      tMs: endMs,
      production: s.production,
      inferred: s.inferred,
      segments: out.now.map((n) => ({
        ratio: n.ratio,
        dpBar: n.step.dpPa === null ? null : barFromPa(n.step.dpPa),
        flowMlMin: n.step.volFlowM3S === null ? null : mlMinFromM3s(n.step.volFlowM3S),
        tempC: n.step.tempK === null ? null : cFromK(n.step.tempK),
      })),
    })
  }

  function onWatch(e: WatchEvent, tMs: number): void {
    switch (e.kind) {
      case 'bank':
        onBank(e.event, e.onset, e.ratio, tMs)
        return
      case 'creep':
        onCreep(e, tMs)
        return
      case 'baseline':
        present.baselined(e.segment)
        events.push({ kind: 'baseline', segment: layout.segments[e.segment]!.spec.id, baseline: e.baseline })
        return
      case 'onset':
        events.push({ kind: 'onset', segment: layout.segments[e.segment]!.spec.id, onset: e.onset })
        return
      case 'below': {
        const id = layout.segments[e.segment]!.spec.id
        const text = `${id}: resistance below clean by ${(100 * e.share).toFixed(1)} % (ratio ${e.ratio.toFixed(3)}): ${belowClean}; its charts begin anew from there`
        events.push({ kind: 'note', tMs, text })
        return
      }
      case 'cleared':
        end(`fouling:${layout.segments[e.segment]!.spec.id}`, tMs)
        return
      case 'forecast':
        return
    }
  }

  function onBank(e: BankEvent, onset: Interval | null, ratio: number | null, tMs: number): void {
    const finding = findingOf(layout, e)
    const charts = e.kind === 'deposit' || e.kind === 'blockage' ? chartsSay(e.segment) : []
    const evidence = { for: [...finding.for, ...charts], against: finding.against, notExcluded: finding.notExcluded }
    const base = {
      tMs,
      over: true,
      value: null,
      limit: null,
      unit: null,
      cause: finding.cause,
      onset: null,
      evidence,
      onDelayS: 0,
      offDelayS: 0,
    }
    switch (e.kind) {
      case 'deposit':
      case 'blockage': {
        const seg = layout.segments[e.segment]!.spec
        const began = onset === null ? '' : `, began about ${new Date(onset.atMs).toISOString()}`
        const what =
          seg.kind === 'filter'
            ? 'filter is loading'
            : e.kind === 'blockage'
              ? 'resistance rose at once: bridging or a plug'
              : 'deposit is growing'
        signal({
          ...base,
          key: `fouling:${seg.id}`,
          kind: 'fouling',
          segment: seg.id,
          tag: null,
          priority: e.kind === 'blockage' ? 'high' : 'medium',
          value: ratio,
          limit: 1,
          unit: 'ratio',
          message: `${seg.title}: ${what}, resistance ${ratio === null ? '' : ratio.toFixed(3)} times clean${began}`,
          onset: onset === null ? null : onsetReport(onset),
          detector: e.kind === 'blockage' ? 'step likelihood' : 'growth likelihood',
        })
        return
      }
      case 'instrument': {
        const key = `sensor:${e.tag}:zero`
        signal({
          ...base,
          key,
          kind: 'sensor',
          segment: layout.segments[e.segment]!.spec.id,
          tag: e.tag,
          priority: 'low',
          value: barFromPa(e.sizePa),
          limit: 0,
          unit: 'bar',
          message: `${e.tag}: its zero ${e.ramp ? 'drifts' : 'shifted'}, by about ${(e.sizePa / 100).toFixed(0)} mbar so far; verdicts allow for it`,
          detector: e.neighbours ? 'tap likelihood' : 'step likelihood',
        })
        s.timed.push({ key, untilMs: tMs + 4 * standsMs })
        return
      }
      case 'stream': {
        if (e.nearMove) {
          events.push({
            kind: 'note',
            tMs,
            text: `after a step of flow or temperature the viscosity of stream ${layout.streams[e.stream]!.id} was corrected by ${(100 * Math.expm1(e.size)).toFixed(1)} %`,
          })
          return
        }
        const first = layout.segments.find((g) => g.streams.includes(e.stream))
        signal({
          ...base,
          key: `fouling:stream:${layout.streams[e.stream]!.id}`,
          kind: 'fouling',
          segment: first?.spec.id ?? null,
          tag: layout.skid.tags[layout.streams[e.stream]!.tag]?.tag ?? null,
          priority: 'low',
          value: Math.exp(e.size),
          limit: 1,
          unit: 'ratio',
          message: `Stream ${layout.streams[e.stream]!.id}: resistance of all its segments changed together by ${(100 * Math.expm1(e.size)).toFixed(1)} %: verify lot and flow reading`,
          detector: 'stream likelihood',
        })
        s.timed.push({ key: `fouling:stream:${layout.streams[e.stream]!.id}`, untilMs: tMs + standsMs })
        return
      }
      case 'step':
        events.push({
          kind: 'note',
          tMs,
          text: `${layout.segments[e.segment]!.spec.id}: resistance stepped by ${(100 * Math.expm1(e.size)).toFixed(1)} %${e.nearMove ? ', with a step of flow or temperature' : ''}; taken into the level`,
        })
    }
  }

  /** Creeping growth found by the charts of the promise; what neighbours on one stream share is noted, not alarmed. */
  function onCreep(e: Extract<WatchEvent, { kind: 'creep' }>, tMs: number): void {
    const g = layout.segments[e.segment]!.spec
    const d = e.reading.drift!
    if (e.shared) {
      events.push({
        kind: 'note',
        tMs,
        text: `${g.id}: resistance crept to ${e.ratio.toFixed(3)} times clean together with its neighbours: lot, feed or flow reading; its charts begin anew from there`,
      })
      return
    }
    signal({
      key: `fouling:${g.id}`,
      tMs,
      over: true,
      kind: 'fouling',
      segment: g.id,
      tag: null,
      priority: 'low',
      value: e.ratio,
      limit: 1,
      unit: 'ratio',
      message: `${g.title}: resistance creeps up, ${e.ratio.toFixed(3)} times clean`,
      cause: g.kind === 'filter' ? 'filter' : 'fouling',
      onset: e.onset === null ? null : onsetReport(e.onset),
      detector: 'cusum and drift',
      evidence: {
        for: [
          `CUSUM ${e.reading.cusum.toFixed(1)} over its interval ${e.reading.h.toFixed(1)}`,
          `rises by ${(100 * d.perHour).toFixed(2)} % an hour (99 %: ${(100 * d.low).toFixed(2)} to ${(100 * d.high).toFixed(2)})`,
        ],
        against: [],
        notExcluded: ['slow drift of an instrument', 'slow change of composition'],
      },
      onDelayS: 0,
      offDelayS: 0,
    })
  }

  /** What the charts of a segment say beside the verdict. */
  function chartsSay(segment: number): string[] {
    const c = watch.charts(segment)
    if (c === null) return ['charts by the promise: not yet, they need a final baseline']
    const slope = c.drift === null ? 'no drift told apart from none' : `drift ${(100 * c.drift.perHour).toFixed(1)} % an hour`
    return [`CUSUM ${c.cusum.toFixed(1)} of ${c.h.toFixed(1)} σ, ${c.cusumOver ? 'agrees' : 'silent so far'}; ${slope}`]
  }

  /** The condition of an alarm without a value of its own is over. */
  function end(key: string, tMs: number): void {
    if (!book.isActive(key)) return
    signal({
      key,
      tMs,
      over: false,
      kind: 'fouling',
      segment: null,
      tag: null,
      priority: 'low',
      value: null,
      limit: null,
      unit: null,
      message: '',
      cause: null,
      onset: null,
      detector: '',
      evidence: noEvidence,
      onDelayS: 0,
      offDelayS: 0,
    })
  }

  /** Production stopped: what was found of it no longer stands. */
  function endAll(tMs: number): void {
    for (const t of s.timed) end(t.key, tMs)
    s.timed = []
  }

  function timeline(endMs: number): void {
    const fromMs = grid.state.firstMs
    while (fromMs + s.timelineN * timelineMs <= endMs) {
      const at = fromMs + s.timelineN * timelineMs
      const fresh = s.production && s.ratioMs >= 0 && at - s.ratioMs <= 4 * stepMs
      events.push({
        kind: 'timeline',
        tMs: at,
        points: layout.segments.map((g, i) => ({
          segment: g.spec.id,
          ratio: fresh ? (s.ratio[i] ?? null) : null,
          forecast: fresh ? (watch.segment(i).growth?.forecast ?? null) : null,
        })),
      })
      s.timelineN++
    }
  }

  function onAct(act: Act): void {
    events.push({ kind: 'act', act })
    if (act.kind === 'limit') {
      const i = layout.segments.findIndex((g) => g.spec.id === act.segment)
      if (i >= 0) limits[i]![act.limit] = act.value
    } else book.act(act)
    drainBook()
  }

  const take = (): readonly PipelineEvent[] => {
    if (events.length === 0) return nothing
    const out = events
    events = []
    return out
  }

  return {
    layout,
    push(entry: Entry): readonly PipelineEvent[] {
      if (entry.kind === 'rows') grid.rows(entry.block)
      else if (entry.kind === 'tick') grid.tick(entry.tMs)
      else onAct(entry.act)
      return take()
    },
    /** One row of a block, for who must know which row brought what about. A block is gone through from its first row to its last. */
    pushRow(block: RowBlock, row: number): readonly PipelineEvent[] {
      grid.rows(block, row, row + 1)
      return take()
    },
    /** End of a finished log: the last scans close. */
    finish(): readonly PipelineEvent[] {
      grid.finish()
      return take()
    },
    /** Counts and current knowledge, for the report's head and for screens. Read only. */
    view: () => ({
      grid: grid.state,
      production: s.production,
      inferred: s.inferred,
      ratio: s.ratio,
      limits,
      segment: watch.segment,
      learned: watch.learned,
      present,
      alarms: book.rows(),
    }),
    save: (): PipelineState =>
      structuredClone({
        version: 1 as const,
        grid: grid.state,
        stepper: stepper.state,
        watch: watch.save(),
        book: book.state(),
        instruments: instruments.state,
        excursions: excursions.state(),
        adviser: adviser.state,
        present: present.state,
        limits,
        ...s,
      }),
  }
}
export type Pipeline = ReturnType<typeof createPipeline>

export const onsetReport = (i: Interval): OnsetReport => ({
  at: iso(i.atMs),
  low: iso(i.lowMs),
  high: iso(i.highMs),
  level: i.level,
})
const iso = (ms: number): string => new Date(ms).toISOString()

function highestDp(limits: LimitTable, i: number): { name: LimitName; pa: number } | null {
  const high = limits[i]!.dpHighBar
  if (high !== null) return { name: 'dpHighBar', pa: paFromBar(high) }
  const highHigh = limits[i]!.dpHighHighBar
  return highHigh === null ? null : { name: 'dpHighHighBar', pa: paFromBar(highHigh) }
}

export type { ForecastRecord }
