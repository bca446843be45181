import type Database from 'better-sqlite3'
import { MonitorError } from '../core/errors.ts'
import { rowHash, sha256 } from '../trail/chain.ts'
import type { AuditStore } from './audit.ts'
import type { RunId } from './keys.ts'
import type { Ledger } from './ledger.ts'

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

/** The row of a run as its genesis holds it; its state moves and is told by records. */
export const runRow = (id: number, r: NewRun) =>
  [id, r.skidId, r.title, r.skidFile, r.skidText, r.source, r.startedMs, r.toolVersion] as const

/** The first record of a run's chain, and the run's in the site's. */
export function beginChain(ledger: Ledger, run: RunId, r: NewRun): void {
  ledger.run(run, {
    kind: 'genesis', chain: 'run', store: ledger.store(), run, toolVersion: r.toolVersion, skid: r.skidId, title: r.title, source: r.source,
    tMs: r.startedMs, state: r.state ?? 'live', configuration: sha256(r.skidText), row: rowHash(runRow(run, r)),
  }) // biome-ignore format: a list
  ledger.site({ kind: 'run.begun', ...ledger.headOf(run) })
}

/** Runs and the words of their text tags. */
export function runStore(db: Database.Database, ledger: Ledger, audit: Pick<AuditStore, 'append'>, ended: () => void) {
  const insert = db.prepare(
    `INSERT INTO run (skid_id, title, skid_file, skid_text, source, started_ms, tool_version, state)
     VALUES (@skidId, @title, @skidFile, @skidText, @source, @startedMs, @toolVersion, @state)`,
  )
  const insertHead = db.prepare('INSERT INTO head (run, next_seq, rows, acts, staged_rows, staged_ticks) VALUES (?, 0, 0, 0, 0, 0)')
  const all = db.prepare<[], RunSummary>(`SELECT ${columns} FROM run WHERE state <> 'deleted' ORDER BY id`)
  const one = db.prepare<[RunId], Run>(`SELECT ${columns}, skid_text AS skidText FROM run WHERE id = ? AND state <> 'deleted'`)
  const state = db.prepare("UPDATE run SET state = ? WHERE id = ? AND state <> 'deleted'")
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
      beginChain(ledger, id, run)
      return id
    }).immediate,
    list: (): RunSummary[] => all.all(),
    /** Errors: STORE_DATA when there is none such. */
    get: need,
    /** Errors: STORE_DATA when there is none such. */
    setState: db.transaction((run: RunId, to: RunState): void => {
      const was = need(run).state
      state.run(to, run)
      if (was === to) return
      ledger.run(run, { kind: 'run.state', state: to })
      if (to !== 'ended') return
      ledger.site({ kind: 'run.ended', ...ledger.headOf(run) })
      ended()
    }).immediate,
    /** An audited act: the run is gone for every reader at once, the entry in the audit trail and its chain stay, `upkeep` gives the space back. */
    delete: db.transaction((run: RunId, { tMs, person, reason }: Deletion): void => {
      const { skidText: _, ...kept } = need(run)
      audit.append({ tMs, person, act: 'run.delete', reason, body: { ...kept, ...countRows.get(run) }, run })
      state.run('deleted', run)
      ledger.run(run, { kind: 'run.deleted', tMs, person, reason })
      ledger.site({ kind: 'run.deleted', tMs, person, reason, ...ledger.headOf(run) })
    }).immediate,
    words: (run: RunId): string[] => words.all(run),
    /** Adds words from index `from` on; those already there must be the same (idempotent). Errors: STORE_DATA. */
    addWords: db.transaction((run: RunId, from: number, fresh: readonly string[]): void => {
      const known = words.all(run)
      if (from > known.length)
        throw new MonitorError('STORE_DATA', `words of run ${run} start at ${from}, but only ${known.length} are known`)
      if (from + fresh.length > known.length)
        ledger.run(run, { kind: 'words', from: known.length, words: fresh.slice(known.length - from) })
      fresh.forEach((word, i) => {
        const old = known[from + i]
        if (old === undefined) insertWord.run(run, from + i, word)
        else if (old !== word) throw new MonitorError('STORE_DATA', `word ${from + i} of run ${run} is '${old}', not '${word}'`)
      })
    }).immediate,
  }
}
