/**
 * Quantile by linear interpolation between order statistics: h = (n − 1) p, x[⌊h⌋] + (h − ⌊h⌋)(x[⌊h⌋+1] − x[⌊h⌋]).
 * values  any order, not mutated    p  0 to 1    null when there are none.
 * Source: R. J. Hyndman, Y. Fan, The American Statistician 50 (1996) 361–365, definition 7.
 */
export function quantile(values: readonly number[], p: number): number | null {
  const x = [...values].sort((a, b) => a - b)
  if (x.length === 0) return null
  const h = (x.length - 1) * p
  const i = Math.floor(h)
  const low = x[i]!
  return low + (h - i) * ((x[i + 1] ?? low) - low)
}

export interface Interval {
  readonly low: number
  readonly high: number
}

const z95 = 1.959963984540054

/**
 * Wilson score interval of a proportion, 95 %: (p + z²/2n ± z √(p(1−p)/n + z²/4n²)) / (1 + z²/n).
 * hits of n; null when n is 0. Valid for every n, at 0 and at n hits as well.
 * Source: E. B. Wilson, J. Am. Stat. Assoc. 22 (1927) 209–212.
 */
export function wilson(hits: number, n: number): Interval | null {
  if (n === 0) return null
  const p = hits / n
  const d = 1 + z95 ** 2 / n
  const mid = (p + z95 ** 2 / (2 * n)) / d
  const half = (z95 * Math.sqrt((p * (1 - p)) / n + z95 ** 2 / (4 * n * n))) / d
  return { low: hits === 0 ? 0 : mid - half, high: hits === n ? 1 : mid + half }
}

/** P(N ≤ count) of a Poisson count with the given mean; terms in logarithms so that large means do not underflow. */
export function poissonCdf(count: number, mean: number): number {
  if (mean === 0) return 1
  let sum = 0
  let logTerm = -mean
  for (let i = 0; i <= count; i++) {
    if (i > 0) logTerm += Math.log(mean / i)
    sum += Math.exp(logTerm)
  }
  return Math.min(1, sum)
}

/** P(N ≤ hits) of a binomial count of n trials with probability p. */
export function binomialCdf(hits: number, n: number, p: number): number {
  if (p <= 0 || hits >= n) return 1
  if (p >= 1) return 0
  let sum = 0
  let logTerm = n * Math.log1p(-p)
  for (let i = 0; i <= hits; i++) {
    if (i > 0) logTerm += Math.log((n - i + 1) / i) + Math.log(p / (1 - p))
    sum += Math.exp(logTerm)
  }
  return Math.min(1, sum)
}

/** Where a falling function of the mean meets a value, by bisection to the last bit. */
function meanWhere(cdf: (mean: number) => number, value: number, top: number): number {
  let low = 0
  let high = top
  for (let i = 0; i < 200; i++) {
    const mid = (low + high) / 2
    if (mid === low || mid === high) break
    if (cdf(mid) > value) low = mid
    else high = mid
  }
  return (low + high) / 2
}

/**
 * Exact 95 % interval of a Poisson mean from one count: low solves P(N ≥ count) = 0.025, high solves P(N ≤ count) = 0.025.
 * Source: F. Garwood, Biometrika 28 (1936) 437–442.
 */
export function poissonInterval(count: number): Interval {
  const top = 20 + 2 * count + 10 * Math.sqrt(count)
  return {
    low: count === 0 ? 0 : meanWhere((m) => poissonCdf(count - 1, m), 0.975, top),
    high: meanWhere((m) => poissonCdf(count, m), 0.025, top),
  }
}
