import type Database from 'better-sqlite3'
import type { Act } from '../core/sequence.ts'
import { rowHash } from '../trail/chain.ts'
import { checksum, damaged } from './checksum.ts'
import { endOf, keyOf, type RunId, seqOf } from './keys.ts'
import type { Ledger } from './ledger.ts'

export interface NumberedAct {
  readonly seq: number
  readonly act: Act
}

/** Acts of people at their numbers in the sequence, kept beside rows and ticks. Callers bring the transaction. */
export function actTable(db: Database.Database, ledger: Pick<Ledger, 'run'>) {
  const insert = db.prepare('INSERT INTO act (id, sum, json) VALUES (?, ?, ?)')
  const between = db.prepare<[number, number], { id: number; sum: number; json: string }>(
    'SELECT id, sum, json FROM act WHERE id >= ? AND id < ? ORDER BY id',
  )
  return {
    add(run: RunId, seq: number, act: Act): void {
      const id = keyOf(run, seq)
      const json = JSON.stringify(act)
      const sum = checksum([id], json)
      insert.run(id, sum, json)
      ledger.run(run, { kind: 'act', seq, act, row: rowHash([id, sum, json]) })
    },
    /** Acts with from ≤ number < to. Errors: STORE_CORRUPT. */
    between: (run: RunId, from: number, to = endOf): NumberedAct[] =>
      between.all(keyOf(run, from), keyOf(run, to)).map(({ id, sum, json }) => {
        if (sum !== checksum([id], json)) throw damaged(`act ${seqOf(id)} of run ${run}`)
        return { seq: seqOf(id), act: JSON.parse(json) as Act }
      }),
  }
}

export type ActTable = ReturnType<typeof actTable>
