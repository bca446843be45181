import { binomialCdf, type Interval, poissonCdf, poissonInterval, quantile, wilson } from './stats.ts'

/** One line of the score. Shares and coverages are 0 to 1, rates per 1000 h. */
export interface Figure {
  readonly id: string
  readonly title: string
  readonly unit: 'share' | 'ratio' | 'per 1000 h' | 's' | 'of onset to limit' | 'of time left'
  readonly value: number | null
  /** What it is counted over: events, alarms, points; for a rate the count itself. */
  readonly n: number
  readonly hours: number | null
  /** 95 %: Wilson (shares), Garwood (rates), order statistics (quantiles); null where it cannot be had. */
  readonly interval: Interval | null
  readonly target: number | readonly [number, number] | null
  /** Against the target: met; missed by no more than chance allows (one-sided 5 %, exact); worse. */
  readonly verdict: 'met' | 'within chance' | 'worse' | null
}

type Target = number | readonly [low: number, high: number] | null
const alpha = 0.05
const verdictOf = (met: boolean, pOfThisOrWorse: number): Figure['verdict'] =>
  met ? 'met' : pOfThisOrWorse >= alpha ? 'within chance' : 'worse'

/** hits of n. A target number is the least wanted; a pair is the band wanted. */
export function share(id: string, title: string, hits: number, n: number, target: Target = null): Figure {
  const value = n === 0 ? null : hits / n
  const verdict = ((): Figure['verdict'] => {
    if (target === null || value === null) return null
    const [low, high] = typeof target === 'number' ? [target, 1] : target
    if (value < low) return verdictOf(false, binomialCdf(hits, n, low))
    return verdictOf(value <= high, value > high ? 1 - binomialCdf(hits - 1, n, high) : 1)
  })()
  return { id, title, unit: 'share', value, n, hours: null, interval: wilson(hits, n), target, verdict }
}

/** count per 1000 h of so many hours; target: the most wanted. */
export function rate(id: string, title: string, count: number, hours: number, target: number | null = null): Figure {
  const per = 1000 / hours
  const counted = poissonInterval(count)
  return {
    id,
    title,
    unit: 'per 1000 h',
    value: hours === 0 ? null : count * per,
    n: count,
    hours,
    interval: hours === 0 ? null : { low: counted.low * per, high: counted.high * per },
    target,
    verdict:
      target === null || hours === 0
        ? null
        : verdictOf(count * per <= target, count === 0 ? 1 : 1 - poissonCdf(count - 1, target / per)),
  }
}

/**
 * Quantile p of some values; target: the most wanted. The interval is distribution-free: the order statistics whose ranks a binomial
 * count (n, p) exceeds with 2.5 % at either side. The verdict counts the values above the target, binomial (n, 1 − p) where it holds.
 * `dependent` values (neighbouring points of one run) get neither: only a plain comparison.
 * Source: W. J. Conover, Practical Nonparametric Statistics, section on quantiles.
 */
export function quantileFigure(
  id: string,
  title: string,
  unit: Figure['unit'],
  values: readonly number[],
  p: number,
  target: number | null = null,
  dependent = false,
): Figure {
  const value = quantile(values, p)
  const n = values.length
  const above = target === null ? 0 : values.filter((v) => v > target).length
  return {
    id,
    title,
    unit,
    value,
    n,
    hours: null,
    interval: dependent ? null : quantileInterval(values, p),
    target,
    verdict:
      target === null || value === null
        ? null
        : verdictOf(value <= target, dependent ? 0 : above === 0 ? 1 : 1 - binomialCdf(above - 1, n, 1 - p)),
  }
}

function quantileInterval(values: readonly number[], p: number): Interval | null {
  const n = values.length
  const x = [...values].sort((a, b) => a - b)
  let r = 0
  while (r < n && binomialCdf(r, n, p) <= 0.025) r++
  let s = r
  while (s < n && binomialCdf(s, n, p) < 0.975) s++
  const low = x[r - 1]
  const high = x[s]
  return low === undefined || high === undefined ? null : { low, high }
}
