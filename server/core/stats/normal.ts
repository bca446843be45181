/**
 * Standard normal distribution function Φ(x), relative error below 1e-13 in both tails.
 * Series down to −3 (Marsaglia, J. Stat. Software 11(4), 2004), continued fraction of the Mills ratio beyond (Abramowitz and
 * Stegun 26.2.14).
 */
export function normalCdf(x: number): number {
  if (Number.isNaN(x)) return Number.NaN
  if (x > 0) return 1 - normalCdf(-x)
  if (x < -38) return 0
  const density = Math.exp(-0.5 * x * x) * 0.3989422804014327
  if (x < -3) {
    let fraction = -x
    for (let n = 120; n >= 1; n--) fraction = -x + n / fraction
    return density / fraction
  }
  let term = -x
  let sum = term
  for (let n = 3; Math.abs(term) > 1e-17 * Math.abs(sum) && n < 400; n += 2) {
    term *= (x * x) / n
    sum += term
  }
  return 0.5 - density * sum
}

/**
 * Standard normal quantile, 0 < p < 1 (±Infinity at 0 and 1). Acklam's rational start (relative error 1.2e-9, common practice),
 * then one Halley step against normalCdf: full double precision.
 */
export function normalQuantile(p: number): number {
  if (!(p > 0)) return p === 0 ? -Infinity : Number.NaN
  if (!(p < 1)) return p === 1 ? Infinity : Number.NaN
  if (p > 0.5) return -normalQuantile(1 - p)
  const x = start(p)
  const e = (normalCdf(x) - p) * 2.5066282746310002 * Math.exp(0.5 * x * x)
  return x - e / (1 + 0.5 * x * e)
}

/** Acklam's approximation for p ≤ 0.5 (coefficients from memory; the Halley step checks them). */
function start(p: number): number {
  if (p < 0.02425) {
    const q = Math.sqrt(-2 * Math.log(p))
    return (
      (((((-7.784894002430293e-3 * q - 0.3223964580411365) * q - 2.400758277161838) * q - 2.549732539343734) * q +
        4.374664141464968) *
        q +
        2.938163982698783) /
      ((((7.784695709041462e-3 * q + 0.3224671290700398) * q + 2.445134137142996) * q + 3.754408661907416) * q + 1)
    )
  }
  const q = p - 0.5
  const r = q * q
  return (
    ((((((-39.69683028665376 * r + 220.9460984245205) * r - 275.9285104469687) * r + 138.357751867269) * r - 30.66479806614716) *
      r +
      2.506628277459239) *
      q) /
    (((((-54.47609879822406 * r + 161.5858368580409) * r - 155.6989798598866) * r + 66.80131188771972) * r - 13.28068155288572) *
      r +
      1)
  )
}
