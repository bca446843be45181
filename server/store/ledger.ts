import type Database from 'better-sqlite3'
import { canonical, wellFormed } from '../trail/canonical.ts'
import { hashOf, nothing } from '../trail/chain.ts'
import type { Chained, HeadOf, RunRecord, SiteRecord } from '../trail/records.ts'

/** The site's chain; a run's has the run's number. */
export const site = 0

/** Where a chain stands. */
export interface ChainHead {
  readonly count: number
  /** Hash of its last record in hex; 64 zeros before the first. */
  readonly head: string
}

/** A record with its hash in hex. */
export interface Linked<R> {
  readonly record: Chained<R>
  readonly text: string
  readonly hash: string
}

interface Row {
  readonly hash: Buffer
  readonly json: string
}

const linked = <R>({ hash, json }: Row): Linked<R> => ({
  record: JSON.parse(json) as Chained<R>,
  text: json,
  hash: hash.toString('hex'),
})

/** The chains. An append belongs into the transaction of what it records; callers bring it. */
export function ledger(db: Database.Database, wallMs: () => number) {
  const at = db.prepare<[number], { count: number; head: Buffer }>('SELECT count, head FROM chain WHERE id = ?')
  const insert = db.prepare('INSERT INTO link (chain, n, hash, kind, json) VALUES (?, ?, ?, ?, ?)')
  const set = db.prepare(
    `INSERT INTO chain (id, count, head, sealed) VALUES (?, ?, ?, 0)
     ON CONFLICT (id) DO UPDATE SET count = excluded.count, head = excluded.head`,
  )
  const list = db.prepare<[number, number, number], Row>(
    'SELECT hash, json FROM link WHERE chain = ? AND n >= ? ORDER BY n LIMIT ?',
  )
  // As the index of these has it, so that years of readings and heads are not gone through.
  const told = db.prepare<[number], Row>(
    `SELECT hash, json FROM link WHERE chain = ? AND kind NOT IN ('heads', 'readings', 'events', 'words') ORDER BY n`,
  )
  const hashAt = db.prepare<[number, number], Buffer>('SELECT hash FROM link WHERE chain = ? AND n = ?').pluck()
  const storeId = db.prepare<[], string>('SELECT id FROM store').pluck()

  function append(chain: number, record: RunRecord | SiteRecord): ChainHead {
    const { count, head } = at.get(chain) ?? { count: 0, head: nothing }
    const text = canonical(wellFormed({ n: count, recordedMs: wallMs(), ...record }))
    const hash = hashOf(head, text)
    insert.run(chain, count, hash, record.kind, text)
    set.run(chain, count + 1, hash)
    return { count: count + 1, head: hash.toString('hex') }
  }
  const head = (chain: number): ChainHead => {
    const found = at.get(chain)
    return found === undefined
      ? { count: 0, head: nothing.toString('hex') }
      : { count: found.count, head: found.head.toString('hex') }
  }
  const headOf = (run: number): HeadOf => ({ run, ...head(run) })

  return {
    store: (): string => storeId.get() ?? '',
    head,
    headOf,
    run: (run: number, record: RunRecord): void => void append(run, record),
    site: (record: SiteRecord): void => void append(site, record),
    /** At most `most` records of a chain from number `from` on. */
    list: <R extends RunRecord | SiteRecord>(chain: number, from = 0, most = 1e9): Linked<R>[] =>
      list.all(chain, from, most).map((row) => linked<R>(row)),
    /** What a person reads of a chain: all but readings, outputs, words and signed heads. */
    told: <R extends RunRecord | SiteRecord>(chain: number): Chained<R>[] => told.all(chain).map((row) => linked<R>(row).record),
    /** Hash of a record in hex; null where there is none. */
    hashAt: (chain: number, n: number): string | null => hashAt.get(chain, n)?.toString('hex') ?? null,
  }
}

export type Ledger = ReturnType<typeof ledger>
