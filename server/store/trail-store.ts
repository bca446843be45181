import type Database from 'better-sqlite3'
import type { RunRecord, SiteRecord } from '../trail/records.ts'
import type { Ledger } from './ledger.ts'
import type { seals } from './seals.ts'
import { type VerifyOptions, verifyStore } from './verify.ts'

/** The chains as others may use them: read, signed, never written by hand. */
export function trailStore(
  db: Database.Database,
  ledger: Ledger,
  { unlock, signing, signer, seal, anchor }: ReturnType<typeof seals>,
) {
  return {
    unlock,
    signing,
    seal,
    /** A signature of this store's key over a statement's canonical JSON; null where there is no key. */
    sign(statement: unknown): { key: string; signature: string } | null {
      const by = signer()
      return by === null ? null : { key: by.key, signature: by.sign(statement).toString('hex') }
    },
    head: ledger.head,
    /** The chain of a run, also of a deleted one. */
    ofRun: (run: number, from = 0) => ledger.list<RunRecord>(run, from),
    told: ledger.told,
    hashAt: ledger.hashAt,
    ofSite: (from = 0) => ledger.list<SiteRecord>(0, from),
    /** Whether the store is as it was written; `anchor` of the key's folder is asked where it was unlocked. */
    verify: (o: Omit<VerifyOptions, 'anchor'> = {}) => db.transaction(() => verifyStore(db, { ...o, anchor: anchor() })).deferred(),
    /** Runs a look at several things as of one moment. */
    atOnce: <R>(look: () => R): R => db.transaction(look).deferred(),
  }
}
