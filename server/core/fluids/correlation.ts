/** One property against temperature with the range its source gives. */
export interface Correlation {
  readonly lowK: number
  readonly highK: number
  readonly at: (tempK: number) => number
}

/**
 * Perry's viscosity, μ = exp(C1 + C2/T + C3 ln T + C4 T^C5) [Pa s], T [K]. Perry's Chemical Engineers' Handbook, 8th ed., table
 * 2-313.
 */
export function perryViscosity(
  c1: number,
  c2: number,
  c3: number,
  c4: number,
  c5: number,
  lowK: number,
  highK: number,
): Correlation {
  return { lowK, highK, at: (t) => Math.exp(c1 + c2 / t + c3 * Math.log(t) + (c4 === 0 ? 0 : c4 * t ** c5)) }
}

/**
 * Saturated-liquid density, ρ = M C1/C2^(1+(1-T/C3)^C4) [kg/m3] with M [kg/mol], C1 [mol/m3], C3 the critical temperature [K].
 * The last 20 K below it are left out of the range: the curve is vertical there. Perry, 8th ed., table 2-32.
 */
export function perryDensity(
  molarKgMol: number,
  c1: number,
  c2: number,
  c3: number,
  c4: number,
  lowK: number,
  highK: number,
): Correlation {
  return { lowK, highK: Math.min(highK, c3 - 20), at: (t) => (molarKgMol * c1) / c2 ** (1 + (1 - t / c3) ** c4) }
}

/** Liquid heat capacity, A + BT + CT² + DT³ + ET⁴ [J/(kmol K)] over M: cp [J/(kg K)]. Perry, 8th ed., table 2-153, form 1. */
export function perryHeatCapacity(
  molarKgMol: number,
  a: number,
  b: number,
  c: number,
  d: number,
  e: number,
  lowK: number,
  highK: number,
): Correlation {
  return { lowK, highK, at: (t) => (a + t * (b + t * (c + t * (d + t * e)))) / (molarKgMol * 1000) }
}

/**
 * Liquid heat capacity, A²/t + B - 2ACt - ADt² - C²t³/3 - CDt⁴/2 - D²t⁵/5 [J/(kmol K)], t = 1 - T/Tc, over M: cp [J/(kg K)].
 * Perry, 8th ed., table 2-153, form 2.
 */
export function perryHeatCapacityReduced(
  molarKgMol: number,
  criticalK: number,
  [a, b, c, d]: readonly [number, number, number, number],
  lowK: number,
  highK: number,
): Correlation {
  return {
    lowK,
    highK,
    at(tempK) {
      const t = 1 - tempK / criticalK
      const molar =
        (a * a) / t + b - 2 * a * c * t - a * d * t ** 2 - (c * c * t ** 3) / 3 - (c * d * t ** 4) / 2 - (d * d * t ** 5) / 5
      return molar / (molarKgMol * 1000)
    },
  }
}

/** λ = C1 + C2 T + C3 T² + C4 T³ [W/(m K)]. Perry, 8th ed., table 2-315. */
export function perryConductivity(c1: number, c2: number, c3: number, c4: number, lowK: number, highK: number): Correlation {
  return { lowK, highK, at: (t) => c1 + t * (c2 + t * (c3 + t * c4)) }
}

/**
 * Andrade through one point: μ = μ0 exp(B (1/T - 1/T0)) [Pa s]. For liquids without an open correlation; B of light organic
 * liquids is 700 to 1000 K.
 */
export function andrade(visc0PaS: number, temp0K: number, bK: number, lowK: number, highK: number): Correlation {
  return { lowK, highK, at: (t) => visc0PaS * Math.exp(bK * (1 / t - 1 / temp0K)) }
}

/** Straight line through one point, y = y0 + slope (T - T0). */
export function line(y0: number, temp0K: number, slopePerK: number, lowK: number, highK: number): Correlation {
  return { lowK, highK, at: (t) => y0 + slopePerK * (t - temp0K) }
}

export const isInside = (c: Correlation, tempK: number): boolean => tempK >= c.lowK && tempK <= c.highK

/**
 * The correlation, and beyond its range the value that goes on from the edge: `arrhenius` keeps the edge's slope of ln y over
 * 1/T (viscosity), `linear` the edge's slope (density), `hold` the edge's value (heat capacity, conductivity). Polynomials and
 * powers of T run wild outside their range; these do not.
 */
export function extended(c: Correlation, tempK: number, how: 'arrhenius' | 'linear' | 'hold'): number {
  if (isInside(c, tempK)) return c.at(tempK)
  const edgeK = tempK < c.lowK ? c.lowK : c.highK
  const y = c.at(edgeK)
  if (how === 'hold') return y
  const stepK = tempK < c.lowK ? Math.min(0.01, c.highK - c.lowK) : -Math.min(0.01, c.highK - c.lowK)
  if (stepK === 0) return y
  const inner = c.at(edgeK + stepK)
  if (how === 'linear') return y + ((inner - y) / stepK) * (tempK - edgeK)
  const slope = Math.log(inner / y) / (1 / (edgeK + stepK) - 1 / edgeK)
  return y * Math.exp(slope * (1 / tempK - 1 / edgeK))
}
