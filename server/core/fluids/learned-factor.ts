/**
 * A clean level learnt on one segment: ln(ΔP seen/ΔP computed) with its standard deviation, and the viscosity exponent of its ΔP
 * there.
 */
export interface LearnedLevel {
  readonly lnLevel: number
  readonly sd: number
  readonly viscExponent: number
}

export interface ViscosityFactor {
  /** Real viscosity over the solvent's. */
  readonly factor: number
  readonly low: number
  readonly high: number
  readonly level: number
  readonly segments: number
}

/** A bore is known to about 2.5 %, a coil and its fittings to some more: 15 % of ΔP, each segment on its own. Common practice. */
const GEOMETRY_SD = 0.15
/** ln(real over solvent viscosity) before anything is seen: 1 M of a solute adds 10 to 40 %. Common practice. */
const PRIOR_SD = 0.3
const Z90 = 1.6449

/**
 * How much thicker a stream is than its solvent, from the clean levels of the segments it flows through. Each says
 *   lnLevel_i = k_i ln φ + (geometry of its own, sd 0.15) + (noise, sd_i),   ln φ ~ N(0, 0.3²)
 * and ln φ is their weighted mean (Gaussian posterior); low and high hold 90 %. With one segment bore and viscosity cannot be
 * told apart, and the interval says so (about ± 25 %); with many it narrows. Without a segment it is 1 with the prior's
 * interval. Errors: none.
 */
export function viscosityFactor(levels: readonly LearnedLevel[]): ViscosityFactor {
  let precision = 1 / PRIOR_SD ** 2
  let weighted = 0
  for (const l of levels) {
    const w = 1 / (GEOMETRY_SD ** 2 + l.sd ** 2)
    precision += w * l.viscExponent ** 2
    weighted += w * l.viscExponent * l.lnLevel
  }
  const mean = weighted / precision
  const sd = 1 / Math.sqrt(precision)
  return {
    factor: Math.exp(mean),
    low: Math.exp(mean - Z90 * sd),
    high: Math.exp(mean + Z90 * sd),
    level: 0.9,
    segments: levels.length,
  }
}
