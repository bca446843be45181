import type { AlarmRecord, AlarmStateName } from '../core/alarms/alarm-state.ts'
import type { Occurrence } from '../core/alarms/occurrence.ts'
import type { PipelineEvent } from '../core/pipeline/events.ts'
import type { AlarmHelp, AlarmRow, TransitionRow } from '../wire/alarm.ts'

interface OfKey {
  state: AlarmStateName
  badInput: boolean
  shelvedUntilMs: number | null
  latest: number
}

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
  let changed = new Set<number>()
  const keyOf = (key: string): OfKey => {
    const found = keys.get(key) ?? { state: 'NORM', badInput: false, shelvedUntilMs: null, latest: 0 }
    keys.set(key, found)
    return found
  }

  function row(o: Occurrence): AlarmRow {
    const k = keyOf(o.key)
    const isLatest = k.latest === o.id
    const ack = acks.get(o.id)
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
      shelvedUntilMs: isLatest ? k.shelvedUntilMs : null,
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
        if (r.to !== 'SHELVED') k.shelvedUntilMs = null
        else if (r.input === 'shv' && r.outcome !== 'refused' && r.durationS !== null) k.shelvedUntilMs = r.tMs + r.durationS * 1000
        if (r.input === 'ack' && r.outcome === 'moved' && r.alarm !== null) acks.set(r.alarm, { tMs: r.tMs, person: r.person })
        if (r.alarm !== null) changed.add(r.alarm)
      }
    },
    /** Every occurrence, first raised first. */
    all: (): AlarmRow[] => [...occurrences.values()].sort((a, b) => a.id - b.id).map(row),
    /** The latest occurrence of each alarm that is not plainly normal, first raised first. */
    standing: (): AlarmRow[] =>
      [...occurrences.values()]
        .filter((o) => keyOf(o.key).latest === o.id && keyOf(o.key).state !== 'NORM')
        .sort((a, b) => a.id - b.id)
        .map(row),
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
