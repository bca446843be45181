import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import type { PipelineEvent } from '../core/pipeline/events.ts'
import type { Act } from '../core/sequence.ts'
import type { AlarmRow } from '../wire/alarm.ts'
import type { AlarmStory, StoryLine } from '../wire/alarm-story.ts'
import { alarmsAt } from './stored-state.ts'
import type { RunParts } from './trends.ts'

/** The alarm of an occurrence by place and title. */
export const alarmName = (a: AlarmRow): string => `${a.segment ?? a.tag ?? 'Skid'}: ${a.help?.title ?? a.kind}`

/** What a person did, as a sentence. */
export function actText(act: Act): string {
  switch (act.kind) {
    case 'comment':
      return act.text
    case 'limit':
      return `${act.segment} ${act.limit} set to ${act.value ?? 'none'}: ${act.reason}`
    case 'settings':
      return `settings version ${act.version}: ${act.reason} (${act.changes.map((c) => `${c.path} ${c.old ?? 'none'} → ${c.new ?? 'none'}`).join('; ')})`
    case 'flush-step':
      return `flush of ${act.segment}, step ${act.step} ${act.state}${act.reason === '' ? '' : `: ${act.reason}`}`
    case 'flush-check':
      return `flush of ${act.segment}, step ${act.step}, ${act.criterion}: ${act.verdict}${act.reason === '' ? '' : `, ${act.reason}`}`
    case 'event':
      return `${act.event}${act.value === null ? '' : ` ${act.value}${act.unit === null ? '' : ` ${act.unit}`}`}${act.note === '' ? '' : `: ${act.note}`}`
    case 'shelve':
      return `shelved for ${act.minutes} min: ${act.reason}`
    default:
      return 'reason' in act && typeof act.reason === 'string' ? `${act.kind}: ${act.reason}` : act.kind
  }
}

const inputWords: Partial<Record<AlarmRecord['input'], string>> = {
  act: 'raised',
  clr: 'condition gone',
  qbad: 'its reading went bad',
  qgood: 'its reading is good again',
  rea: 'called again',
  'sbd+': 'suppressed',
  'sbd-': 'no longer suppressed',
  'oos+': 'out of service',
  'oos-': 'back in service',
  shv: 'shelved',
  uns: 'unshelved',
  ack: 'acknowledged',
  rst: 'reset',
}

/** A line of the alarm journal as a sentence; null for what people need not read. */
function recordLine(r: AlarmRecord, name: (alarm: number | null, key: string) => string): StoryLine | null {
  const word = inputWords[r.input]
  if (word === undefined) return null
  const why = r.reason ?? r.logic
  const text = `${name(r.alarm, r.key)}: ${r.outcome === 'refused' ? 'refused to be ' : ''}${word}${why === null ? '' : `, ${why}`}`
  return { tMs: r.tMs, what: 'alarm', alarm: r.alarm, text, person: r.person }
}

/** What a run begins with, settings or a step test: in its acts, but nobody changed it in it. */
export const isOpening = (act: Act, beginMs: number): boolean =>
  act.kind === 'commissioned' || (act.kind === 'settings' && (act.changes.length === 0 || act.tMs <= beginMs))

/** What happened in (fromMs, toMs], in order: the alarm journal, acts of people that are not in it, and notes of the tool. */
export function storyLines(p: RunParts, rows: readonly AlarmRow[], fromMs: number, toMs: number): StoryLine[] {
  const byId = new Map(rows.map((r) => [r.id, r]))
  const byKey = new Map(rows.map((r) => [r.key, r]))
  const name = (alarm: number | null, key: string): string => {
    const row = (alarm === null ? undefined : byId.get(alarm)) ?? byKey.get(key)
    return row === undefined ? key : alarmName(row)
  }
  const beginMs = p.store.sequence.span(p.run)?.fromMs ?? Number.NEGATIVE_INFINITY
  const lines: StoryLine[] = []
  for (const t of p.store.transitions.list(p.run)) {
    if (t.tMs <= fromMs || t.tMs > toMs) continue
    const line = recordLine(t.more as unknown as AlarmRecord, name)
    if (line !== null) lines.push(line)
  }
  for (const { tMs, body } of p.store.events.list(p.run)) {
    if (tMs <= fromMs || tMs > toMs) continue
    const e = body as unknown as PipelineEvent
    if (e.kind === 'note') lines.push({ tMs, what: 'note', alarm: null, text: e.text, person: null })
  }
  for (const { act } of p.store.sequence.acts(p.run)) {
    if (act.tMs <= fromMs || act.tMs > toMs) continue
    // What people do to an alarm is in its journal already, with what came of it.
    if (['acknowledge', 'reset', 'shelve', 'unshelve', 'out-of-service', 'in-service'].includes(act.kind)) continue
    const alarm = 'alarm' in act ? act.alarm : null
    // The settings that a run begins with change nothing.
    if (isOpening(act, beginMs)) continue
    const what = act.kind === 'comment' ? 'comment' : act.kind === 'limit' || act.kind === 'settings' ? 'change' : 'act'
    lines.push({ tMs: act.tMs, what, alarm, text: actText(act), person: act.person })
  }
  return lines.sort((a, b) => a.tMs - b.tMs)
}

const chainMs = 600_000
const beforeMs = 1_800_000

/**
 * The first of the alarms that led to one: back from it while the one before came at most 10 min earlier. Only alarms that called somebody count;
 * `rows` first raised first.
 */
export function firstOutOf(rows: readonly AlarmRow[], alarm: AlarmRow): AlarmRow {
  let first = alarm
  for (const row of [...rows].reverse()) {
    if (row.raisedMs > first.raisedMs || (row.raisedMs === first.raisedMs && row.id >= first.id)) continue
    if (first.raisedMs - row.raisedMs > chainMs) break
    first = row
  }
  return first
}

/** What led to an alarm: first-out and the 30 min before its raise. Null where the run has no such alarm. */
export function alarmStory(p: RunParts, id: number): AlarmStory | null {
  const rows = alarmsAt(p, Infinity).all()
  const alarm = rows.find((r) => r.id === id)
  if (alarm === undefined) return null
  const called = new Set(
    p.store.transitions.list(p.run).flatMap((t) => ((t.more as unknown as AlarmRecord).sound ? [t.alarm] : [])),
  )
  const firstOut = firstOutOf(
    rows.filter((r) => called.has(r.id)),
    alarm,
  )
  const fromMs = alarm.raisedMs - beforeMs
  return { alarm, firstOut, fromMs, toMs: alarm.raisedMs, lines: storyLines(p, rows, fromMs, alarm.raisedMs) }
}
