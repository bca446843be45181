import { normalQuantile } from './normal.ts'

/** Middle value; the mean of the middle two for an even count. The caller gives one value or more. */
export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b)
  const half = sorted.length >> 1
  return sorted.length % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2
}

/** Robust sd: 1.4826 times the median absolute deviation from the median; for normal values it estimates σ. */
export function madSd(values: readonly number[]): number {
  const middle = median(values)
  return 1.4826 * median(values.map((v) => Math.abs(v - middle)))
}

export interface RobustSlope {
  readonly slope: number
  readonly low: number
  readonly high: number
  /** median(y) − slope·median(x) */
  readonly intercept: number
}

/**
 * Theil–Sen slope: median of the slopes of all pairs with different x, with its interval from the normal approximation of Kendall's S
 * (variance with ties in y). Unmoved by up to 29 % of wild values.
 * inflation  factor on the variance of S for readings that remember the last one, 1 when independent; see `memoryInflation`.
 * Null with fewer than two different x. Cost n²/2: keep n to a hundred or so.
 * Sources: H. Theil 1950; P. K. Sen, J. Am. Stat. Assoc. 63 (1968) 1379; M. G. Kendall, Rank Correlation Methods.
 */
export function theilSen(x: readonly number[], y: readonly number[], level: number, inflation = 1): RobustSlope | null {
  const n = x.length
  const slopes: number[] = []
  for (let j = 1; j < n; j++) {
    for (let i = 0; i < j; i++) {
      const dx = x[j]! - x[i]!
      if (dx !== 0) slopes.push((y[j]! - y[i]!) / dx)
    }
  }
  if (slopes.length === 0) return null
  const sorted = Float64Array.from(slopes).sort()
  const pairs = sorted.length
  const half = pairs >> 1
  const slope = pairs % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2
  const reach = normalQuantile((1 + level) / 2) * Math.sqrt(kendallVariance(x, y) * inflation)
  const low = sorted[Math.max(roundEven((pairs - reach) / 2) - 1, 0)]!
  const high = sorted[Math.min(roundEven((pairs + reach) / 2), pairs - 1)]!
  return { slope, low, high, intercept: median(y) - slope * median(x) }
}

/** Variance of Kendall's S under no trend: n(n − 1)(2n + 5)/18, less the same of every group of ties in x and in y. */
function kendallVariance(x: readonly number[], y: readonly number[]): number {
  const term = (t: number) => t * (t - 1) * (2 * t + 5)
  const ties = (values: readonly number[]) => {
    const sorted = [...values].sort((a, b) => a - b)
    let sum = 0
    let run = 1
    for (let i = 1; i <= sorted.length; i++) {
      if (i < sorted.length && sorted[i] === sorted[i - 1]) run++
      else {
        sum += term(run)
        run = 1
      }
    }
    return sum
  }
  return (term(x.length) - ties(x) - ties(y)) / 18
}

/** Halves to even, as the reference libraries round ranks. */
const roundEven = (v: number): number => (Math.abs(v % 1) === 0.5 ? 2 * Math.round(v / 2) : Math.round(v))

/**
 * How much readings that remember the last one widen the variance of a trend: (1 + ρ)/(1 − ρ), ρ the lag-1 correlation of the
 * residuals with its small-sample bias (1 + 3ρ)/n put back, kept within 0 to 0.95. Common practice for Kendall's test (effective
 * sample size of a first-order autoregression). 1 for a constant.
 */
export function memoryInflation(residuals: readonly number[]): number {
  const n = residuals.length
  let mean = 0
  for (const r of residuals) mean += r / n
  let here = 0
  let next = 0
  for (let i = 0; i < n; i++) {
    here += (residuals[i]! - mean) ** 2
    if (i > 0) next += (residuals[i]! - mean) * (residuals[i - 1]! - mean)
  }
  if (!(here > 0)) return 1
  const raw = next / here
  const rho = Math.min(0.95, Math.max(0, raw + (1 + 3 * raw) / n))
  return (1 + rho) / (1 - rho)
}
