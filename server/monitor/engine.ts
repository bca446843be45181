import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import { createCollector } from '../core/pipeline/collect.ts'
import type { PipelineEvent } from '../core/pipeline/events.ts'
import { createPipeline, type PipelineState } from '../core/pipeline/pipeline.ts'
import type { RowBlock } from '../core/reading.ts'
import type { AdviceReport, Report } from '../core/report.ts'
import type { Entry } from '../core/sequence.ts'
import type { Skid } from '../core/skid.ts'
import type { StoredEvent } from '../store/journal.ts'
import type { Json, RunId } from '../store/keys.ts'
import type { ActRow } from '../wire/act.ts'
import type { AlarmRow, TransitionRow } from '../wire/alarm.ts'
import type { Interval } from '../wire/live.ts'
import type { ReadingFrame, StepPoint } from '../wire/trend.ts'
import { alarmHelpOf } from './alarm-help.ts'
import { createAlarmLog, transitionRow } from './alarm-log.ts'
import type { MonitorStore } from './needs.ts'
import { createScanView, type ScanViewState } from './scan-view.ts'
import { type GrowthNow, readSteps, type StepRow, stepBlock, stepPoint } from './step-log.ts'
import { type Baseline, baselineOf, storedTransition } from './stored-rows.ts'

/** A snapshot: the pipeline after `seq` entries and how much it had said by then. Plain JSON. */
export interface EngineState {
  readonly pipeline: PipelineState
  readonly scans: ScanViewState
  readonly seq: number
  readonly events: number
  readonly transitions: number
  readonly steps: number
  readonly lastStep: StepRow | null
  readonly finished: boolean
}

/** What entries brought about, once it is on disk. */
export interface News {
  readonly steps: readonly StepPoint[]
  readonly readings: ReadingFrame | null
  readonly alarms: readonly AlarmRow[]
  readonly acts: readonly ActRow[]
  readonly transitions: readonly TransitionRow[]
}

export interface EngineOptions {
  readonly skid: Skid
  readonly store: MonitorStore
  readonly run: RunId
  /** The run beside it that keeps its detector steps. */
  readonly stepsRun: RunId
  /** Nobody will ask this engine for its report or advice: what they alone need is not kept. */
  readonly journalOnly?: boolean
}

/** The report looks back over steps for at most a week; two hours more for what lies beyond the snapshot. */
const reportStepsMs = (7 * 24 + 2) * 3_600_000

const toInterval = (i: { atMs: number; lowMs: number; highMs: number; level: number } | null): Interval | null =>
  i === null ? null : { atMs: i.atMs, lowMs: i.lowMs, highMs: i.highMs, level: i.level }

/**
 * One run's pipeline with its journal. Entries go in once they are on disk; what they bring about is gathered until `journal` writes it,
 * and only then told. Rows go in one at a time, so that every event's number is the same however the source cut them.
 * Resumes from its latest snapshot by replaying what the store holds beyond it; what was written before is compared, not doubled.
 */
export function createEngine({ skid, store, run, stepsRun, journalOnly = false }: EngineOptions) {
  const saved = (store.snapshots.latest(run)?.state ?? null) as EngineState | null
  const scans = createScanView(skid, saved?.scans)
  const pipeline = createPipeline(skid, saved?.pipeline, { onScan: scans.scan })
  const collector = createCollector(skid)
  const alarms = createAlarmLog(alarmHelpOf(pipeline.skid))
  const advice: { atMs: number; advice: AdviceReport }[] = []
  const { rows: stepsOnDisk, width: stepsWidth } = store.sequence.count(stepsRun)
  const counts = {
    seq: saved?.seq ?? 0,
    events: saved?.events ?? 0,
    transitions: saved?.transitions ?? 0,
    steps: saved?.steps ?? 0,
  }
  const baselines = new Map<string, Baseline>()
  let lastStep: StepRow | null = saved?.lastStep ?? null
  let finished = saved?.finished ?? false
  let differing = 0
  let pending = empty()

  function fold(e: PipelineEvent, tMs: number): void {
    if (!journalOnly) collector.take([e])
    alarms.take(e)
    if (e.kind === 'baseline') baselines.set(e.segment, baselineOf(e.baseline))
    if (e.kind === 'advice' && !journalOnly) advice.push({ atMs: tMs, advice: e.advice })
  }

  function growthNow(): GrowthNow[] {
    const view = pipeline.view()
    return skid.segments.map((_, i) => {
      const w = view.segment(i)
      const forecast = w.growth?.forecast ?? null
      const c = w.charts
      return {
        cusum: c === null ? null : c.cusum.high.sum / c.design.h,
        cusumLow: c === null ? null : c.cusum.low.sum / c.design.h,
        growthPerHour: w.growth?.growthPerHour ?? null,
        onset: toInterval(w.growth?.onset ?? w.hindsight),
        forecast: forecast === null ? null : { ...toInterval(forecast)!, limit: forecast.limit },
      }
    })
  }

  function heard(events: readonly PipelineEvent[], seq: number): void {
    if (events.length === 0) return
    const tMs = Math.max(0, pipeline.view().grid.nowMs)
    let growth: GrowthNow[] | null = null
    for (const e of events) {
      if (e.kind === 'step') {
        if (!journalOnly) collector.take([e])
        growth ??= growthNow()
        lastStep = { tMs: e.tMs, production: e.production, segments: e.segments, growth }
        if (counts.steps++ >= stepsOnDisk) pending.steps.push(lastStep)
        continue
      }
      fold(e, tMs)
      if (e.kind === 'transition') pending.transitions.push(e.record)
      else pending.events.push({ seq, tMs, kind: e.kind, body: e as unknown as Json })
      if (e.kind === 'act') pending.acts.push({ seq, act: e.act })
    }
  }

  function pushRows(block: RowBlock): void {
    for (let r = 0; r < block.rows; ) {
      const { next, events } = pipeline.pushSome(block, r)
      heard(events, counts.seq)
      counts.seq += next - r
      r = next
    }
  }

  /** Entries that are on disk already, in their order. */
  function push(entries: readonly Entry[]): void {
    for (const entry of entries) {
      if (entry.kind === 'rows') pushRows(entry.block)
      else {
        heard(pipeline.push(entry), counts.seq)
        counts.seq++
      }
    }
  }

  /** Writes what was heard; `news` takes it once that is committed. After a failed commit it is written again at the next call. */
  function journal(): void {
    if (pending.events.length > 0) differing += store.events.append(run, counts.events, pending.events).differing
    if (pending.transitions.length > 0)
      differing += store.transitions.append(run, counts.transitions, pending.transitions.map(storedTransition)).differing
    if (pending.steps.length > 0)
      store.sequence.append([
        { run: stepsRun, entries: [{ kind: 'rows', block: stepBlock(pending.steps, skid.segments.length, stepsWidth) }] },
      ])
  }

  /** The steps that the report still needs; those beyond the snapshot come again by themselves. */
  function foldSteps(): void {
    const span = counts.steps === 0 ? null : store.sequence.span(stepsRun)
    if (span === null) return
    const stored = readSteps(store, stepsRun, skid.segments.length, span.toMs - reportStepsMs, span.toMs + 1)
    for (const { tMs, production, segments } of stored.slice(0, Math.max(0, stored.length - (stepsOnDisk - counts.steps))))
      collector.take([{ kind: 'step', tMs, production, inferred: skid.phaseColumn === null, segments }])
  }

  function resume(): void {
    for (const { tMs, body } of store.events.list(run, 0, counts.events)) fold(body as unknown as PipelineEvent, tMs)
    for (const t of store.transitions.list(run).slice(0, counts.transitions))
      fold({ kind: 'transition', record: t.more as unknown as AlarmRecord }, t.tMs)
    foldSteps()
    for (const { entry } of store.sequence.read(run, counts.seq)) push([entry])
  }
  resume()

  return {
    run,
    skid,
    pipeline,
    scans,
    alarms,
    /** Recommendations so far, oldest first, with the time they were made. */
    advice,
    /** The baseline in force of each segment. */
    baselines: (): (Baseline | null)[] => skid.segments.map((g) => baselines.get(g.id) ?? null),
    push,
    journal,
    seq: () => counts.seq,
    lastStep: () => lastStep,
    finished: () => finished,
    /** Events that a replay after a restart gave otherwise than they were written; 0 unless the tool's version changed in between. */
    differing: () => differing,
    /** What was journalled since the last call, to be published. */
    news(): News {
      const out = {
        steps: pending.steps.map(stepPoint),
        readings: scans.frame(),
        alarms: alarms.changes(),
        acts: pending.acts,
        transitions: pending.transitions.map(transitionRow),
      }
      counts.events += pending.events.length
      counts.transitions += pending.transitions.length
      pending = empty()
      return out
    },
    /** The log has ended: the last scans close. Journal afterwards. */
    finish(): void {
      if (finished) return
      heard(pipeline.finish(), counts.seq)
      finished = true
    },
    /** A snapshot; between `news` and the next entry. */
    save(): void {
      const state: EngineState = {
        pipeline: pipeline.save(), scans: scans.state(), ...counts, lastStep, finished,
      } // biome-ignore format: a list
      store.snapshots.put(run, counts.seq, state as unknown as Json)
    },
    report(notes: readonly string[] = []): Report {
      if (journalOnly) throw new Error('this engine keeps no report')
      return collector.report(pipeline, notes)
    },
  }
}
export type Engine = ReturnType<typeof createEngine>

const empty = () => ({
  events: [] as StoredEvent[],
  transitions: [] as AlarmRecord[],
  steps: [] as StepRow[],
  acts: [] as ActRow[],
})
