import type Database from 'better-sqlite3'
import type { Entry } from '../core/sequence.ts'
import { checksum, damaged } from './checksum.ts'
import { endOf, keyOf, type RunId, seqOf } from './keys.ts'
import { decodeStage, encodeStage, type Stage } from './staging.ts'

/** What is known of a staged record without opening it: it holds numbers seq to end, acts counted but not held. */
export interface StageNote {
  readonly seq: number
  readonly end: number
  readonly rows: number
  readonly tMin: number
  readonly tMax: number
}

interface NoteRow {
  readonly id: number
  readonly count: number
  readonly rows: number
  readonly tMin: number
  readonly tMax: number
  readonly sum: number
}

/** Records of appends that are not packed yet, in arrival order. Callers bring the transaction. */
export function stageTable(db: Database.Database) {
  const insert = db.prepare('INSERT INTO stage (id, count, rows, t_min, t_max, sum, body) VALUES (?, ?, ?, ?, ?, ?, ?)')
  const note = 'id, count, rows, t_min AS tMin, t_max AS tMax, sum'
  const from = db.prepare<[number, number, number], NoteRow>(
    `SELECT ${note} FROM stage WHERE id >= ? AND id < ? ORDER BY id LIMIT ?`,
  )
  const before = db.prepare<[number, number], NoteRow>(
    `SELECT ${note} FROM stage WHERE id <= ? AND id >= ? ORDER BY id DESC LIMIT 1`,
  )
  const body = db.prepare<[number], Buffer>('SELECT body FROM stage WHERE id = ?').pluck()
  const drop = db.prepare('DELETE FROM stage WHERE id >= ? AND id < ?')

  const checked = ({ id, count, rows, tMin, tMax, sum }: NoteRow): StageNote => {
    if (sum !== checksum([id, count, rows, tMin, tMax])) throw damaged(`staged entries from ${seqOf(id)}`)
    return { seq: seqOf(id), end: seqOf(id) + count, rows, tMin, tMax }
  }
  return {
    /** Numbers [seq, end), of them `rows` rows. */
    add(run: RunId, { seq, end, rows, tMin, tMax }: StageNote, entries: readonly Entry[], width: number): void {
      const id = keyOf(run, seq)
      insert.run(id, end - seq, rows, tMin, tMax, checksum([id, end - seq, rows, tMin, tMax]), encodeStage(entries, width))
    },
    /** At most `most` records from number `seq` on. Errors: STORE_CORRUPT. */
    list: (run: RunId, seq = 0, most = 1e9): StageNote[] => from.all(keyOf(run, seq), keyOf(run, endOf), most).map(checked),
    /** The record that holds number `seq`. Errors: STORE_CORRUPT. */
    at(run: RunId, seq: number): StageNote | null {
      const row = before.get(keyOf(run, seq), keyOf(run, 0))
      const found = row === undefined ? null : checked(row)
      return found !== null && seq < found.end ? found : null
    },
    /** Errors: STORE_CORRUPT. */
    open(run: RunId, seq: number, width: number): Stage {
      const found = body.get(keyOf(run, seq))
      if (found === undefined) throw damaged(`staged entries from ${seq} of run ${run}`)
      return decodeStage(found, width)
    },
    /** Drops what begins before number `seq`. */
    drop(run: RunId, seq: number): void {
      drop.run(keyOf(run, 0), keyOf(run, seq))
    },
  }
}

export type StageTable = ReturnType<typeof stageTable>
