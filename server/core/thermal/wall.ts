import { MonitorError } from '../errors.ts'

export interface WallInput {
  readonly innerDiameterM: number
  readonly outerDiameterM: number
  readonly wallConductivityWMK: number
  readonly innerFilmWM2K: number
  readonly outerFilmWM2K: number
  /** Resistance of a deposit on the inner wall, m² K/W of inner area. */
  readonly foulingM2KW: number
}

export interface Overall {
  readonly uInnerWM2K: number
  readonly uOuterWM2K: number
  readonly uaPerMWMK: number
  /** Shares of the whole resistance; the rest is the deposit. */
  readonly innerShare: number
  readonly wallShare: number
  readonly outerShare: number
}

/**
 * Overall heat-transfer coefficient of a round tube, resistances in series per metre of length:
 *   1/(U A') = 1/(h_i π d_i) + R_f/(π d_i) + ln(d_o/d_i)/(2 π k_w) + 1/(h_o π d_o)   [m K/W]
 * d bore and outside diameter [m], h films [W/(m² K)], k_w wall [W/(m K)], R_f deposit [m² K/W]; U on inner and outer area.
 * Exact for one-dimensional conduction. Source: Incropera & DeWitt, sec. 3.3 and 11.2.
 * Errors: THERMAL_RANGE unless every coefficient is > 0, d_o ≥ d_i > 0 and R_f ≥ 0.
 */
export function overallU(w: WallInput): Overall {
  const { innerDiameterM: di, outerDiameterM: dO } = w
  if (!(di > 0 && dO >= di && w.wallConductivityWMK > 0 && w.innerFilmWM2K > 0 && w.outerFilmWM2K > 0 && w.foulingM2KW >= 0)) {
    throw new MonitorError('THERMAL_RANGE', 'overall coefficient needs positive films, wall conductivity and d_o ≥ d_i > 0')
  }
  const inner = 1 / (w.innerFilmWM2K * Math.PI * di)
  const wall = Math.log(dO / di) / (2 * Math.PI * w.wallConductivityWMK)
  const outer = 1 / (w.outerFilmWM2K * Math.PI * dO)
  const total = inner + w.foulingM2KW / (Math.PI * di) + wall + outer
  return {
    uInnerWM2K: 1 / (total * Math.PI * di),
    uOuterWM2K: 1 / (total * Math.PI * dO),
    uaPerMWMK: 1 / total,
    innerShare: inner / total,
    wallShare: wall / total,
    outerShare: outer / total,
  }
}

/**
 * Fouling resistance R_f = 1/U − 1/U0 [m² K/W], U now, U0 clean, both [W/(m² K)] on the same area. A slightly negative value is noise
 * and is given as it is. Source: TEMA practice. Errors: THERMAL_RANGE unless both are > 0.
 */
export function foulingResistance(uWM2K: number, cleanWM2K: number): number {
  if (!(uWM2K > 0 && cleanWM2K > 0))
    throw new MonitorError('THERMAL_RANGE', `fouling resistance needs U > 0, got ${uWM2K} and ${cleanWM2K}`)
  return 1 / uWM2K - 1 / cleanWM2K
}
