import type Database from 'better-sqlite3'
import { rowHash } from '../trail/chain.ts'
import type { Json } from './keys.ts'
import type { Ledger } from './ledger.ts'

/** An act that is no part of a run's sequence: a sign-in, a change of settings, a deletion, a review. */
export interface AuditEntry {
  readonly id: number
  readonly tMs: number
  readonly person: string
  /** A short dotted word: `sign-in`, `run.delete`, `trail.reviewed` ... */
  readonly act: string
  readonly reason: string
  readonly body: Json
  /** The run it is about; null where it is about none. */
  readonly run: number | null
  /** Value before and after, null where there is none. */
  readonly old: Json
  readonly new: Json
  /** When it was written down; null in what an older version wrote. */
  readonly recordedMs: number | null
}

export type NewAudit = Pick<AuditEntry, 'tMs' | 'person' | 'act' | 'reason' | 'body'> &
  Partial<Pick<AuditEntry, 'run' | 'old' | 'new'>>

type Row = Omit<AuditEntry, 'body' | 'old' | 'new'> & {
  readonly json: string
  readonly old: string | null
  readonly new: string | null
}
const textOf = (value: Json): string | null => (value === null ? null : JSON.stringify(value))
const parsed = (text: string | null): Json => (text === null ? null : (JSON.parse(text) as Json))

/** Acts that outlive what they were done to, each a record of the site's chain. Append-only: the database itself refuses to change or drop one. */
export function auditStore(db: Database.Database, ledger: Pick<Ledger, 'site'>, wallMs: () => number) {
  const insert = db.prepare(
    'INSERT INTO audit (t_ms, person, act, reason, json, run, old, new, recorded_ms) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)',
  )
  const list = db.prepare<[number], Row>(
    'SELECT id, t_ms AS tMs, person, act, reason, json, run, old, new, recorded_ms AS recordedMs FROM audit WHERE id >= ? ORDER BY id',
  )
  return {
    /** Gives its number. Inside a transaction it shares that one's fate. */
    append: db.transaction(({ tMs, person, act, reason, body, run = null, old = null, new: now = null }: NewAudit): number => {
      const columns = [tMs, person, act, reason, JSON.stringify(body), run, textOf(old), textOf(now), wallMs()]
      const id = Number(insert.run(...columns).lastInsertRowid)
      ledger.site({ kind: 'audit', id, tMs, person, act, reason, body, run, old, new: now, row: rowHash([id, ...columns]) })
      return id
    }).immediate,
    list: (from = 0): AuditEntry[] =>
      list.all(from).map(({ json, old, new: now, ...row }) => ({
        ...row,
        body: JSON.parse(json) as Json,
        old: parsed(old),
        new: parsed(now),
      })),
  }
}

export type AuditStore = ReturnType<typeof auditStore>
