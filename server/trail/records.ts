import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import type { Act } from '../core/sequence.ts'
import type { Json } from '../store/keys.ts'

/*
 * What a record of a chain may say. Times are ms since 1970 UTC: `tMs` of the thing, `recordedMs` of the record. `row` is the hash of the
 * database row that says the same (chain.ts: rowHash); `sha256` of what stays outside the chain because it is large.
 */

/** A chain's first record. The site's names the store, a run's what the run is and the configuration it began with. */
export interface SiteGenesis {
  readonly kind: 'genesis'
  readonly chain: 'site'
  readonly store: string
  readonly toolVersion: string
}
export interface RunGenesis {
  readonly kind: 'genesis'
  readonly chain: 'run'
  readonly store: string
  readonly run: number
  readonly toolVersion: string
  readonly skid: string
  readonly title: string
  readonly source: string
  readonly tMs: number
  /** live, importing or ended, as it began. */
  readonly state: string
  /** SHA-256 of the skid file's text. */
  readonly configuration: string
  readonly row: string
}

/** What follows up to number `upTo` was there before the store kept chains: it is proved from here on, not from when it was written. */
export interface Adopted {
  readonly kind: 'adopted'
  readonly from: 'an unchained store'
}

export type RunRecord =
  | RunGenesis
  | Adopted
  | { readonly kind: 'words'; readonly from: number; readonly words: readonly string[] }
  | { readonly kind: 'act'; readonly seq: number; readonly act: Act; readonly row: string }
  | { readonly kind: 'transition'; readonly idx: number; readonly transition: AlarmRecord; readonly row: string }
  /** Outputs of the pipeline with numbers from ≤ idx < from + count; the hash is of their rows one after the other. */
  | { readonly kind: 'events'; readonly from: number; readonly count: number; readonly row: string }
  /**
   * A sealed segment: numbers [from, to) of the sequence. `sha256` is over its stored bytes (partsHash: order and ticks, then its strips),
   * `content` over what they mean (reading-hash.ts), null where it was not formed.
   */
  | {
      readonly kind: 'readings'
      readonly from: number
      readonly to: number
      readonly rows: number
      readonly ticks: number
      readonly parts: number
      readonly sha256: string
      readonly content: string | null
    }
  | { readonly kind: 'run.state'; readonly state: string }
  | { readonly kind: 'run.deleted'; readonly tMs: number; readonly person: string; readonly reason: string }

export interface AuditRecord {
  readonly kind: 'audit'
  readonly id: number
  readonly tMs: number
  readonly person: string
  readonly act: string
  readonly reason: string
  readonly body: Json
  readonly run: number | null
  readonly old: Json
  readonly new: Json
  readonly row: string
}

/** Where a run's chain stood. */
export interface HeadOf {
  readonly run: number
  readonly count: number
  readonly head: string
}

export type SiteRecord =
  | SiteGenesis
  | Adopted
  | AuditRecord
  | {
      readonly kind: 'settings'
      readonly version: number
      readonly scope: string
      readonly tMs: number
      readonly person: string
      readonly reason: string
      readonly settings: Json
      readonly row: string
    }
  /** The key that signs from here on, as raw bytes of Ed25519 in hex, and why it is another than before. */
  | { readonly kind: 'key'; readonly key: string; readonly why: string }
  | ({ readonly kind: 'run.begun' } & HeadOf)
  | ({ readonly kind: 'run.ended' } & HeadOf)
  | ({ readonly kind: 'run.deleted'; readonly tMs: number; readonly person: string; readonly reason: string } & HeadOf)
  /** Every chain that grew since the last such record; the head of the site's chain is signed right behind it. */
  | { readonly kind: 'heads'; readonly chains: readonly HeadOf[] }
  /** The key's folder remembers a signed head that this store does not hold: it was cut, rewritten or restored from a backup. */
  | { readonly kind: 'break'; readonly signed: { readonly count: number; readonly head: string }; readonly found: string }

/** A record as it stands in its chain. */
export type Chained<R> = R & { readonly n: number; readonly recordedMs: number }
