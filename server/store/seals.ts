import type Database from 'better-sqlite3'
import { type Anchor, checkApart, headStatement, type KeyFolder, keyFolder, type Signer } from '../trail/keys.ts'
import type { SiteRecord } from '../trail/records.ts'
import type { Ledger } from './ledger.ts'
import { site } from './ledger.ts'

/** Whether heads are signed, by which key, and what a person should know of it. */
export interface Signing {
  readonly store: string
  /** The public key in hex and its fingerprint; null where heads are not signed. */
  readonly key: string | null
  readonly fingerprint: string | null
  /** Where a key was made at this opening. */
  readonly madeIn: string | null
  /** Why heads are not signed, or what is wrong with them; null on an ordinary day. */
  readonly trouble: string | null
}

const sealMs = 60_000

/**
 * Signs where the chains stand: a record `heads` names every chain that grew, and the head of the site's chain right behind it is signed with
 * the key of this store, which lies outside the data folder. Without a folder for keys nothing is signed, and `signing` says so.
 */
export function seals(db: Database.Database, ledger: Ledger, wallMs: () => number) {
  const grown = db.prepare<[], { run: number; count: number; head: Buffer }>(
    'SELECT id AS run, count, head FROM chain WHERE count > sealed ORDER BY id',
  )
  const insert = db.prepare('INSERT INTO seal (count, t_ms, key, signature) VALUES (?, ?, ?, ?)')
  const mark = db.prepare('UPDATE chain SET sealed = count WHERE count > sealed')
  const lastKey = (): string | undefined => ledger.told<SiteRecord>(site).findLast((r) => r.kind === 'key')?.key
  let folder: KeyFolder | null = null
  let signer: Signer | null = null
  let madeIn: string | null = null
  let trouble: string | null = 'heads are not signed: no folder for keys was given'
  let sealedAt = Number.NEGATIVE_INFINITY

  /** What the folder remembers must be in the store; where it is not, that becomes part of the record. */
  function compare(): void {
    const anchor = folder?.anchor() ?? null
    if (anchor === null) return
    const found = ledger.hashAt(site, anchor.count - 1) ?? 'none'
    if (found === anchor.head) return
    ledger.site({ kind: 'break', signed: { count: anchor.count, head: anchor.head }, found })
    trouble = `this store is not the one that was signed last: record ${anchor.count - 1} of the site's chain ${found === 'none' ? 'is missing' : 'is another'}`
  }

  return {
    /** Takes the key of this store out of a folder, a new one where it has none. `data` is the folder of the store. Errors: USAGE when the key would lie with the data. */
    unlock(dir: string, data: string, isReader: boolean): void {
      checkApart(dir, data)
      try {
        folder = keyFolder(dir, ledger.store())
        signer = folder.find()
        const before = lastKey()
        if (signer === null && !isReader) {
          signer = folder.make()
          madeIn = dir
          trouble =
            before === undefined ? null : `the key that signed this store before is not in ${dir}; a new one signs from here on`
        } else trouble = signer === null ? `heads are not signed: the key of this store is not in ${dir}` : null
      } catch (error) {
        signer = null
        trouble = `heads are not signed: ${(error as Error).message}`
        return
      }
      if (isReader || signer === null) return
      const { key } = signer
      db.transaction(() => {
        compare()
        const before = lastKey()
        if (before !== key)
          ledger.site({ kind: 'key', key, why: before === undefined ? 'first use' : 'the key before it was not there' })
      }).immediate()
    },
    /** Signs the heads when any chain has grown and a minute has passed, or at once when asked. Outside any transaction. */
    seal(now = false): void {
      if (signer === null || folder === null || (!now && wallMs() - sealedAt < sealMs)) return
      sealedAt = wallMs()
      const { fingerprint, sign } = signer
      const anchor = db
        .transaction(() => {
          const chains = grown.all()
          if (chains.length === 0) return null
          const heads = chains.filter(({ run }) => run !== site).map((c) => ({ ...c, head: c.head.toString('hex') }))
          ledger.site({ kind: 'heads', chains: heads })
          const { count, head } = ledger.head(site)
          const tMs = wallMs()
          insert.run(count, tMs, fingerprint, sign(headStatement(ledger.store(), count, head, tMs)))
          mark.run()
          return { store: ledger.store(), count, head }
        })
        .immediate()
      if (anchor === null) return
      try {
        folder.remember(anchor)
      } catch (error) {
        trouble = `the last signed head cannot be kept beside the key: ${(error as Error).message}`
      }
    },
    /** The next call of `seal` signs, however short ago the last was. */
    soon(): void {
      sealedAt = Number.NEGATIVE_INFINITY
    },
    /** What the folder of the key remembers of this store. */
    anchor: (): Anchor | null => folder?.anchor() ?? null,
    signer: (): Signer | null => signer,
    signing: (): Signing => ({
      store: ledger.store(), key: signer?.key ?? null, fingerprint: signer?.fingerprint ?? null, madeIn, trouble,
    }), // biome-ignore format: a list
  }
}
