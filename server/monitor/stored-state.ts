import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import type { PipelineEvent } from '../core/pipeline/events.ts'
import { cell, type Phase, phases } from '../core/reading.ts'
import type { LimitName } from '../core/sequence.ts'
import { valueUnit } from '../core/units.ts'
import type { LiveState, ScanComb, TagState } from '../wire/live.ts'
import { alarmHelpOf } from './alarm-help.ts'
import { type AlarmLog, createAlarmLog } from './alarm-log.ts'
import type { Engine } from './engine.ts'
import { adviceInForce, limitChanges, limitsOfSkid, stateOf } from './live-state.ts'
import { combTeeth } from './scan-view.ts'
import { skidAt } from './skid-at.ts'
import { stepMsOf } from './skid-facts.ts'
import { stepTag } from './step-log.ts'
import { baselineOf } from './stored-rows.ts'
import { type RunParts, stepsBetween } from './trends.ts'

/** The alarms of a run as they stood at a moment, from its journal. */
export function alarmsAt(parts: RunParts, atMs: number): AlarmLog {
  const { store, run } = parts
  const known = skidAt(parts, atMs)
  const log = createAlarmLog(alarmHelpOf(() => known))
  for (const e of store.events.list(run)) if (e.kind === 'alarm' && e.tMs <= atMs) log.take(e.body as unknown as PipelineEvent)
  for (const t of store.transitions.list(run))
    if (t.tMs <= atMs) log.take({ kind: 'transition', record: t.more as unknown as AlarmRecord })
  return log
}

/** The whole state of a stored run as it was known at a moment of it: nothing that came later leaks in. */
export function storedState(p: RunParts, atMs: number): LiveState {
  const { store, skid, run } = p
  const scanMs = skid.scanSeconds * 1000
  const limits = limitsOfSkid(skid)
  const baselines = new Map<string, ReturnType<typeof baselineOf>>()
  const advice: Engine['advice'] = []
  let flush: LiveState['flush'] = null
  for (const { tMs, body } of store.events.list(run)) {
    if (tMs > atMs) break
    const e = body as unknown as PipelineEvent
    if (e.kind === 'baseline') baselines.set(e.segment, baselineOf(e.baseline))
    else if (e.kind === 'flush') flush = e.course
    else if (e.kind === 'advice') advice.push({ atMs: tMs, advice: e.advice })
    else if (e.kind === 'configuration' || (e.kind === 'act' && e.act.kind === 'limit')) {
      const changed =
        e.kind === 'act' ? [e.act as { segment: string; limit: LimitName; value: number | null }] : limitChanges(e.applied.changes)
      for (const { segment, limit, value } of changed) {
        const i = skid.segments.findIndex((s) => s.id === segment)
        if (i >= 0) limits[i]![limit] = value
      }
    }
  }
  const step = stepsBetween(p, atMs - 4 * stepMsOf(skid), atMs).at(-1) ?? null
  const span = store.sequence.span(run)
  const max =
    span === null || atMs <= span.fromMs
      ? null
      : store.readings.envelope(
          p.stepsRun,
          skid.segments.map((_, i) => stepTag(i, 'ratio')),
          span.fromMs,
          atMs,
          2,
        )
  const seen = lastReadings(p, atMs, scanMs)
  const alarms = alarmsAt(p, atMs)
  const lastRowMs = seen.lastRowMs
  return stateOf({
    run,
    skid,
    clock: { kind: 'wall', nowMs: atMs, speed: 1 },
    mode: {
      phase: seen.phase ?? (step?.production ? 'production' : null),
      production: step?.production ?? false,
      inferred: skid.phaseColumn === null,
    },
    data: {
      lastRowMs,
      ageS: lastRowMs === null ? null : (atMs - lastRowMs) / 1000,
      cutOff: lastRowMs !== null && atMs - lastRowMs > 2 * scanMs,
      lagS: 0,
      source: { state: 'ended', message: null },
    },
    comb: seen.comb,
    tags: seen.tags,
    step,
    ratioMax: skid.segments.map((_, i) => {
      const e = max?.tags[i]
      const top = e === undefined ? [] : Array.from(e.max).filter((_, b) => e.count[b]! > 0)
      return top.length === 0 ? null : Math.max(...top)
    }),
    limits,
    baselines: skid.segments.map((s) => baselines.get(s.id) ?? null),
    alarms: alarms.standing(),
    flood: alarms.flood(atMs),
    advice: adviceInForce(advice, atMs),
    flush,
  })
}

/** The last reading of each tag in the 30 scans before a moment, as the log gives it (its own marks, not the tool's judgement). */
function lastReadings({ store, skid, run }: RunParts, atMs: number, scanMs: number) {
  const endMs = Math.floor(atMs / scanMs) * scanMs
  const fromMs = endMs - combTeeth * scanMs
  const columns = skid.tags.map((_, i) => i)
  if (skid.phaseColumn !== null && store.sequence.count(run).rows > 0) columns.push(skid.tags.length)
  const samples = store.readings.samples(run, columns, fromMs, atMs + 1)
  const received = new Array<boolean>(combTeeth).fill(false)
  let lastRowMs: number | null = null
  for (const s of samples)
    for (const t of s.tMs) {
      if (lastRowMs === null || t > lastRowMs) lastRowMs = t
      const tooth = Math.floor((t - fromMs) / scanMs)
      if (tooth >= 0 && tooth < combTeeth) received[tooth] = true
    }
  const tags = skid.tags.map((tag, i): TagState => {
    const s = samples[i]!
    const at = s.codes.findLastIndex((code) => code === cell.value || code === cell.uncertain)
    const newest = s.codes.at(-1)
    const isText = tag.quantity === 'text' || tag.quantity === 'state'
    const quality = newest === undefined ? 'none' : newest === cell.value ? 'good' : newest === cell.uncertain ? 'uncertain' : 'bad'
    return {
      tag: tag.tag,
      value: at < 0 || isText ? null : s.values[at]!,
      unit: valueUnit(tag),
      atMs: at < 0 ? null : s.tMs[at] === lastRowMs ? endMs : s.tMs[at]!,
      quality,
      reason: quality === 'good' || quality === 'none' ? null : quality === 'bad' ? 'missing' : 'source-uncertain',
      held: false,
    }
  })
  const words = samples[skid.tags.length]
  const word = words === undefined ? -1 : words.codes.lastIndexOf(cell.value)
  const phase: Phase | null = word < 0 ? null : (phases[words!.values[word]!] ?? null)
  const comb: ScanComb = { scanMs, endMs: lastRowMs === null ? null : endMs, received }
  return { lastRowMs, tags, phase, comb }
}
