import type Database from 'better-sqlite3'
import type { Json } from './keys.ts'

export interface AuditEntry {
  readonly id: number
  readonly tMs: number
  readonly person: string
  readonly act: string
  readonly reason: string
  readonly body: Json
}

/** Acts that outlive what they were done to. Append-only: the database itself refuses to change or drop one. */
export function auditStore(db: Database.Database) {
  const insert = db.prepare('INSERT INTO audit (t_ms, person, act, reason, json) VALUES (?, ?, ?, ?, ?)')
  const list = db.prepare<[number], Omit<AuditEntry, 'body'> & { json: string }>(
    'SELECT id, t_ms AS tMs, person, act, reason, json FROM audit WHERE id >= ? ORDER BY id',
  )
  return {
    append: ({ tMs, person, act, reason, body }: Omit<AuditEntry, 'id'>): number =>
      Number(insert.run(tMs, person, act, reason, JSON.stringify(body)).lastInsertRowid),
    list: (from = 0): AuditEntry[] => list.all(from).map(({ json, ...row }) => ({ ...row, body: JSON.parse(json) as Json })),
  }
}
