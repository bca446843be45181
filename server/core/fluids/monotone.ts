/**
 * Monotone cubic interpolation through (x_i, y_i), x rising: between rising data it rises, and it makes no hump of its own.
 * Slopes: weighted harmonic mean of neighbouring secants (zero at a local extremum), three-point at the ends, limited. Outside
 * the data it goes on straight with the end slope.
 * Source: F. N. Fritsch and R. E. Carlson, SIAM J. Numer. Anal. 17 (1980) 238; slopes after Fritsch and Butland, SIAM J. Sci.
 * Stat. Comput. 5 (1984) 300. One point gives a constant. Errors: none; the caller sorts and checks.
 */
export function monotoneCubic(x: readonly number[], y: readonly number[]): (at: number) => number {
  const n = x.length
  if (n === 1) return () => y[0]!
  const h = Array.from({ length: n - 1 }, (_, i) => x[i + 1]! - x[i]!)
  const s = h.map((w, i) => (y[i + 1]! - y[i]!) / w)
  const d = y.map((_, i) => {
    if (i === 0) return endSlope(h[0]!, h[1] ?? h[0]!, s[0]!, s[1] ?? s[0]!)
    if (i === n - 1) return endSlope(h[n - 2]!, h[n - 3] ?? h[n - 2]!, s[n - 2]!, s[n - 3] ?? s[n - 2]!)
    const before = s[i - 1]!
    const after = s[i]!
    if (before * after <= 0) return 0
    const w1 = 2 * h[i]! + h[i - 1]!
    const w2 = h[i]! + 2 * h[i - 1]!
    return (w1 + w2) / (w1 / before + w2 / after)
  })
  return (at) => {
    if (at <= x[0]!) return y[0]! + d[0]! * (at - x[0]!)
    if (at >= x[n - 1]!) return y[n - 1]! + d[n - 1]! * (at - x[n - 1]!)
    let low = 0
    let high = n - 1
    while (high - low > 1) {
      const mid = (low + high) >> 1
      if (x[mid]! <= at) low = mid
      else high = mid
    }
    return hermite((at - x[low]!) / h[low]!, h[low]!, y[low]!, y[low + 1]!, d[low]!, d[low + 1]!)
  }
}

function endSlope(h0: number, h1: number, s0: number, s1: number): number {
  const d = ((2 * h0 + h1) * s0 - h0 * s1) / (h0 + h1)
  if (d * s0 <= 0) return 0
  return s0 * s1 <= 0 && Math.abs(d) > 3 * Math.abs(s0) ? 3 * s0 : d
}

/** Cubic Hermite at u in 0..1 of an interval of width h with end values and end slopes. */
export function hermite(u: number, h: number, y0: number, y1: number, d0: number, d1: number): number {
  const v = 1 - u
  return v * v * (y0 * (1 + 2 * u) + u * h * d0) + u * u * (y1 * (3 - 2 * u) - v * h * d1)
}
