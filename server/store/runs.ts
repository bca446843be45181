import type Database from 'better-sqlite3'
import { MonitorError } from '../core/errors.ts'
import type { RunId } from './keys.ts'

/** A run ends once; a deleted one is gone for every reader while its space is given back piece by piece. */
export type RunState = 'live' | 'importing' | 'ended'

export interface NewRun {
  readonly skidId: string
  readonly title: string
  readonly skidFile: string
  readonly skidText: string
  /** Where the readings come from: a log's path, the simulator ... */
  readonly source: string
  readonly startedMs: number
  readonly toolVersion: string
  readonly state?: RunState
}

export interface RunSummary extends Omit<Required<NewRun>, 'skidText'> {
  readonly id: RunId
}
export type Run = RunSummary & { readonly skidText: string }

export interface Deletion {
  readonly tMs: number
  readonly person: string
  readonly reason: string
}

const columns =
  'id, skid_id AS skidId, title, skid_file AS skidFile, source, started_ms AS startedMs, tool_version AS toolVersion, state'

export const noRun = (run: number) =>
  new MonitorError('STORE_DATA', `there is no run ${run} in the store`, { hint: 'list the runs and choose one of them' })

/** Runs and the words of their text tags. */
export function runStore(db: Database.Database) {
  const insert = db.prepare(
    `INSERT INTO run (skid_id, title, skid_file, skid_text, source, started_ms, tool_version, state)
     VALUES (@skidId, @title, @skidFile, @skidText, @source, @startedMs, @toolVersion, @state)`,
  )
  const insertHead = db.prepare('INSERT INTO head (run, next_seq, rows, acts, staged_rows, staged_ticks) VALUES (?, 0, 0, 0, 0, 0)')
  const all = db.prepare<[], RunSummary>(`SELECT ${columns} FROM run WHERE state <> 'deleted' ORDER BY id`)
  const one = db.prepare<[RunId], Run>(`SELECT ${columns}, skid_text AS skidText FROM run WHERE id = ? AND state <> 'deleted'`)
  const state = db.prepare("UPDATE run SET state = ? WHERE id = ? AND state <> 'deleted'")
  const audit = db.prepare('INSERT INTO audit (t_ms, person, act, reason, json) VALUES (?, ?, ?, ?, ?)')
  const countRows = db.prepare<[RunId], { entries: number; rows: number }>(
    'SELECT next_seq AS entries, rows FROM head WHERE run = ?',
  )
  const words = db.prepare<[RunId], string>('SELECT word FROM word WHERE run = ? ORDER BY idx').pluck()
  const insertWord = db.prepare('INSERT INTO word (run, idx, word) VALUES (?, ?, ?)')
  const need = (run: RunId): Run => {
    const found = one.get(run)
    if (found === undefined) throw noRun(run)
    return found
  }
  return {
    create: db.transaction((run: NewRun): RunId => {
      const id = insert.run({ state: 'live', ...run }).lastInsertRowid as RunId
      insertHead.run(id)
      return id
    }),
    list: (): RunSummary[] => all.all(),
    /** Errors: STORE_DATA when there is none such. */
    get: need,
    /** Errors: STORE_DATA when there is none such. */
    setState(run: RunId, to: RunState): void {
      if (state.run(to, run).changes === 0) throw noRun(run)
    },
    /** An audited act: the run is gone for every reader at once, the entry in the audit trail stays, `upkeep` gives the space back. */
    delete: db.transaction((run: RunId, { tMs, person, reason }: Deletion): void => {
      const { skidText: _, ...kept } = need(run)
      audit.run(tMs, person, 'delete-run', reason, JSON.stringify({ ...kept, ...countRows.get(run) }))
      state.run('deleted', run)
    }).immediate,
    words: (run: RunId): string[] => words.all(run),
    /** Adds words from index `from` on; those already there must be the same (idempotent). Errors: STORE_DATA. */
    addWords: db.transaction((run: RunId, from: number, fresh: readonly string[]): void => {
      const known = words.all(run)
      if (from > known.length)
        throw new MonitorError('STORE_DATA', `words of run ${run} start at ${from}, but only ${known.length} are known`)
      fresh.forEach((word, i) => {
        const old = known[from + i]
        if (old === undefined) insertWord.run(run, from + i, word)
        else if (old !== word) throw new MonitorError('STORE_DATA', `word ${from + i} of run ${run} is '${old}', not '${word}'`)
      })
    }).immediate,
  }
}
