import type Database from 'better-sqlite3'
import { rowHash } from '../trail/chain.ts'
import type { Json } from './keys.ts'
import type { Ledger } from './ledger.ts'

export interface SettingsVersion {
  readonly version: number
  /** What they are the settings of: a skid's id, 'site' ... */
  readonly scope: string
  readonly tMs: number
  readonly person: string
  readonly reason: string
  readonly settings: Json
}

type Row = Omit<SettingsVersion, 'settings'> & { readonly json: string }
const open = ({ json, ...row }: Row): SettingsVersion => ({ ...row, settings: JSON.parse(json) as Json })

/** Settings as whole versions, append-only; the database itself refuses to change or drop one. */
export function settingsStore(db: Database.Database, ledger: Pick<Ledger, 'site'>) {
  const columns = 'id AS version, scope, t_ms AS tMs, person, reason, json'
  const insert = db.prepare('INSERT INTO settings (scope, t_ms, person, reason, json) VALUES (?, ?, ?, ?, ?)')
  const list = db.prepare<[string], Row>(`SELECT ${columns} FROM settings WHERE scope = ? ORDER BY id`)
  const at = db.prepare<[string, number], Row>(
    `SELECT ${columns} FROM settings WHERE scope = ? AND t_ms <= ? ORDER BY t_ms DESC, id DESC LIMIT 1`,
  )
  return {
    /** Gives the new version's number. */
    put: db.transaction(({ scope, tMs, person, reason, settings }: Omit<SettingsVersion, 'version'>): number => {
      const json = JSON.stringify(settings)
      const version = Number(insert.run(scope, tMs, person, reason, json).lastInsertRowid)
      const row = rowHash([version, scope, tMs, person, reason, json])
      ledger.site({ kind: 'settings', version, scope, tMs, person, reason, settings, row })
      return version
    }).immediate,
    list: (scope: string): SettingsVersion[] => list.all(scope).map(open),
    /** The version in force at a time; null before the first. */
    at(scope: string, tMs: number): SettingsVersion | null {
      const row = at.get(scope, tMs)
      return row === undefined ? null : open(row)
    },
  }
}
