import type Database from 'better-sqlite3'
import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import type { Act } from '../core/sequence.ts'
import { partsHash, rowHash } from '../trail/chain.ts'
import { type Json, keyOf, type RunId, seqOf } from './keys.ts'
import { ledger as ledgerOf } from './ledger.ts'
import { beginChain, type NewRun } from './runs.ts'
import { decodeOrder } from './segment.ts'

const atOnce = 500

/**
 * Begins the chains of a store that has none. What an older version wrote is entered as it lies there, behind a record that says so. The
 * content of its segments is not decoded for it; their stored bytes are hashed. In the transaction of the migration.
 */
export function adopt(db: Database.Database, wallMs: () => number, toolVersion: string): void {
  const ledger = ledgerOf(db, wallMs)
  if (ledger.head(0).count > 0) return
  ledger.site({ kind: 'genesis', chain: 'site', store: ledger.store(), toolVersion })
  const all = <T>(sql: string, ...args: unknown[]): T[] => db.prepare<unknown[], T>(sql).all(...args)
  const runs = all<NewRun & { id: RunId }>(
    `SELECT id, skid_id AS skidId, title, skid_file AS skidFile, skid_text AS skidText, source, started_ms AS startedMs, tool_version AS toolVersion, state
     FROM run WHERE state <> 'deleted' ORDER BY id`,
  )
  type Audit = { id: number; tMs: number; person: string; act: string; reason: string; json: string }
  type Version = { id: number; scope: string; tMs: number; person: string; reason: string; json: string }
  const audits = all<Audit>('SELECT id, t_ms AS tMs, person, act, reason, json FROM audit ORDER BY id')
  const versions = all<Version>('SELECT id, scope, t_ms AS tMs, person, reason, json FROM settings ORDER BY id')
  if (runs.length + audits.length + versions.length === 0) return
  const old = { kind: 'adopted', from: 'an unchained store' } as const
  ledger.site(old)
  for (const { id, json, ...a } of audits) {
    const row = rowHash([id, a.tMs, a.person, a.act, a.reason, json, null, null, null, null])
    ledger.site({ kind: 'audit', id, ...a, body: JSON.parse(json) as Json, run: null, old: null, new: null, row })
  }
  for (const { id, json, ...v } of versions) {
    const row = rowHash([id, v.scope, v.tMs, v.person, v.reason, json])
    ledger.site({ kind: 'settings', version: id, ...v, settings: JSON.parse(json) as Json, row })
  }
  for (const { id, ...facts } of runs) {
    beginChain(ledger, id, facts)
    ledger.run(id, old)
    const words = all<{ word: string }>('SELECT word FROM word WHERE run = ? ORDER BY idx', id).map(({ word }) => word)
    if (words.length > 0) ledger.run(id, { kind: 'words', from: 0, words })
    const keys = [keyOf(id, 0), keyOf((id + 1) as RunId, 0)]
    for (const a of db
      .prepare<number[], { id: number; sum: number; json: string }>(
        'SELECT id, sum, json FROM act WHERE id >= ? AND id < ? ORDER BY id',
      )
      .all(...keys))
      ledger.run(id, { kind: 'act', seq: seqOf(a.id), act: JSON.parse(a.json) as Act, row: rowHash([a.id, a.sum, a.json]) })
    const segments = all<{ id: number }>('SELECT id FROM segment WHERE id >= ? AND id < ? ORDER BY id', ...keys)
    for (const { id: key } of segments) {
      const body = all<{ body: Buffer }>('SELECT body FROM segment WHERE id = ?', key)[0]!.body
      const strips = all<{ body: Buffer }>('SELECT body FROM strip WHERE segment = ? ORDER BY strip', key).map((s) => s.body)
      const { start, end, tMs, tickAt } = decodeOrder(body)
      const parts = [body, ...strips]
      ledger.run(id, {
        kind: 'readings', from: start, to: end, rows: tMs.length, ticks: tickAt.length, parts: parts.length, sha256: partsHash(parts), content: null,
      }) // biome-ignore format: a list
    }
    const transitions = db
      .prepare<[number], unknown[]>(
        `SELECT idx, alarm, t_ms, from_state, to_state, input, person, reason, value, more FROM alarm_transition WHERE run = ? ORDER BY idx`,
      )
      .raw()
      .all(id)
    for (const t of transitions)
      ledger.run(id, {
        kind: 'transition', idx: t[0] as number, transition: JSON.parse(t[9] as string) as AlarmRecord, row: rowHash(t),
      }) // biome-ignore format: a list
    const events = db
      .prepare<[number], unknown[]>('SELECT idx, seq, t_ms, kind, json FROM event WHERE run = ? ORDER BY idx')
      .raw()
      .all(id)
    for (let i = 0; i < events.length; i += atOnce) {
      const some = events.slice(i, i + atOnce)
      ledger.run(id, { kind: 'events', from: some[0]![0] as number, count: some.length, row: rowHash(some) })
    }
    if (facts.state === 'ended') ledger.site({ kind: 'run.ended', ...ledger.headOf(id) })
  }
}
