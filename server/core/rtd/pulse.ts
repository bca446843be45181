import { MonitorError } from '../errors.ts'
import { varianceClosed } from './dispersion.ts'

export interface PulseMoments {
  readonly mean: number
  readonly variance: number
  /** Variance over the square of the mean. */
  readonly variance2: number
  readonly tanks: number
  /** Peclet number of a closed vessel of this variance; null where the spread is a stirred tank's or more. */
  readonly peClosed: number | null
}

/**
 * Moments of a pulse test, tracer c at equal or unequal steps x (time or volume), by sums Σ x c / Σ c as in the worked example:
 *   mean, σ², N = mean²/σ², and Pe from σ²/mean² = 2/Pe − 2(1 − e^−Pe)/Pe².
 * Source: O. Levenspiel, Chemical Reaction Engineering, ch. 11, 13. Errors: RTD_RANGE without tracer or with unequal lengths.
 */
export function pulseMoments(x: readonly number[], c: readonly number[]): PulseMoments {
  if (x.length !== c.length || x.length < 3)
    throw new MonitorError(
      'RTD_RANGE',
      `a pulse test needs as many times as values and at least 3, got ${x.length} and ${c.length}`,
    )
  let area = 0
  let first = 0
  let second = 0
  for (const [i, xi] of x.entries()) {
    // weight of a point: half the stretch to its neighbours, which is one step where steps are equal
    const w = ((x[Math.min(i + 1, x.length - 1)] ?? xi) - (x[Math.max(i - 1, 0)] ?? xi)) / 2
    const m = w * (c[i] ?? 0)
    area += m
    first += m * xi
    second += m * xi * xi
  }
  if (!(area > 0)) throw new MonitorError('RTD_RANGE', 'a pulse test without tracer has no mean')
  const mean = first / area
  const variance = second / area - mean * mean
  const variance2 = variance / (mean * mean)
  return { mean, variance, variance2, tanks: 1 / variance2, peClosed: peOfVariance(variance2) }
}

function peOfVariance(variance2: number): number | null {
  if (variance2 >= 1 || variance2 <= 0) return null
  let low = 1e-6
  let high = 4 / variance2 + 10
  while (high - low > 1e-12 * high) {
    const middle = (low + high) / 2
    if (varianceClosed(middle) > variance2) low = middle
    else high = middle
  }
  return (low + high) / 2
}
