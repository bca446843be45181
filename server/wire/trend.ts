import type { LimitName } from '../core/sequence.ts'
import type { Interval } from './live.ts'

/**
 * `GET /api/runs/:run/trends?fromMs&toMs&buckets&tags=PT-101,…`: buckets of one width on a fixed grid, oldest first; bucket i covers
 * fromMs + i · bucketMs up to the next. Null is a gap: draw none across it.
 */
export interface Trends {
  readonly run: number
  readonly fromMs: number
  readonly bucketMs: number
  readonly buckets: number
  readonly segments: readonly SegmentTrend[]
  readonly tags: readonly TagTrend[]
  /** Production or not by bucket; null where not known. */
  readonly production: readonly (boolean | null)[]
}

export interface Band {
  readonly min: readonly (number | null)[]
  readonly max: readonly (number | null)[]
  readonly mean: readonly (number | null)[]
}

export interface SegmentTrend {
  readonly segment: string
  readonly ratio: Band
  readonly dpBar: Band
  readonly flowMlMin: Band
  readonly tempC: Band
  /** CUSUM of the promise's chart over its decision interval, upper and lower side: 1 is where it signals. Null in runs of an older build. */
  readonly cusum: Band | null
  readonly cusumLow: Band | null
}

export interface TagTrend extends Band {
  readonly tag: string
  readonly unit: string | null
}

/** One detector step, as the socket sends them; segments in the skid's order. */
export interface StepPoint {
  readonly tMs: number
  readonly production: boolean
  readonly segments: readonly {
    readonly ratio: number | null
    readonly dpBar: number | null
    readonly flowMlMin: number | null
    readonly tempC: number | null
    readonly cusum: number | null
    readonly cusumLow: number | null
  }[]
}

/** Readings of all tags since the frame before, as the socket sends them; in the skid's order; null where none was usable. */
export interface ReadingFrame {
  readonly fromMs: number
  readonly toMs: number
  readonly tags: readonly ({ readonly min: number; readonly max: number; readonly mean: number } | null)[]
}

/** `GET /api/runs/:run/marks`: what trends are drawn over. */
export interface Marks {
  readonly run: number
  readonly baselines: readonly {
    readonly segment: string
    readonly fromMs: number
    readonly toMs: number
    readonly dpBar: number
    readonly sigma: number
    readonly provisional: boolean
  }[]
  readonly onsets: readonly ({ readonly segment: string; readonly foundMs: number } & Interval)[]
  /** Limits in force from `fromMs` on, the skid file's first, a change each further; null: no limit. */
  readonly limits: readonly {
    readonly segment: string
    readonly limit: LimitName
    readonly fromMs: number
    readonly value: number | null
    readonly person: string | null
    readonly reason: string | null
  }[]
  /** Forecasts as known at their moment, each 600 s. */
  readonly forecasts: readonly ({ readonly segment: string; readonly knownMs: number; readonly limit: string } & Interval)[]
  readonly notes: readonly { readonly tMs: number; readonly text: string }[]
}
