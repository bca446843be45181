import type Database from 'better-sqlite3'
import { keyOf, type RunId } from './keys.ts'

/** Gives back the space of deleted runs, a few records at a time. */
export function reclaimer(db: Database.Database) {
  const next = db.prepare<[], RunId>("SELECT id FROM run WHERE state = 'deleted' LIMIT 1").pluck()
  const few = 16
  const range = (run: RunId): [number, number] => [keyOf(run, 0), keyOf(run, 0) + 2 ** 36]
  const byKey = ['strip', 'segment', 'stage', 'act'].map((table) => {
    const key = table === 'strip' ? 'segment' : 'id'
    return db.prepare(
      `DELETE FROM ${table} WHERE rowid IN (SELECT rowid FROM ${table} WHERE ${key} >= ? AND ${key} < ? LIMIT ${few})`,
    )
  })
  const byRun = ['tier', 'snapshot', 'event', 'alarm_transition'].map((table) =>
    db.prepare(`DELETE FROM ${table} WHERE rowid IN (SELECT rowid FROM ${table} WHERE run = ? LIMIT ${few})`),
  )
  const last = ['word', 'head'].map((table) => db.prepare(`DELETE FROM ${table} WHERE run = ?`))
  const dropRun = db.prepare('DELETE FROM run WHERE id = ?')
  return {
    /** Deletes a few records of a deleted run, its row last; false when there is none. In one transaction. */
    purgeNext(): boolean {
      const run = next.get()
      if (run === undefined) return false
      const gone = byKey.some((s) => s.run(...range(run)).changes > 0) || byRun.some((s) => s.run(run).changes > 0)
      if (gone) return true
      for (const s of last) s.run(run)
      dropRun.run(run)
      return true
    },
    /** Hands some free pages at the file's end back to the disk; false when no more than `spare` are left. Outside any transaction. */
    shrink(spare: number): boolean {
      const free = db.pragma('freelist_count', { simple: true }) as number
      if (free <= spare) return false
      db.pragma(`incremental_vacuum(${Math.min(128, free - spare)})`)
      return true
    },
  }
}
