import type Database from 'better-sqlite3'
import { type Anchor, fingerprintOf, headStatement, isSigned } from '../trail/keys.ts'
import type { HeadOf } from '../trail/records.ts'
import type { Fault } from '../trail/walk.ts'
import { site } from './ledger.ts'

/** A head that was kept elsewhere: printed, exported or remembered beside the key. */
export interface KnownHead {
  /** 0: the site. */
  readonly chain: number
  readonly count: number
  readonly head: string
  /** Where it comes from, in words. */
  readonly from: string
}

export interface Seal {
  readonly count: number
  readonly tMs: number
  /** Fingerprint of the key. */
  readonly key: string
  readonly signature: Buffer
}

/** Signed heads, oldest first. */
export const sealsOf = (db: Database.Database): Seal[] =>
  db.prepare<[], Seal>('SELECT count, t_ms AS tMs, key, signature FROM seal ORDER BY count').all()

/** The chains as they are found, to hold heads against. */
export interface Found {
  /** Hash of a record in hex; null where there is none. */
  hashAt(chain: number, n: number): string | null
  /** Records of a chain that are as they were written. */
  records(chain: number): number
}

const holds = (found: Found, chain: number, { count, head }: Omit<HeadOf, 'run'>): boolean =>
  found.hashAt(chain, count - 1) === head

/** A head of a run that the site's chain names, and by which record. */
export interface NamedHead {
  readonly by: number
  readonly of: HeadOf
}

/** Of each run the first head in which its chain and the site's differ. */
export function namedFaults(found: Found, named: readonly NamedHead[]): Fault[] {
  const judged = new Set<number>()
  return named.flatMap(({ by, of }) => {
    if (holds(found, of.run, of) || judged.has(of.run)) return []
    judged.add(of.run)
    const isCut = found.records(of.run) < of.count
    const what = isCut ? 'the end of the chain' : 'a record up to here'
    const says = `it is ${isCut ? 'gone' : 'another'} than record ${by} of the site's chain says`
    return [{ chain: of.run, n: of.count - 1, atMs: null, what, found: says }]
  })
}

/** The first signed head that does not fit. `keys` are those the site's chain names; of `trusted` keys, where any are given, one must have signed. */
export function sealFault(
  found: Found,
  store: string,
  seals: readonly Seal[],
  keys: ReadonlySet<string>,
  trusted: readonly string[],
): Fault | null {
  const byFingerprint = new Map([...keys].map((key) => [fingerprintOf(key), key]))
  for (const s of seals) {
    const key = byFingerprint.get(s.key)
    const head = found.hashAt(site, s.count - 1) ?? 'none'
    const isRight = key !== undefined && isSigned(headStatement(store, s.count, head, s.tMs), s.signature, key)
    if (isRight && (trusted.length === 0 || trusted.includes(key))) continue
    const says = isRight
      ? `it is signed by ${s.key}, not by a key given`
      : 'its signature does not fit: it, or a record before it, is not what was signed'
    return { chain: site, n: s.count - 1, atMs: s.tMs, what: 'a signed head', found: says }
  }
  return null
}

/** Heads from elsewhere that the chains do not hold: changed, or cut off. */
export function knownFaults(found: Found, heads: readonly KnownHead[]): Fault[] {
  return heads.flatMap((h) => {
    if (holds(found, h.chain, h)) return []
    const records = found.records(h.chain)
    const says =
      records < h.count
        ? `the chain has only ${records} of ${h.count} records: its end was cut off`
        : 'it, or a record before it, is another'
    return [{ chain: h.chain, n: h.count - 1, atMs: null, what: `the head that ${h.from} gives`, found: says }]
  })
}

/** The head that the folder of the key remembers, where it is of this store. */
export const anchorHead = (anchor: Anchor | null | undefined, store: string): KnownHead[] =>
  anchor == null || anchor.store !== store
    ? []
    : [{ chain: site, count: anchor.count, head: anchor.head, from: 'the folder of the key remembers' }]
