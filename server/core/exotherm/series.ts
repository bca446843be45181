import { ago, forget, push, type Ring, ring } from './ring.ts'

/**
 * One series of excess (a thermocouple, a reactor's mean, the mean of all): its 4-s means of the last 25 s, and every 10 s one of them for
 * the last 32 min, of which all but the last two minutes give the robust spread.
 */
export interface Series {
  readonly recent: Ring
  readonly slow: Ring
  /** Robust sd of the 4-s mean, K, as last computed; 0 until there is enough. */
  sdK: number
  /** Scans in a row beyond the threshold upwards and downwards. */
  high: number
  low: number
  /** Scans since the last hole. */
  whole: number
}

export interface Pace {
  readonly scanS: number
  /** Scans in 4 s, 12 s, 25 s, at least 1. */
  readonly smooth: number
  readonly rise: readonly [number, number]
  /** Scans between slow samples, and slow samples in two minutes. */
  readonly slowEvery: number
  readonly slowDelay: number
  readonly slowKeep: number
}

/** Seconds into scans: at 1 s as written, at 0.1 s ten times as many, at 5 s and 60 s no fewer than one. */
export function pace(scanS: number): Pace {
  const scans = (s: number) => Math.max(1, Math.round(s / scanS))
  const slowEvery = scans(10)
  const slowS = slowEvery * scanS
  const slowDelay = Math.max(1, Math.round(120 / slowS))
  return {
    scanS,
    smooth: scans(4),
    rise: [scans(12), scans(25)],
    slowEvery,
    slowDelay,
    slowKeep: Math.max(30, Math.round(1800 / slowS)),
  }
}

export const freshSeries = (p: Pace): Series => ({
  recent: ring(p.rise[1] + 1),
  slow: ring(p.slowKeep + p.slowDelay),
  sdK: 0,
  high: 0,
  low: 0,
  whole: 0,
})

/** Robust sd: 1.4826 times the median distance from the median of the slow samples older than two minutes; needs 30. */
export function spread(s: Series, p: Pace): void {
  const xs = new Float64Array(p.slowKeep)
  let m = 0
  for (let n = p.slowDelay; n < s.slow.v.length; n++) {
    const x = ago(s.slow, n)
    if (x !== null) xs[m++] = x
  }
  if (m < 30) return
  const used = xs.subarray(0, m)
  const middle = median(used)
  for (let i = 0; i < m; i++) used[i] = Math.abs((used[i] as number) - middle)
  s.sdK = 1.4826 * median(used)
}

/** Median by selection, which takes a fifth of the time of sorting; reorders. */
function median(xs: Float64Array): number {
  const half = xs.length >> 1
  const upper = select(xs, half)
  if (xs.length % 2 === 1) return upper
  let lower = xs[0] as number
  for (let i = 1; i < half; i++) lower = Math.max(lower, xs[i] as number)
  return (lower + upper) / 2
}

/** The k-th smallest; leaves smaller ones before it (Hoare's selection). */
function select(xs: Float64Array, k: number): number {
  let low = 0
  let high = xs.length - 1
  while (low < high) {
    const pivot = xs[(low + high) >> 1] as number
    let i = low
    let j = high
    while (i <= j) {
      while ((xs[i] as number) < pivot) i++
      while ((xs[j] as number) > pivot) j--
      if (i > j) break
      const kept = xs[i] as number
      xs[i++] = xs[j] as number
      xs[j--] = kept
    }
    if (k <= j) high = j
    else if (k >= i) low = i
    else break
  }
  return xs[k] as number
}

/** After a gap, or with another lag: differences across it mean nothing. */
export const restart = (s: Series): void => {
  forget(s.recent)
  s.high = 0
  s.low = 0
  s.whole = 0
}

/**
 * Greatest rise over 12 or 25 s to `nowK`, not yet remembered, K; both windows must be without a hole, and the lesser rise is at least half the
 * greater, or that is what is given: a dip of one moment, 12 s ago, is no rise.
 */
export function riseK(s: Series, p: Pace, nowK: number): number | null {
  if (s.whole < p.rise[1]) return null
  const short = ago(s.recent, p.rise[0] - 1)
  const long = ago(s.recent, p.rise[1] - 1)
  if (short === null || long === null) return null
  const a = nowK - short
  const b = nowK - long
  return Math.min(Math.max(a, b), 2 * Math.min(a, b))
}

export function remember(s: Series, xK: number | null, slow: boolean): void {
  push(s.recent, xK)
  s.whole = xK === null ? 0 : s.whole + 1
  if (slow) push(s.slow, xK)
}
