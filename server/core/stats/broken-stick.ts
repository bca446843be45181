import { normalQuantile } from './normal.ts'

export interface BrokenStick {
  /** where the slope changes, and its profile interval, in units of x */
  readonly at: number
  readonly low: number
  readonly high: number
  readonly slopeBefore: number
  readonly slopeAfter: number
  /** residual sum of squares */
  readonly rss: number
}

/**
 * Continuous two-phase line y = a + b₁x up to c, slope b₂ beyond: the exact least-squares c by search over every stretch between
 * neighbouring x (two free lines that cross inside the stretch, or a knot), with the profile interval
 * { c : RSS(c) ≤ RSS_min (1 + F(level; 1, n − 4)/(n − 4)) }, its outermost ends. Local searches stop in wrong minima.
 * x rising, more than 5 different values, independent errors. Null otherwise. Source: D. J. Hudson, J. Am. Stat. Assoc. 61 (1966) 1097.
 */
export function brokenStick(x: readonly number[], y: readonly number[], level: number): BrokenStick | null {
  const n = x.length
  if (n < 6 || !(x[n - 1]! > x[0]!)) return null
  let best = { at: Number.NaN, rss: Infinity, before: 0, after: 0 }
  const consider = (c: number) => {
    const fit = bentLine(x, y, c)
    if (fit !== null && fit.rss < best.rss) best = { at: c, ...fit }
  }
  for (let i = 1; i < n - 1; i++) {
    if (x[i]! > x[0]! && x[i]! < x[n - 1]!) consider(x[i]!)
    if (i + 1 < n - 1 && i >= 1) {
      const left = line(x, y, 0, i + 1)
      const right = line(x, y, i + 1, n)
      if (left !== null && right !== null && left.slope !== right.slope) {
        const c = (right.intercept - left.intercept) / (left.slope - right.slope)
        if (c > x[i]! && c < x[i + 1]!) consider(c)
      }
    }
  }
  if (!Number.isFinite(best.rss)) return null
  const t = studentQuantile((1 + level) / 2, n - 4)
  const allowed = best.rss * (1 + (t * t) / (n - 4))
  const inside = (c: number) => {
    const fit = bentLine(x, y, c)
    return fit !== null && fit.rss <= allowed
  }
  const edge = (from: number, steps: readonly number[]) => {
    let outer = from
    for (const c of steps) {
      if (inside(c)) {
        let inner = c
        for (let i = 0; i < 40; i++) {
          const mid = (outer + inner) / 2
          if (inside(mid)) inner = mid
          else outer = mid
        }
        return inner
      }
      outer = c
    }
    return best.at
  }
  const grid: number[] = []
  for (let i = 0; i + 1 < n; i++) for (let k = 0; k < 3; k++) grid.push(x[i]! + ((x[i + 1]! - x[i]!) * k) / 3)
  const below = grid.filter((c) => c < best.at)
  const above = [...grid, x[n - 1]!].filter((c) => c > best.at).reverse()
  return {
    at: best.at,
    low: edge(x[0]!, [...below, best.at]),
    high: edge(x[n - 1]!, [...above, best.at]),
    slopeBefore: best.before,
    slopeAfter: best.after,
    rss: best.rss,
  }
}

/** Least squares line through points from..to−1; null when they share one x. */
function line(x: readonly number[], y: readonly number[], from: number, to: number): { slope: number; intercept: number } | null {
  const n = to - from
  let mx = 0
  let my = 0
  for (let i = from; i < to; i++) {
    mx += x[i]! / n
    my += y[i]! / n
  }
  let xx = 0
  let xy = 0
  for (let i = from; i < to; i++) {
    xx += (x[i]! - mx) ** 2
    xy += (x[i]! - mx) * (y[i]! - my)
  }
  return xx > 0 ? { slope: xy / xx, intercept: my - (xy / xx) * mx } : null
}

/** Least squares of y on x and (x − c)₊, both centred; null when the bend cannot be told from the line. */
function bentLine(x: readonly number[], y: readonly number[], c: number): { rss: number; before: number; after: number } | null {
  const n = x.length
  let mx = 0
  let my = 0
  let mb = 0
  for (let i = 0; i < n; i++) {
    mx += x[i]! / n
    my += y[i]! / n
    mb += Math.max(0, x[i]! - c) / n
  }
  let xx = 0
  let bb = 0
  let xb = 0
  let xy = 0
  let by = 0
  for (let i = 0; i < n; i++) {
    const u = x[i]! - mx
    const v = Math.max(0, x[i]! - c) - mb
    const w = y[i]! - my
    xx += u * u
    bb += v * v
    xb += u * v
    xy += u * w
    by += v * w
  }
  const det = xx * bb - xb * xb
  if (!(det > 1e-12 * xx * bb)) return null
  const before = (xy * bb - by * xb) / det
  const bend = (by * xx - xy * xb) / det
  let rss = 0
  for (let i = 0; i < n; i++) {
    rss += (y[i]! - my - before * (x[i]! - mx) - bend * (Math.max(0, x[i]! - c) - mb)) ** 2
  }
  return { rss, before, after: before + bend }
}

/** Student's quantile from the normal one, Abramowitz and Stegun 26.7.5 (four terms): within 1e-4 for 8 degrees of freedom or more. */
function studentQuantile(p: number, freedom: number): number {
  const z = normalQuantile(p)
  const z2 = z * z
  const g1 = (z * (z2 + 1)) / 4
  const g2 = (z * ((5 * z2 + 16) * z2 + 3)) / 96
  const g3 = (z * (((3 * z2 + 19) * z2 + 17) * z2 - 15)) / 384
  const g4 = (z * ((((79 * z2 + 776) * z2 + 1482) * z2 - 1920) * z2 - 945)) / 92160
  return z + (g1 + (g2 + (g3 + g4 / freedom) / freedom) / freedom) / freedom
}
