import type Database from 'better-sqlite3'
import type { Json, RunId } from './keys.ts'

/** States of the pipeline: a restart takes the latest and replays the entries from its number on. Only the last few are kept. */
export function snapshotStore(db: Database.Database, keep = 3) {
  const put = db.prepare(
    'INSERT INTO snapshot (run, seq, json) VALUES (?, ?, ?) ON CONFLICT (run, seq) DO UPDATE SET json = excluded.json',
  )
  const prune = db.prepare(
    'DELETE FROM snapshot WHERE run = ? AND seq < (SELECT seq FROM snapshot WHERE run = ? ORDER BY seq DESC LIMIT 1 OFFSET ?)',
  )
  const latest = db.prepare<[RunId, number], { seq: number; json: string }>(
    'SELECT seq, json FROM snapshot WHERE run = ? AND seq <= ? ORDER BY seq DESC LIMIT 1',
  )
  return {
    /** `seq` is the number of entries the state has taken in, that is of the first entry to replay. */
    put: db.transaction((run: RunId, seq: number, state: Json): void => {
      put.run(run, seq, JSON.stringify(state))
      prune.run(run, run, keep - 1)
    }),
    /** The latest that has taken in at most `atMost` entries. */
    latest(run: RunId, atMost = Number.MAX_SAFE_INTEGER): { seq: number; state: Json } | null {
      const found = latest.get(run, atMost)
      return found === undefined ? null : { seq: found.seq, state: JSON.parse(found.json) as Json }
    },
  }
}
