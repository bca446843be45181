import type { Band } from './trend.ts'

/** What runs are laid over each other by. */
export const comparedBy = ['feed-on', 'volume', 'baseline'] as const
export type ComparedBy = (typeof comparedBy)[number]

/**
 * `GET /api/comparison?runs=3,5&segment=R1&by=feed-on`: the ratio and ΔP of one segment in several runs on one axis. `x` is hours since the first
 * step in production (feed-on), litres through the segment since then (volume), or hours since the beginning of its latest baseline (baseline).
 */
export interface Comparison {
  readonly segment: string
  readonly by: ComparedBy
  readonly unit: 'h' | 'L'
  readonly runs: readonly ComparedRun[]
}

export interface ComparedRun {
  readonly run: number
  readonly title: string
  readonly skid: string
  readonly toolVersion: string
  /** Where x is 0. */
  readonly zeroMs: number
  /** The clean baseline that its ratios stand on; null where it has none. */
  readonly baseline: {
    readonly fromMs: number
    readonly toMs: number
    readonly dpBar: number
    readonly sigma: number
    readonly provisional: boolean
  } | null
  /** Middle of each bucket. Volume stands still where nothing is known to flow. */
  readonly x: readonly number[]
  readonly ratio: Band
  readonly dpBar: Band
}
