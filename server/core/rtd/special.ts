const lanczos = [
  0.99999999999980993, 676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059, 12.507343278686905,
  -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7,
]

/** ln Γ(x) for x > 0, Lanczos (g = 7, n = 9), about 15 digits. Source: W. H. Press et al., Numerical Recipes, 3rd ed., 6.1. */
function lnGamma(x: number): number {
  if (x < 0.5) return Math.log(Math.PI / Math.sin(Math.PI * x)) - lnGamma(1 - x)
  const t = x + 6.5
  const sum = lanczos.reduce((s, c, i) => (i === 0 ? c : s + c / (x - 1 + i)), 0)
  return 0.5 * Math.log(2 * Math.PI) + (x - 0.5) * Math.log(t) - t + Math.log(sum)
}

/** Lower series: ln P(a, x), best for x < a + 1. */
function lnLowerSeries(a: number, x: number): number {
  let term = 1 / a
  let sum = term
  for (let n = 1; n < 10_000 && Math.abs(term) > Math.abs(sum) * 1e-17; n++) {
    term *= x / (a + n)
    sum += term
  }
  return a * Math.log(x) - x - lnGamma(a) + Math.log(sum)
}

/** Upper continued fraction (Lentz): ln Q(a, x), best for x ≥ a + 1. */
function lnUpperFraction(a: number, x: number): number {
  const tiny = 1e-300
  let b = x + 1 - a
  let c = 1 / tiny
  let d = 1 / b
  let h = d
  for (let i = 1; i < 10_000; i++) {
    const an = -i * (i - a)
    b += 2
    d = an * d + b
    if (Math.abs(d) < tiny) d = tiny
    c = b + an / c
    if (Math.abs(c) < tiny) c = tiny
    d = 1 / d
    const step = d * c
    h *= step
    if (Math.abs(step - 1) < 1e-16) break
  }
  return a * Math.log(x) - x - lnGamma(a) + Math.log(h)
}

/**
 * ln Q(a, x), the regularised upper incomplete gamma function, a > 0, x ≥ 0; in logarithms so that far tails keep their digits.
 * Series below x = a + 1, continued fraction above. Source: W. H. Press et al., Numerical Recipes, 3rd ed., 6.2.
 */
export function lnGammaQ(a: number, x: number): number {
  if (x <= 0) return 0
  return x < a + 1 ? Math.log1p(-Math.exp(lnLowerSeries(a, x))) : lnUpperFraction(a, x)
}

/** ln of the standard normal's upper tail 1 − Φ(z), through Q(1/2, z²/2). */
export function lnNormalTail(z: number): number {
  const half = Math.log(0.5)
  if (z >= 0) return half + lnGammaQ(0.5, (z * z) / 2)
  return half + Math.log1p(-Math.expm1(lnGammaQ(0.5, (z * z) / 2)))
}
