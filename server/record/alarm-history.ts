import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import type { AlarmRow } from '../wire/alarm.ts'
import { csvLine } from './csv-cell.ts'
import { type ExportFacts, iso, isoOrNull } from './facts.ts'
import { localIso } from './local-time.ts'

export interface AlarmFilter {
  readonly fromMs: number | null
  readonly toMs: number | null
  readonly kind: string | null
  readonly segment: string | null
  readonly priority: string | null
}

/** The journal's records that pass a filter, in their order. Comments that belong to no alarm stay unless a kind, segment or priority is asked for. */
export function filteredHistory(records: readonly AlarmRecord[], rows: readonly AlarmRow[], f: AlarmFilter): AlarmRecord[] {
  const byId = new Map(rows.map((r) => [r.id, r]))
  return records.filter((r) => {
    if ((f.fromMs !== null && r.tMs < f.fromMs) || (f.toMs !== null && r.tMs > f.toMs)) return false
    if (f.kind === null && f.segment === null && f.priority === null) return true
    const of = r.alarm === null ? undefined : byId.get(r.alarm)
    return (
      of !== undefined &&
      (f.kind === null || of.kind === f.kind) &&
      (f.segment === null || of.segment === f.segment) &&
      (f.priority === null || of.priority === f.priority)
    )
  })
}

const columns = [
  'run', 'skid', 'config_version', 'tool_version', 'time_utc', 'time_local', 'alarm', 'key', 'kind', 'priority', 'segment', 'tag', 'from', 'to', 'input',
  'outcome', 'value', 'limit', 'unit', 'quality', 'person', 'logic', 'reason', 'raised_utc', 'cleared_utc', 'acknowledged_utc', 'acknowledged_by', 'cause',
  'onset_utc', 'onset_low_utc', 'onset_high_utc', 'message',
] as const // biome-ignore format: a list

/** One line for each record of the journal: every transition, refusal and comment, with its occurrence beside it. No comment lines. */
export function* alarmsCsv(facts: ExportFacts, records: readonly AlarmRecord[], rows: readonly AlarmRow[]): Generator<string> {
  yield csvLine(columns)
  const byId = new Map(rows.map((r) => [r.id, r]))
  for (const r of records) {
    const o = r.alarm === null ? undefined : byId.get(r.alarm)
    yield csvLine([
      facts.run, facts.skid, r.configVersion, facts.recordedWith, iso(r.tMs), localIso(r.tMs, facts.timeZone), r.alarm, r.key, o?.kind ?? null,
      r.priority, o?.segment ?? null, o?.tag ?? null, r.from, r.to, r.input, r.outcome, r.value, r.limit, r.unit, r.quality, r.person, r.logic, r.reason,
      o === undefined ? null : iso(o.raisedMs), isoOrNull(o?.clearedMs ?? null), isoOrNull(o?.acknowledgedMs ?? null), o?.acknowledgedBy ?? null,
      o?.cause ?? null, o?.onset?.at ?? null, o?.onset?.low ?? null, o?.onset?.high ?? null, o?.message ?? null,
    ]) // biome-ignore format: a list
  }
}

/** Facts, occurrences and journal in one JSON text. */
export const alarmsJson = (facts: ExportFacts, records: readonly AlarmRecord[], rows: readonly AlarmRow[]): string =>
  `${JSON.stringify(
    {
      ...facts,
      alarms: rows
        .filter((r) => records.some((t) => t.alarm === r.id))
        .map(({ help: _, aside: _aside, shelveMaxMin: _max, raisedMs, clearedMs, acknowledgedMs, shelvedUntilMs, ...r }) => ({
          ...r,
          raised: iso(raisedMs),
          cleared: isoOrNull(clearedMs),
          acknowledged: isoOrNull(acknowledgedMs),
          shelvedUntil: isoOrNull(shelvedUntilMs),
        })),
      history: records.map(({ tMs, ...r }) => ({ at: iso(tMs), atLocal: localIso(tMs, facts.timeZone), ...r })),
    },
    null,
    1,
  )}\n`
