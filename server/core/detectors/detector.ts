/** What a detector looks at: z is the reading less its clean mean, over its clean σ [-]; null when there is no good reading. */
export interface Sample {
  readonly tMs: number
  readonly z: number | null
}

export type Verdict =
  | { readonly kind: 'quiet' }
  /** a lasting shift; onsetMs dates its first sample, size is its estimate [σ], below 0 for a fall */
  | { readonly kind: 'shift'; readonly side: 'high' | 'low'; readonly onsetMs: number; readonly size: number }
  /** a rise with its interval [σ/h], and when it began with its interval */
  | {
      readonly kind: 'rising'
      readonly perHour: number
      readonly lowPerHour: number
      readonly highPerHour: number
      readonly onset: { readonly atMs: number; readonly lowMs: number; readonly highMs: number } | null
    }

/**
 * A detector of one signal. State is plain JSON, so that a restart resumes from the store and a replay gives the same answer; step
 * changes nothing it is given. A sample without a value leaves the state as it was: a gap holds a statistic, it does not clear it.
 */
export interface Detector<C, S> {
  readonly name: string
  /** Errors: CONFIG_RANGE for settings that make no chart. */
  start(config: C): S
  step(config: C, state: S, sample: Sample): { readonly state: S; readonly verdict: Verdict }
}

export const quiet: Verdict = { kind: 'quiet' }
