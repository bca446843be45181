import { round9 } from '../core/pipeline/collect.ts'
import { type LimitName, limitNames } from '../core/sequence.ts'
import type { SettingChange } from '../core/settings/flat.ts'
import type { Skid } from '../core/skid.ts'
import { barFromPa, toSi, valueUnit } from '../core/units.ts'
import type { AlarmRow } from '../wire/alarm.ts'
import type { AdviceState, DataState, LiveState, RunMode, ScanComb, SegmentState, TagState } from '../wire/live.ts'
import type { RunClock } from '../wire/service.ts'
import type { Marks } from '../wire/trend.ts'
import { type AlarmLog, mostUrgent } from './alarm-log.ts'
import type { Engine } from './engine.ts'
import type { StepRow } from './step-log.ts'

/** What a state is made of, of a live run and of a stored one at a moment alike. */
export interface StateParts {
  readonly run: number
  readonly skid: Skid
  readonly clock: RunClock
  readonly mode: RunMode
  readonly data: DataState
  readonly comb: ScanComb
  readonly tags: readonly TagState[]
  readonly step: StepRow | null
  readonly ratioMax: readonly (number | null)[]
  readonly limits: readonly Readonly<Record<LimitName, number | null>>[]
  readonly baselines: readonly (Omit<Marks['baselines'][number], 'segment'> | null)[]
  readonly alarms: readonly AlarmRow[]
  readonly flood: ReturnType<AlarmLog['flood']>
  readonly advice: readonly AdviceState[]
  readonly flush: LiveState['flush']
}

/** Advice older than this is history, h; within it the latest of each action and place stands beside the latest of all. */
const adviceHours = 12

export function stateOf(p: StateParts): LiveState {
  return {
    run: p.run,
    clock: p.clock,
    mode: p.mode,
    data: p.data,
    comb: p.comb,
    segments: p.skid.segments.map((_, i) => segmentState(p, i)),
    tags: p.tags,
    alarms: p.alarms,
    flood: p.flood === null ? null : { sinceMs: p.flood.sinceMs, count: p.flood.count, first: p.flood.first },
    advice: p.advice,
    flush: p.flush,
  }
}

function segmentState(p: StateParts, i: number): SegmentState {
  const spec = p.skid.segments[i]!
  const now = p.step?.segments[i]
  const growth = p.step?.growth[i]
  const limits = p.limits[i]!
  const urgent = mostUrgent(p.alarms, spec.id)
  const ratio = now?.ratio ?? null
  const dpBar = now?.dpBar ?? null
  const forecast = growth?.forecast ?? null
  return {
    segment: spec.id,
    atMs: p.step?.tMs ?? null,
    ratio,
    dpBar,
    cleanDpBar: ratio === null || dpBar === null || ratio <= 0 ? null : dpBar / ratio,
    flowMlMin: now?.flowMlMin ?? null,
    tempC: now?.tempC ?? null,
    ratioMax: p.ratioMax[i] ?? null,
    dpNowBar: dpNow(p, i),
    temperatures: spec.temperatures.map((tag) => ({ tag, tempC: celsius(p, tag) })),
    growthPerHour: growth?.growthPerHour ?? null,
    onset: growth?.onset ?? null,
    forecast: forecast === null ? null : { ...forecast, limitBar: limits[forecast.limit] },
    baseline: p.baselines[i] ?? null,
    limits,
    standing: urgent === null ? null : { alarm: urgent.id, priority: urgent.priority, needsAck: urgent.needsAck },
  }
}

/** A tag's value in the newest scan, SI; null where that scan had none. */
function newest(p: StateParts, tag: string): number | null {
  const i = p.skid.tags.findIndex((t) => t.tag === tag)
  const state = p.tags[i]
  if (state === undefined || state.value === null || state.atMs === null || state.atMs !== p.comb.endMs) return null
  return toSi(state.value, valueUnit(p.skid.tags[i]!))
}

const celsius = (p: StateParts, tag: string): number | null => {
  const k = newest(p, tag)
  return k === null ? null : round9(k - 273.15)
}

function dpNow(p: StateParts, i: number): number | null {
  const dp = p.skid.segments[i]!.dp
  if (dp.kind === 'dp') {
    const pa = newest(p, dp.dpTag)
    return pa === null ? null : round9(barFromPa(pa))
  }
  const inPa = newest(p, dp.pressureIn)
  const outPa = dp.kind === 'held' ? dp.outBar * 1e5 : newest(p, dp.pressureOut)
  return inPa === null || outPa === null ? null : round9(barFromPa(inPa - outPa))
}

/** The latest of each recommendation (action and place) of the last hours, latest first. */
export function adviceInForce(all: Engine['advice'], nowMs: number): AdviceState[] {
  const seen = new Set<string>()
  const out: AdviceState[] = []
  for (const { atMs, advice } of [...all].reverse()) {
    if (atMs > nowMs) continue
    if (nowMs - atMs > adviceHours * 3_600_000) break
    const id = `${advice.action} ${advice.segments.join(' ')}`
    if (!seen.has(id)) out.push({ ...advice, atMs })
    seen.add(id)
  }
  return out
}

export const limitsOfSkid = (skid: Skid): Record<LimitName, number | null>[] =>
  skid.segments.map((s) => Object.fromEntries(limitNames.map((n) => [n, s.limits[n]])) as Record<LimitName, number | null>)

/** The limits among changed settings. */
export const limitChanges = (changes: readonly SettingChange[]) =>
  changes.flatMap(({ path, new: now }) => {
    const [top, segment = '', group, name] = path.split('.')
    const limit = limitNames.find((n) => n === name)
    const isLimit = top === 'segments' && group === 'limits' && limit !== undefined && (now === null || typeof now === 'number')
    return isLimit ? [{ segment, limit, value: now }] : []
  })

/** The state of a live run as it stands. */
export function engineState(e: Engine, clock: RunClock, source: DataState['source'], usualGapS: number): LiveState {
  const view = e.pipeline.view()
  const { skid } = e
  const lastRowMs = view.grid.lastRowMs < 0 ? null : view.grid.lastRowMs
  const ageS = lastRowMs === null ? null : Math.max(0, (clock.nowMs - lastRowMs) / 1000)
  const phase = e.scans.phase()
  const step = e.lastStep()
  const comb = e.scans.comb()
  return stateOf({
    run: e.run,
    skid,
    clock,
    mode: {
      phase: skid.phaseColumn === null ? (view.production ? 'production' : null) : phase,
      production: view.production,
      inferred: view.inferred,
    },
    data: {
      lastRowMs,
      ageS,
      cutOff: ageS !== null && ageS > Math.max(2 * skid.scanSeconds, 1.5 * usualGapS) * Math.max(1, clock.speed),
      lagS: lastRowMs === null || comb.endMs === null ? null : Math.max(0, (lastRowMs - comb.endMs) / 1000),
      source,
    },
    comb,
    tags: e.scans.tags(),
    step,
    ratioMax: skid.segments.map((_, i) => view.segment(i).max),
    limits: view.limits,
    baselines: e.baselines(),
    alarms: e.alarms.standing(),
    flood: e.alarms.flood(clock.nowMs),
    advice: adviceInForce(e.advice, clock.nowMs),
    flush: view.flush?.course ?? null,
  })
}
