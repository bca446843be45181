import type { AlarmRecord, AlarmStateName } from '../core/alarms/alarm-state.ts'
import { defaultPolicy } from '../core/alarms/book.ts'
import { createFloodWatch, type FloodNow } from '../core/alarms/flood.ts'
import type { Occurrence } from '../core/alarms/occurrence.ts'
import type { PipelineEvent } from '../core/pipeline/events.ts'
import { alarmKinds } from '../core/report.ts'
import type { AlarmHelp, AlarmRow, Aside, TransitionRow } from '../wire/alarm.ts'

interface OfKey {
  state: AlarmStateName
  badInput: boolean
  /** What puts it aside, by state: more than one may at a time, and the one shown is that of `state`. */
  aside: Partial<Record<AlarmStateName, Aside & { readonly untilMs: number | null }>>
  latest: number
  priority: AlarmRecord['priority']
}
/** Inputs that put an alarm aside, and those that end it. */
const begins: Partial<Record<AlarmRecord['input'], AlarmStateName>> = { shv: 'SHELVED', 'sbd+': 'SBD', 'oos+': 'OOS' }
const ends: Partial<Record<AlarmRecord['input'], AlarmStateName>> = { uns: 'SHELVED', 'sbd-': 'SBD', 'oos-': 'OOS' }

const owed: ReadonlySet<AlarmStateName> = new Set(['UNACK', 'RTNUN', 'LUNACK'])
const rank = { high: 0, medium: 1, low: 2 } as const

/**
 * The alarm list as it stands after the events folded in so far: the same for a live run, a restarted one and a stored one at a moment.
 * `help` gives the text of an occurrence (ALM-02).
 */
export function createAlarmLog(help: (o: Occurrence) => AlarmHelp | null) {
  const occurrences = new Map<number, Occurrence>()
  const acks = new Map<number, { tMs: number; person: string | null }>()
  const keys = new Map<string, OfKey>()
  const flood = createFloodWatch()
  let changed = new Set<number>()
  const keyOf = (key: string): OfKey => {
    const found = keys.get(key) ?? { state: 'NORM', badInput: false, aside: {}, latest: 0, priority: 'medium' }
    keys.set(key, found)
    return found
  }

  function row(o: Occurrence): AlarmRow {
    const k = keyOf(o.key)
    const isLatest = k.latest === o.id
    const ack = acks.get(o.id)
    const aside = isLatest ? (k.aside[k.state] ?? null) : null
    return {
      id: o.id,
      key: o.key,
      kind: o.kind,
      priority: o.priority,
      segment: o.segment,
      tag: o.tag,
      state: isLatest ? k.state : 'NORM',
      active: o.clearedMs === null,
      needsAck: isLatest && owed.has(k.state),
      badInput: isLatest && k.badInput,
      raisedMs: o.raisedMs,
      clearedMs: o.clearedMs,
      acknowledgedMs: ack?.tMs ?? null,
      acknowledgedBy: ack?.person ?? null,
      shelvedUntilMs: aside?.untilMs ?? null,
      aside: aside === null ? null : { sinceMs: aside.sinceMs, person: aside.person, logic: aside.logic, reason: aside.reason },
      shelveMaxMin: defaultPolicy(o.priority).shelveMaxS / 60,
      value: o.value,
      limit: o.limit,
      unit: o.unit,
      message: o.message,
      cause: o.cause,
      onset: o.onset,
      detector: o.detector,
      evidence: o.evidence,
      help: help(o),
    }
  }

  /** An alarm taken out of service before it was ever raised has no occurrence; it is listed all the same, under a number below 0. */
  function neverRaised(key: string, k: OfKey, id: number): AlarmRow {
    const [kind = '', place = null] = key.split(':')
    const sinceMs = k.aside.OOS?.sinceMs ?? 0
    k.latest = id
    const out = row({
      id, key, kind: alarmKinds.find((n) => n === kind) ?? 'monitor', priority: k.priority, segment: place, tag: null, raisedMs: sinceMs, clearedMs: sinceMs,
      value: null, limit: null, unit: null, message: 'out of service, never raised', cause: null, onset: null, detector: 'none',
      evidence: { for: [], against: [], notExcluded: [] }, annunciated: false, configuration: 0,
    }) // biome-ignore format: a list
    k.latest = 0
    return out
  }

  return {
    take(e: PipelineEvent): void {
      if (e.kind === 'alarm') {
        const o = e.change.occurrence
        occurrences.set(o.id, o)
        keyOf(o.key).latest = Math.max(keyOf(o.key).latest, o.id)
        changed.add(o.id)
      } else if (e.kind === 'transition') {
        const r = e.record
        if (r.key === '') return
        const k = keyOf(r.key)
        k.state = r.to
        k.badInput = r.quality === 'bad'
        k.priority = r.priority
        if (r.outcome !== 'refused') {
          const begun = begins[r.input]
          const ended = ends[r.input] ?? (r.input === 'clr' && r.from === 'SHELVED' && r.to !== 'SHELVED' ? 'SHELVED' : undefined)
          if (begun !== undefined) {
            const untilMs = r.durationS === null ? null : r.tMs + r.durationS * 1000
            k.aside[begun] = {
              sinceMs: k.aside[begun]?.sinceMs ?? r.tMs,
              person: r.person,
              logic: r.logic,
              reason: r.reason,
              untilMs,
            }
          }
          if (ended !== undefined) delete k.aside[ended]
        }
        if (r.sound && r.alarm !== null) flood.take(r.tMs, r.alarm)
        if (r.input === 'ack' && r.outcome === 'moved' && r.alarm !== null) acks.set(r.alarm, { tMs: r.tMs, person: r.person })
        if (r.alarm !== null) changed.add(r.alarm)
      }
    },
    /** Every occurrence, first raised first. */
    all: (): AlarmRow[] => [...occurrences.values()].sort((a, b) => a.id - b.id).map(row),
    /** The latest occurrence of each alarm that is not plainly normal, first raised first; before them what is out of service and was never raised. */
    standing: (): AlarmRow[] => [
      ...[...keys].filter(([, k]) => k.latest === 0 && k.state === 'OOS').map(([key, k], i) => neverRaised(key, k, -1 - i)),
      ...[...occurrences.values()]
        .filter((o) => keyOf(o.key).latest === o.id && keyOf(o.key).state !== 'NORM')
        .sort((a, b) => a.id - b.id)
        .map(row),
    ],
    /** The flood at a moment with its first alarm as it stands now; null where there is none. */
    flood(atMs: number): (FloodNow & { readonly first: AlarmRow }) | null {
      const now = flood.now(atMs)
      const first = now === null ? undefined : occurrences.get(now.firstAlarm)
      return now === null || first === undefined ? null : { ...now, first: row(first) }
    },
    /** Occurrences that changed since the last call. */
    changes(): AlarmRow[] {
      const out = [...changed].sort((a, b) => a - b).flatMap((id) => (occurrences.has(id) ? [row(occurrences.get(id)!)] : []))
      changed = new Set()
      return out
    },
  }
}
export type AlarmLog = ReturnType<typeof createAlarmLog>

/** The most urgent of some alarms that stand on a segment: priority, then not acknowledged, then first raised. */
export function mostUrgent(rows: readonly AlarmRow[], segment: string): AlarmRow | null {
  const own = rows.filter((r) => r.segment === segment && (r.active || r.needsAck) && !['SHELVED', 'SBD', 'OOS'].includes(r.state))
  return (
    own.sort((a, b) => rank[a.priority] - rank[b.priority] || Number(b.needsAck) - Number(a.needsAck) || a.id - b.id)[0] ?? null
  )
}

export const transitionRow = (r: AlarmRecord): TransitionRow => ({
  alarm: r.alarm,
  key: r.key,
  tMs: r.tMs,
  from: r.from,
  to: r.to,
  input: r.input,
  outcome: r.outcome,
  sound: r.sound,
  priority: r.priority,
  value: r.value,
  limit: r.limit,
  unit: r.unit,
  person: r.person,
  logic: r.logic,
  reason: r.reason,
})
