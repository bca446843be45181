/**
 * act: what a person did. change: a limit, a setting. shelve: an alarm taken away from the operator or given back, by a person or by logic. refused:
 * a request that was not done. alarm: an alarm that came, went or was marked by itself. access: signing in and people. run: a run began,
 * ended, was deleted; the keys of the store. review: somebody looked the trail through.
 */
export type TrailGroup = 'act' | 'change' | 'shelve' | 'refused' | 'alarm' | 'access' | 'run' | 'review'

/** One record of a chain, in words. */
export interface TrailRow {
  readonly chain: 'run' | 'site'
  /** Its number in the chain. */
  readonly n: number
  /** Of the thing itself by the run's clock; null where it has none of its own. */
  readonly tMs: number | null
  readonly recordedMs: number
  readonly group: TrailGroup
  /** A short word: `acknowledge`, `limit`, `sign-in.refused` ... */
  readonly what: string
  /** What it was done to; null where that says itself. */
  readonly about: string | null
  readonly person: string | null
  readonly old: string | null
  readonly new: string | null
  readonly reason: string | null
  /** Recorded since the trail was last reviewed. */
  readonly isNew: boolean
}

export interface TrailReview {
  readonly person: string
  readonly atMs: number
  readonly remark: string
  /** Records of each chain that it covers. */
  readonly counts: TrailCounts
}

export interface TrailCounts {
  /** 0 on the trail of the site. */
  readonly run: number
  readonly site: number
}

/** `GET /api/runs/:run/trail` and `GET /api/trail`: a page of the trail, oldest first. */
export interface Trail {
  /** Null: of the site. */
  readonly run: number | null
  readonly rows: readonly TrailRow[]
  /** How many rows pass the filter, and from which on this page holds them. */
  readonly total: number
  readonly from: number
  /** Rows since the last review, whatever the filter. */
  readonly fresh: number
  /** Everybody who stands in it. */
  readonly people: readonly string[]
  /** The latest; null where nobody has reviewed it. */
  readonly review: TrailReview | null
  readonly counts: TrailCounts
  /** Head of the run's chain, or of the site's, to be printed with a report. */
  readonly head: string
  readonly signing: { readonly fingerprint: string | null; readonly trouble: string | null }
}

/** Body of `POST /api/trail/reviews`: the trail was looked through as far as the page showed it. */
export interface TrailReviewSent {
  readonly run: number | null
  readonly counts: TrailCounts
  readonly remark: string
}
