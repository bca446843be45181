/**
 * Rows of readings in arrival order, column-wise packed so that a day of 24 channels at 10 Hz (20 million values) costs no object
 * a value. House style asks for null where a value is missing; inside a block the code beside each value says so instead, and the
 * number under any code but `cell.value` is meaningless (stored as 0, never NaN).
 */
export interface RowBlock {
  /** Rows in use; the arrays may be longer. */
  rows: number
  /** Number of tags a row spans, in the order of the skid's `tags`. */
  readonly width: number
  /** Source time of each row, ms since 1970 UTC. */
  readonly tMs: Float64Array
  /** Row-major values in the unit of the tag, `rows × width`. */
  readonly values: Float64Array
  /** Row-major, a `cell` code for each value. */
  readonly codes: Uint8Array
}

/** What a row says about a tag. Text tags (`phaseColumn`, `state`, `text`) carry an index into the pipeline's word list as value. */
export const cell = {
  /** The row says nothing of this tag (long format, other files): not a sample at all. */
  absent: 0,
  /** A finite number (or a word's index). */
  value: 1,
  /** Empty, NaN, a logger's word for missing, a missing code: a sample, and bad. */
  missing: 2,
  /** Text where a number belongs: a sample, and bad. */
  unreadable: 3,
  /** A finite number that the source itself marks uncertain. */
  uncertain: 4,
  /** A finite number that the source itself marks bad. */
  bad: 5,
} as const

/** A fresh block for `capacity` rows of `width` tags. */
export function rowBlock(capacity: number, width: number): RowBlock {
  return {
    rows: 0,
    width,
    tMs: new Float64Array(capacity),
    values: new Float64Array(capacity * width),
    codes: new Uint8Array(capacity * width),
  }
}

/** Phases a `phaseColumn` may name. They open every run's word list, so that word index 0 to 4 is a phase. */
export const phases = ['startup', 'production', 'flush', 'hold', 'shutdown'] as const
export type Phase = (typeof phases)[number]
