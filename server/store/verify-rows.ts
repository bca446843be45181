import type Database from 'better-sqlite3'
import { canonical, wellFormed } from '../trail/canonical.ts'
import { partsHash, rowHash, sha256 } from '../trail/chain.ts'
import type { Chained, RunRecord, SiteRecord } from '../trail/records.ts'
import { endOf, keyOf, type RunId } from './keys.ts'
import { type NewRun, runRow } from './runs.ts'

/** Says what is wrong with the row or rows that a record stands for; null when nothing is. */
export type RowCheck = (record: Chained<RunRecord | SiteRecord>) => string | null

const gone = 'what it stands for is gone from the store'
const differs = 'what it stands for was changed in the store'

/** A row against its hash, and what the record itself says against the row's JSON. */
function judge(row: readonly unknown[] | undefined, hash: string, json: unknown, says: unknown): string | null {
  if (row === undefined) return gone
  if (rowHash(row) !== hash) return differs
  return canonical(wellFormed(JSON.parse(json as string))) === canonical(says)
    ? null
    : 'it says something else than what it stands for'
}
const told = (says: readonly unknown[], row: readonly unknown[] | undefined): string | null =>
  canonical(says) === canonical(row) ? null : 'it says something else than what it stands for'

/** Rows of the site's records. */
export function siteRows(db: Database.Database) {
  const audit = db
    .prepare<[number], unknown[]>('SELECT id, t_ms, person, act, reason, json, run, old, new, recorded_ms FROM audit WHERE id = ?')
    .raw()
  const settings = db.prepare<[number], unknown[]>('SELECT id, scope, t_ms, person, reason, json FROM settings WHERE id = ?').raw()
  const count = (table: string): number => db.prepare<[], number>(`SELECT count(*) FROM ${table}`).pluck().get() ?? 0
  const seen = { audit: 0, settings: 0 }
  const check: RowCheck = (r) => {
    if (r.kind !== 'audit' && r.kind !== 'settings') return null
    seen[r.kind]++
    if (r.kind === 'settings') {
      const row = settings.get(r.version)
      return judge(row, r.row, row?.[5], r.settings) ?? told([r.scope, r.tMs, r.person, r.reason], row?.slice(1, 5))
    }
    const row = audit.get(r.id)
    return judge(row, r.row, row?.[5], r.body) ?? told([r.tMs, r.person, r.act, r.reason], row?.slice(1, 5))
  }
  return {
    check,
    /** What stands in the store and in no record. */
    rest: (): string[] =>
      (['audit', 'settings'] as const).flatMap((t) =>
        count(t) > seen[t] ? [`${count(t) - seen[t]} rows of ${t} stand in no record`] : [],
      ),
  }
}

/** Rows of one run's records. */
export function runRows(db: Database.Database) {
  const run = db.prepare<[number], NewRun>(
    `SELECT skid_id AS skidId, title, skid_file AS skidFile, skid_text AS skidText, source, started_ms AS startedMs, tool_version AS toolVersion
     FROM run WHERE id = ?`,
  )
  const state = db.prepare<[number], string>('SELECT state FROM run WHERE id = ?').pluck()
  const act = db.prepare<[number], unknown[]>('SELECT id, sum, json FROM act WHERE id = ?').raw()
  const words = db
    .prepare<[number, number, number], string>('SELECT word FROM word WHERE run = ? AND idx >= ? AND idx < ? ORDER BY idx')
    .pluck()
  const transition = db
    .prepare<[number, number], unknown[]>(
      'SELECT idx, alarm, t_ms, from_state, to_state, input, person, reason, value, more FROM alarm_transition WHERE run = ? AND idx = ?',
    )
    .raw()
  const events = db
    .prepare<[number, number, number], unknown[]>(
      'SELECT idx, seq, t_ms, kind, json FROM event WHERE run = ? AND idx >= ? AND idx < ? ORDER BY idx',
    )
    .raw()
  const segment = db.prepare<[number], Buffer>('SELECT body FROM segment WHERE id = ?').pluck()
  const strips = db.prepare<[number], { strip: number; body: Buffer }>(
    'SELECT strip, body FROM strip WHERE segment = ? ORDER BY strip',
  )
  const head = db.prepare<[number], { next: number; rows: number; acts: number; packed: number; staged: number }>(
    'SELECT next_seq AS next, rows, acts, packed, staged_rows AS staged FROM head WHERE run = ?',
  )
  const between = (table: string, key: string) =>
    db.prepare<[number, number], number>(`SELECT count(*) FROM ${table} WHERE ${key} >= ? AND ${key} < ?`).pluck()
  const counts = {
    acts: between('act', 'id'),
    segments: between('segment', 'id'),
    strips: between('strip', 'segment'),
    transitions: between('alarm_transition', 'run'),
    events: between('event', 'run'),
    words: between('word', 'run'),
  }

  return (id: number) => {
    const seen = { acts: 0, segments: 0, strips: 0, transitions: 0, events: 0, words: 0 }
    let packed = 0
    let rows = 0
    let said = ''
    const check: RowCheck = (r) => {
      if (r.kind === 'genesis' && r.chain === 'run') {
        said = r.state
        const row = run.get(id)
        if (row === undefined) return gone
        return rowHash(runRow(id, row)) === r.row && sha256(row.skidText) === r.configuration ? null : differs
      }
      if (r.kind === 'run.state') said = r.state
      if (r.kind === 'words') {
        seen.words += r.words.length
        const found = words.all(id, r.from, r.from + r.words.length)
        return found.length < r.words.length ? gone : rowHash(found) === rowHash(r.words) ? null : differs
      }
      if (r.kind === 'act') {
        seen.acts++
        const row = act.get(keyOf(id as RunId, r.seq))
        return judge(row, r.row, row?.[2], r.act)
      }
      if (r.kind === 'transition') {
        seen.transitions++
        const row = transition.get(id, r.idx)
        return judge(row, r.row, row?.[9], r.transition)
      }
      if (r.kind === 'events') {
        seen.events += r.count
        const found = events.all(id, r.from, r.from + r.count)
        return found.length < r.count ? gone : rowHash(found) === r.row ? null : differs
      }
      if (r.kind === 'readings') {
        if (r.from !== packed) return `readings from entry ${packed} to ${r.from - 1} have no record`
        packed = r.to
        rows += r.rows
        seen.segments++
        seen.strips += r.parts - 1
        const body = segment.get(keyOf(id as RunId, r.from))
        if (body === undefined) return gone
        const found = strips.all(keyOf(id as RunId, r.from))
        const isWhole = found.every(({ strip }, i) => strip === i)
        return isWhole && partsHash([body, ...found.map((s) => s.body)]) === r.sha256 ? null : differs
      }
      return null
    }
    return {
      check,
      /** Rows that are staged and not yet covered by a record. */
      staged: (): number => head.get(id)?.staged ?? 0,
      sealed: (): number => rows,
      /** What stands in the store and in no record, and counts that do not agree. */
      rest(): string[] {
        const out: string[] = []
        const is = state.get(id)
        if (is !== said) out.push(`its state is '${is}', by its records '${said}'`)
        for (const [name, count] of Object.entries(counts) as [keyof typeof seen, (typeof counts)['acts']][]) {
          const byKey = name === 'acts' || name === 'segments' || name === 'strips'
          const found = (byKey ? count.get(id * endOf, (id + 1) * endOf) : count.get(id, id + 1)) ?? 0
          if (found > seen[name]) out.push(`${found - seen[name]} of ${found} ${name} stand in no record`)
        }
        const h = head.get(id)
        if (h === undefined) return [...out, 'what is known of its sequence is gone']
        if (h.packed !== packed) out.push(`it is packed up to entry ${h.packed}, its records up to ${packed}`)
        if (h.acts !== seen.acts) out.push(`it counts ${h.acts} acts, its records ${seen.acts}`)
        if (h.rows !== rows + h.staged) out.push(`it counts ${h.rows} rows, its records ${rows} and ${h.staged} staged`)
        return out
      },
    }
  }
}
