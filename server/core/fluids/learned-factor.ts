/**
 * A clean level learnt on one segment: ln(ΔP seen/ΔP computed from the solvents) with its standard deviation, and how it answers to
 * each stream's viscosity, k·w (viscosity exponent of its ΔP times the stream's mass fraction there).
 */
export interface LearnedLevel {
  readonly lnLevel: number
  readonly sd: number
  readonly exponents: readonly number[]
}

export interface ViscosityFactor {
  /** Real viscosity over the solvent's. */
  readonly factor: number
  readonly low: number
  readonly high: number
  readonly level: number
  /** How many segments' levels it rests on. */
  readonly segments: number
}

/** A bore is known to about 2.5 %, a coil and its fittings to some more: 15 % of ΔP, each segment on its own. Common practice. */
const GEOMETRY_SD = 0.15
/** ln(real over solvent viscosity) before anything is seen: 1 M of a solute adds 10 to 40 %. Common practice. */
const PRIOR_SD = 0.3
const Z90 = 1.6449

/**
 * How much thicker each stream is than its solvent, from the clean levels of all segments together. A level says
 *   lnLevel_s = k_s Σ_i w_si ln φ_i + (geometry of its own, sd 0.15) + (noise, sd_s),   ln φ_i ~ N(0, 0.3²)
 * since ln μ of a mixture is the mass-weighted mean of its parts'. Gaussian posterior, P = 1/0.3² + Σ_s e e'/(0.15² + sd²), e = k w; low and
 * high hold 90 %. With one segment bore and viscosity cannot be told apart, and the interval says so (about ± 25 %); with many it
 * narrows. Without a segment a factor is 1 with the prior's interval. Errors: none.
 */
export function viscosityFactors(levels: readonly LearnedLevel[], streams: number): ViscosityFactor[] {
  const precision = Array.from({ length: streams }, (_, i) =>
    Array.from({ length: streams }, (_, j) => (i === j ? 1 / PRIOR_SD ** 2 : 0)),
  )
  const pull = new Array<number>(streams).fill(0)
  for (const l of levels) {
    const w = 1 / (GEOMETRY_SD ** 2 + l.sd ** 2)
    for (let i = 0; i < streams; i++) {
      const e = l.exponents[i] ?? 0
      pull[i]! += w * e * l.lnLevel
      for (let j = 0; j < streams; j++) precision[i]![j]! += w * e * (l.exponents[j] ?? 0)
    }
  }
  const covariance = inverse(precision)
  return covariance.map((row, i): ViscosityFactor => {
    const mean = row.reduce((sum, c, j) => sum + c * pull[j]!, 0)
    const sd = Math.sqrt(row[i]!)
    return {
      factor: Math.exp(mean),
      low: Math.exp(mean - Z90 * sd),
      high: Math.exp(mean + Z90 * sd),
      level: 0.9,
      segments: levels.filter((l) => (l.exponents[i] ?? 0) > 0).length,
    }
  })
}

/** Inverse of a positive definite matrix by Gauss and Jordan; no pivoting is needed for one. */
function inverse(m: readonly (readonly number[])[]): number[][] {
  const n = m.length
  const a = m.map((row, i) => [...row, ...row.map((_, j) => (i === j ? 1 : 0))])
  for (let c = 0; c < n; c++) {
    const pivot = a[c]![c]!
    for (let j = 0; j < 2 * n; j++) a[c]![j]! /= pivot
    for (let r = 0; r < n; r++) {
      if (r === c) continue
      const f = a[r]![c]!
      for (let j = 0; j < 2 * n; j++) a[r]![j]! -= f * a[c]![j]!
    }
  }
  return a.map((row) => row.slice(n))
}
