import type { Entry } from '../core/sequence.ts'
import type { Asked } from '../core/sim/operator.ts'
import type { Json } from '../store/keys.ts'
import type { RunKind } from '../wire/run.ts'
import type { RunClock } from '../wire/service.ts'

/** What came since the last poll. The entries' blocks are the source's own again at the next poll. */
export interface Polled {
  readonly entries: readonly Entry[]
  /** Words of text tags that these rows are the first to use. */
  readonly words?: { readonly from: number; readonly words: readonly string[] }
  /** Where the source stands after these entries; kept in the same commit, so that a restart goes on exactly there. */
  readonly state?: Json
  /** More is waiting already: poll again as soon as this is on disk. */
  readonly more: boolean
  /** Nothing more will come. */
  readonly ended: boolean
}

export interface SourceStatus {
  readonly state: 'running' | 'waiting' | 'failed' | 'ended'
  readonly message: string | null
}

/** Where a live run's readings come from. It keeps the run's clock too, since only it knows how its times relate to ours. */
export interface Source {
  readonly kind: RunKind
  /** In words, for people. */
  readonly about: string
  /**
   * Rows that have come, and ticks of the run's clock where none came for a while. Called again only once what it gave is on disk.
   * Never throws for what the outside does (a file that goes away): that is its `status`.
   */
  poll(): Promise<Polled>
  status(): SourceStatus
  clock(): RunClock
  /** Longest pause between rows that is usual for this source, s. */
  usualGapS(): number
  /** Only a simulated skid has somebody who does what a person has confirmed; orders it knows already are passed over. A real source is read, never told. */
  follow?(asked: readonly Asked[]): void
  close(): Promise<void>
}
