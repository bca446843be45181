import type Database from 'better-sqlite3'
import type { Anchor } from '../trail/keys.ts'
import type { Chained, HeadOf, SiteRecord } from '../trail/records.ts'
import { type Fault, type Walked, walk, whatIs } from '../trail/walk.ts'
import { site } from './ledger.ts'
import { anchorHead, type KnownHead, knownFaults, type NamedHead, namedFaults, sealFault, sealsOf } from './verify-heads.ts'
import { runRows, siteRows } from './verify-rows.ts'

export interface VerifyOptions {
  /** Public keys in hex that are known to be the store's; empty where none is at hand. */
  readonly publicKeys?: readonly string[]
  readonly heads?: readonly KnownHead[]
  readonly anchor?: Anchor | null
}

/** One chain as it was found. */
export interface ChainProof {
  /** 0: the site. */
  readonly chain: number
  readonly title: string
  readonly isDeleted: boolean
  readonly records: number
  readonly lastMs: number | null
  readonly head: string
  readonly sealedRows: number
  readonly stagedRows: number
}

export interface StoreProof {
  readonly store: string
  readonly chains: readonly ChainProof[]
  /** The last signed head; null where none is. */
  readonly signed: { readonly heads: number; readonly count: number; readonly tMs: number; readonly keys: readonly string[] } | null
  /** Records of the site's chain behind the last signed head, and of runs behind what it names. */
  readonly unsigned: number
  /** The first of each chain first; empty when nothing was touched. */
  readonly faults: readonly Fault[]
}

const seenAs = (count: number): string => `record ${count - 1}`

/**
 * Everything of a store that its chains stand for, as of one moment: each chain's records, the rows they stand for, what stands in the store and in no
 * record, the site's chain's word on the runs, and every signature. Summary pages and snapshots are made from the rest and not trusted with anything.
 */
export function verifyStore(db: Database.Database, o: VerifyOptions = {}): StoreProof {
  const faults: Fault[] = []
  const hashes = db.prepare<[number, number], Buffer>('SELECT hash FROM link WHERE chain = ? AND n = ?').pluck()
  const links = db.prepare<[number], { n: number; text: string; hash: Buffer; kind: string }>(
    'SELECT n, json AS text, hash, kind FROM link WHERE chain = ? ORDER BY n',
  )
  const stands = db.prepare<[number], { count: number; head: Buffer }>('SELECT count, head FROM chain WHERE id = ?')
  const store = db.prepare<[], string>('SELECT id FROM store').pluck().get() ?? ''

  /** Follows a chain, then compares with where it is said to stand. */
  function follow(chain: number, visit: (r: Chained<SiteRecord>) => string | null): Walked {
    const walked = walk(chain, links.iterate(chain), (r) => {
      const found = visit(r as Chained<SiteRecord>)
      if (found !== null) faults.push({ chain, n: r.n, atMs: r.recordedMs, what: whatIs(r), found })
    })
    const said = stands.get(chain)
    if (walked.fault !== null) faults.push(walked.fault)
    else if (said === undefined || said.count !== walked.count || said.head.toString('hex') !== walked.head)
      whole(
        chain,
        `it ends with ${seenAs(walked.count)}, but ${said === undefined ? 'nothing says where it should' : `should with ${seenAs(said.count)}`}`,
        walked.count,
      )
    return walked
  }
  const whole = (chain: number, found: string, n: number | null = null): void =>
    void faults.push({ chain, n, atMs: null, what: 'the chain as a whole', found })

  const begun = new Map<number, HeadOf>()
  const deleted = new Map<number, HeadOf>()
  const named: NamedHead[] = []
  const keys = new Set<string>()
  const sealing: number[] = []
  const ofSite = siteRows(db)
  const top = follow(site, (r) => {
    if (r.kind === 'run.begun' || r.kind === 'run.ended' || r.kind === 'run.deleted') named.push({ by: r.n, of: r })
    if (r.kind === 'run.begun') begun.set(r.run, r)
    if (r.kind === 'run.deleted') deleted.set(r.run, r)
    if (r.kind === 'heads') {
      sealing.push(r.n + 1)
      for (const of of r.chains) named.push({ by: r.n, of })
    }
    if (r.kind === 'key') keys.add(r.key)
    if (r.kind === 'genesis' && r.chain === 'site' && r.store !== store) return `it is of store ${r.store}, this is ${store}`
    if (r.kind === 'break')
      return `record ${r.signed.count - 1}, signed before, was ${r.found === 'none' ? 'missing' : 'another'}: the store was cut, rewritten or restored from a backup`
    return ofSite.check(r)
  })
  if (top.fault === null) for (const line of ofSite.rest()) whole(site, line)

  const chains: ChainProof[] = [proofOf(site, 'the site', false, top, 0, 0)]
  const titles = new Map(
    db
      .prepare<[], { id: number; title: string; state: string }>('SELECT id, title, state FROM run ORDER BY id')
      .all()
      .map((r) => [r.id, r]),
  )
  const own = runRows(db)
  const ids = new Set([
    ...titles.keys(),
    ...begun.keys(),
    ...db.prepare<[], number>('SELECT id FROM chain WHERE id <> 0').pluck().all(),
  ])
  for (const id of [...ids].sort((a, b) => a - b)) {
    const row = titles.get(id)
    const isGone = row === undefined || row.state === 'deleted'
    const rows = own(id)
    let title = row?.title ?? `run ${id}`
    let saysDeleted = false
    const walked = follow(id, (r) => {
      if (r.kind === 'genesis' && r.chain === 'site') return 'it is not the first record of a run'
      if (r.kind === ('genesis' as string)) {
        const g = r as unknown as { store: string; run: number; title: string }
        title = row?.title ?? g.title
        if (g.store !== store || g.run !== id) return `it is of run ${g.run} of store ${g.store}`
      }
      if ((r.kind as string) === 'run.deleted') saysDeleted = true
      return isGone ? null : rows.check(r)
    })
    if (walked.count === 0 && walked.fault === null) whole(id, 'its chain is gone', 0)
    else if (walked.fault === null) {
      if (isGone && !saysDeleted) whole(id, 'the run is gone, and no record says that it was deleted')
      if (isGone && saysDeleted && top.fault === null && !deleted.has(id)) whole(id, 'its deletion is not in the chain of the site')
      if (!isGone && saysDeleted) whole(id, 'it was deleted, and stands in the store')
      if (!isGone) for (const line of rows.rest()) whole(id, line)
    }
    if (top.fault === null && !begun.has(id)) whole(id, 'its beginning is not in the chain of the site')
    chains.push(proofOf(id, title, isGone, walked, isGone ? 0 : rows.sealed(), isGone ? 0 : rows.staged()))
  }
  const counts = new Map(chains.map((c) => [c.chain, c.records]))

  const found = {
    hashAt: (chain: number, n: number) => hashes.get(chain, n)?.toString('hex') ?? null,
    records: (chain: number) => counts.get(chain) ?? 0,
  }
  const seals = sealsOf(db)
  const trusted = o.publicKeys ?? []
  faults.push(...namedFaults(found, named))
  const forged = sealFault(found, store, seals, keys, trusted)
  if (forged !== null) faults.push(forged)
  else if (top.fault === null) {
    const signedAt = new Set(seals.map((s) => s.count))
    const bare = sealing.find((count) => !signedAt.has(count))
    if (bare !== undefined)
      faults.push({ chain: site, n: bare - 1, atMs: null, what: 'a signed head', found: 'its signature is gone' })
  }
  if (trusted.length > 0 && seals.length === 0) whole(site, 'no head in it is signed, by the key given or any other')
  faults.push(...knownFaults(found, [...(o.heads ?? []), ...anchorHead(o.anchor, store)]))

  const last = seals.at(-1)
  const signedUpTo = new Map<number, number>([[site, last?.count ?? 0]])
  for (const { by, of } of named) if (last !== undefined && by < last.count) signedUpTo.set(of.run, of.count)
  const unsigned = chains.reduce((sum, c) => sum + Math.max(0, c.records - (signedUpTo.get(c.chain) ?? 0)), 0)
  return {
    store,
    chains,
    signed: last === undefined ? null : { heads: seals.length, count: last.count, tMs: last.tMs, keys: [...keys] },
    unsigned,
    faults,
  }
}

const proofOf = (chain: number, title: string, isDeleted: boolean, w: Walked, sealedRows: number, stagedRows: number): ChainProof => ({
  chain, title, isDeleted, records: w.count, lastMs: w.lastMs, head: w.head, sealedRows, stagedRows,
}) // biome-ignore format: a list
