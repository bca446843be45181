import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import type { Act } from '../core/sequence.ts'
import type { Json } from '../store/keys.ts'
import type { TrailGroup, TrailRow } from '../wire/trail.ts'
import type { AuditRecord, Chained, RunRecord, SiteRecord } from './records.ts'

/** A row before it is known whether somebody has reviewed it. */
export type PlainRow = Omit<TrailRow, 'isNew'>
type Of<R, K> = Extract<R, { readonly kind: K }>

/** A value in one line; text as it is, an object by its members. */
export function plain(value: unknown): string | null {
  if (value === null || value === undefined) return null
  if (typeof value === 'string') return value
  if (typeof value !== 'object' || Array.isArray(value)) return JSON.stringify(value)
  return Object.entries(value)
    .map(([name, v]) => `${name}: ${plain(v) ?? 'none'}`)
    .join(', ')
}

const shelving = new Set(['shv', 'uns', 'sbd+', 'sbd-', 'oos+', 'oos-'])
const words: Readonly<Record<string, string>> = {
  ack: 'acknowledge', rst: 'reset', shv: 'shelve', uns: 'unshelve', 'oos+': 'out of service', 'oos-': 'back in service', 'sbd+': 'suppressed by design',
  'sbd-': 'no longer suppressed', act: 'alarm came', clr: 'alarm went', rea: 'alarm came again', qbad: 'input bad', qgood: 'input good', restart: 'restart',
} // biome-ignore format: a list

function ofTransition(r: Chained<Of<RunRecord, 'transition'>>): PlainRow {
  const t: AlarmRecord = r.transition
  const group: TrailGroup =
    t.outcome === 'refused' ? 'refused' : shelving.has(t.input) ? 'shelve' : t.person !== null ? 'act' : 'alarm'
  const isMoved = t.from !== t.to
  const forS = t.durationS == null ? '' : ` for ${t.durationS / 60} min`
  return {
    chain: 'run', n: r.n, tMs: t.tMs, recordedMs: r.recordedMs, group, what: words[t.input] ?? t.input, about: t.key === '' ? plain(t.alarm) : t.key,
    person: t.person ?? t.logic ?? null, old: isMoved ? t.from : null, new: isMoved ? `${t.to}${forS}` : null, reason: t.reason ?? null,
  } // biome-ignore format: a list
}

/** Acts that the alarm book answers with a record of its own; that record says more. */
const answered = new Set<Act['kind']>(['acknowledge', 'reset', 'shelve', 'unshelve', 'out-of-service', 'in-service'])

function ofAct(
  r: Chained<Of<RunRecord, 'act'>>,
  limitBefore: (segment: string, limit: string) => number | null | undefined,
): PlainRow[] {
  const { act } = r
  const row = (what: string, more: Partial<PlainRow>, group: TrailGroup = 'act'): PlainRow => ({
    chain: 'run', n: r.n, tMs: act.tMs, recordedMs: r.recordedMs, group, what, about: null, person: act.person, old: null, new: null,
    reason: 'reason' in act ? (act.reason ?? null) : null, ...more,
  }) // biome-ignore format: a list
  if (answered.has(act.kind)) return []
  if (act.kind === 'comment') return act.alarm === null ? [row('comment', { reason: act.text })] : []
  if (act.kind === 'limit') {
    const before = limitBefore(act.segment, act.limit)
    const text = (v: number | null): string => (v === null ? 'none' : String(v))
    const old = before === undefined ? null : text(before)
    return [row('limit', { about: `${act.segment} ${act.limit}`, old, new: text(act.value) }, 'change')]
  }
  if (act.kind === 'settings') {
    if (act.changes.length === 0) return [row('settings', { about: `version ${act.version}`, reason: act.reason }, 'change')]
    return act.changes.map((c) =>
      row('settings', { about: `version ${act.version}: ${c.path}`, old: plain(c.old), new: plain(c.new) ?? 'none' }, 'change'),
    )
  }
  if (act.kind === 'flush-step') return [row(`flush step ${act.state}`, { about: `${act.segment} ${act.step}` })]
  if (act.kind === 'flush-check')
    return [row(`flush check ${act.verdict}`, { about: `${act.segment} ${act.step} ${act.criterion}`, new: plain(act.value) })]
  if (act.kind === 'event') {
    const value = act.value === null ? null : `${act.value}${act.unit === null ? '' : ` ${act.unit}`}`
    return [row(act.event, { about: act.of ?? null, new: value, reason: act.note === '' ? null : act.note })]
  }
  return [row((act as Act).kind, { about: plain(act) })]
}

/** Rows of a run's chain that a person reads; readings, outputs and words are proved and not listed. */
export function runTrail(
  records: readonly Chained<RunRecord>[],
  startLimits: (segment: string, limit: string) => number | null | undefined,
): PlainRow[] {
  const limits = new Map<string, number | null>()
  return records.flatMap((r): PlainRow[] => {
    if (r.kind === 'transition') return [ofTransition(r)]
    if (r.kind === 'act') {
      const { act } = r
      const rows = ofAct(r, (segment, limit) => {
        const key = `${segment} ${limit}`
        return limits.has(key) ? limits.get(key) : startLimits(segment, limit)
      })
      if (act.kind === 'limit') limits.set(`${act.segment} ${act.limit}`, act.value)
      return rows
    }
    return []
  })
}

function ofAudit(r: Chained<AuditRecord>): PlainRow {
  const head = r.act.split('.')[0]!
  const group: TrailGroup =
    head === 'trail'
      ? 'review'
      : head === 'settings'
        ? 'change'
        : head === 'run'
          ? r.act === 'run.delete'
            ? 'run'
            : 'act'
          : 'access'
  const about = r.run === null ? aboutOf(r.body) : `run ${r.run}`
  return {
    chain: 'site', n: r.n, tMs: r.tMs, recordedMs: r.recordedMs, group, what: r.act, about, person: r.person, old: plain(r.old), new: reviewed(r) ?? plain(r.new),
    reason: r.reason === '' ? null : r.reason,
  } // biome-ignore format: a list
}
const aboutOf = (body: Json): string | null => {
  const name = (body as { name?: Json } | null)?.name
  return typeof name === 'string' ? name : null
}
const reviewed = (r: AuditRecord): string | null => {
  const counts = r.act === 'trail.reviewed' ? (r.body as { counts?: { run: number; site: number } } | null)?.counts : undefined
  return counts === undefined ? null : r.run === null ? `up to record ${counts.site - 1}` : `up to record ${counts.run - 1}`
}

export type SiteRow = PlainRow & { readonly run: number | null; readonly scope: string | null }

/** Rows of the site's chain that a person reads. */
export function siteTrail(records: readonly Chained<SiteRecord>[]): SiteRow[] {
  const row = (r: Chained<SiteRecord>, more: Partial<PlainRow>): PlainRow => ({
    chain: 'site', n: r.n, tMs: null, recordedMs: r.recordedMs, group: 'run', what: r.kind, about: null, person: null, old: null, new: null, reason: null, ...more,
  }) // biome-ignore format: a list
  return records.flatMap((r): SiteRow[] => {
    if (r.kind === 'audit') return [{ ...ofAudit(r), run: r.run, scope: null }]
    if (r.kind === 'settings') {
      const about = `${r.scope} version ${r.version}`
      // A change on a run is an act of it too.
      const run = (r.settings as { run?: unknown } | null)?.run
      const ofRun = typeof run === 'number' ? run : null
      return [{ ...row(r, { group: 'change', tMs: r.tMs, about, person: r.person, reason: r.reason }), run: ofRun, scope: r.scope }]
    }
    if (r.kind === 'run.begun' || r.kind === 'run.ended') return [{ ...row(r, { about: `run ${r.run}` }), run: r.run, scope: null }]
    if (r.kind === 'key') return [{ ...row(r, { what: 'signing key', new: r.key, reason: r.why }), run: null, scope: null }]
    if (r.kind === 'break')
      return [
        {
          ...row(r, { what: 'break', about: `record ${r.signed.count - 1}`, old: r.signed.head, new: r.found }),
          run: null,
          scope: null,
        },
      ]
    if (r.kind === 'adopted') return [{ ...row(r, { about: r.from }), run: null, scope: null }]
    return []
  })
}
