/** Means of one flow level: ΔP without head and zero [Pa], volume flow [m3/s], density [kg/m3], viscosity [Pa s], sd of ln ΔP. */
export interface LevelMean {
  readonly dpPa: number
  readonly flowM3S: number
  readonly rhoKgM3: number
  readonly viscPaS: number
  readonly sd: number
}

export interface LineFit {
  readonly slope: number
  readonly sd: number
  /** Largest distance of a level from the line, in y. */
  readonly residual: number
}

/**
 * Weighted line y = c + slope·x through levels. The sd is that of the levels' own sds, times √(χ²/(L − 2)) where they scatter more (R. T. Birge, Phys.
 * Rev. 40 (1932) 207), and beside it what a zero error of sd `zeroPa` would tilt: y_i moves by −δ/ΔP_i together. Null below two x.
 */
export function fitLine(x: readonly number[], y: readonly number[], levels: readonly LevelMean[], zeroPa: number): LineFit | null {
  const w = levels.map((l) => 1 / l.sd ** 2)
  const total = w.reduce((a, b) => a + b, 0)
  const mean = (v: readonly number[]) => v.reduce((a, b, i) => a + w[i]! * b, 0) / total
  const [mx, my] = [mean(x), mean(y)]
  const xx = x.reduce((a, b, i) => a + w[i]! * (b - mx) ** 2, 0)
  if (!(xx > 0) || levels.length < 2) return null
  const slopeOf = (v: readonly number[]) => x.reduce((a, b, i) => a + w[i]! * (b - mx) * v[i]!, 0) / xx
  const slope = slopeOf(y)
  const off = y.map((v, i) => v - my - slope * (x[i]! - mx))
  const chi2 = off.reduce((a, b, i) => a + w[i]! * b * b, 0)
  const spread = levels.length > 2 ? Math.max(1, Math.sqrt(chi2 / (levels.length - 2))) : 1
  const tilt = slopeOf(levels.map((l) => -1 / l.dpPa)) * zeroPa
  return { slope, sd: Math.hypot(spread / Math.sqrt(xx), tilt), residual: Math.max(...off.map(Math.abs)) }
}

/**
 * Exponent of flow of a clean segment: ΔP ∝ Q^n μ^(2−n) ρ^(n−1), which is a line of slope n in
 *   ln(ΔP ρ/μ²) = c + n ln(Q ρ/μ)
 * so that levels at somewhat different temperatures may be compared. n between 1 (laminar) and 2 (fittings). Source: dimensional analysis.
 */
export const fitExponent = (levels: readonly LevelMean[], zeroPa: number): LineFit | null =>
  fitLine(
    levels.map((l) => Math.log((l.flowM3S * l.rhoKgM3) / l.viscPaS)),
    levels.map((l) => Math.log((l.dpPa * l.rhoKgM3) / l.viscPaS ** 2)),
    levels,
    zeroPa,
  )

/** ΔP = a μ Q + b ρ Q²; a [1/m3], b [1/m4], neither below 0; residual as a share of ΔP; share of the first term at the middle level. */
export interface TwoTermFit {
  readonly a: number
  readonly b: number
  readonly residual: number
  readonly linearShare: number
}

/** Least squares of the relative errors, weighted; a term that comes out negative is 0 and the other fitted alone. Null below two levels. */
export function fitTwoTerms(levels: readonly LevelMean[]): TwoTermFit | null {
  if (levels.length < 2) return null
  const u = levels.map((l) => (l.viscPaS * l.flowM3S) / l.dpPa)
  const v = levels.map((l) => (l.rhoKgM3 * l.flowM3S ** 2) / l.dpPa)
  const w = levels.map((l) => 1 / l.sd ** 2)
  const sum = (f: (i: number) => number) => levels.reduce((s, _, i) => s + w[i]! * f(i), 0)
  const [uu, vv, uv] = [sum((i) => u[i]! ** 2), sum((i) => v[i]! ** 2), sum((i) => u[i]! * v[i]!)]
  const [su, sv] = [sum((i) => u[i]!), sum((i) => v[i]!)]
  const det = uu * vv - uv * uv
  if (!(det > 1e-9 * uu * vv)) return null
  let [a, b] = [(su * vv - sv * uv) / det, (sv * uu - su * uv) / det]
  if (a < 0) [a, b] = [0, sv / vv]
  else if (b < 0) [a, b] = [su / uu, 0]
  const middle = [...levels].sort((p, q) => p.flowM3S - q.flowM3S)[levels.length >> 1]!
  return {
    a,
    b,
    residual: Math.max(...levels.map((_, i) => Math.abs(a * u[i]! + b * v[i]! - 1))),
    linearShare:
      (a * middle.viscPaS * middle.flowM3S) / (a * middle.viscPaS * middle.flowM3S + b * middle.rhoKgM3 * middle.flowM3S ** 2),
  }
}
