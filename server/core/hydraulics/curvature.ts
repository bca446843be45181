import { darcyFriction } from './friction.ts'

/** De = Re √(d/D) [-], d bore and D coil diameter (centre line to centre line). W. R. Dean, Phil. Mag. 5 (1928) 673. */
export const deanNumber = (re: number, diameterM: number, coilDiameterM: number): number =>
  re * Math.sqrt(diameterM / coilDiameterM)

/**
 * Re at which the flow in a coil turns turbulent, 2300 [1 + 8.6 (d/D)^0.45]; 2300 for a straight tube. E. F. Schmidt, Chem. Ing.
 * Tech. 39 (1967) 781.
 */
export const coilCriticalReynolds = (diameterM: number, coilDiameterM: number): number =>
  2300 * (1 + 8.6 * (diameterM / coilDiameterM) ** 0.45)

/**
 * Laminar friction in a coil over that in a straight tube [-]: 1/(1 - [1 - (11.6/De)^0.45]^(1/0.45)), 1 below De 11.6 (the last
 * exponent is often printed 2.2, up to 0.9 % higher). De up to 2000; other published curves lie up to 48 % above it near the
 * critical Re.
 * Source: C. M. White, Proc. R. Soc. Lond. A 123 (1929) 645.
 */
export function whiteCoilRatio(de: number): number {
  return de <= 11.6 ? 1 : 1 / (1 - (1 - (11.6 / de) ** 0.45) ** (1 / 0.45))
}

/**
 * Turbulent friction in a coil over that in a straight tube [-]: 1 + 28800 (d/D)^0.62/Re below Re 22000, 1 + 0.0823 (1 + d/D)
 * (d/D)^0.53 Re^0.25 from there to 1.5e5 (the two meet within 10 %; a weight in ln Re over 20000 to 24200 joins them). Source:
 * E. F. Schmidt 1967, as above.
 */
export function schmidtCoilRatio(re: number, diameterM: number, coilDiameterM: number): number {
  const c = diameterM / coilDiameterM
  const low = 1 + (28800 * c ** 0.62) / re
  const high = 1 + 0.0823 * (1 + c) * c ** 0.53 * re ** 0.25
  return low + (high - low) * blend(re, 20000, 24200)
}

/**
 * The transition of a coil is spread over the critical Re to this many times it, so that ΔP stays continuous; there it is
 * uncertain.
 */
export const COIL_TRANSITION = 1.25

/**
 * Darcy friction factor of a coil over all regimes: 64/Re times White's ratio up to the critical Re, Churchill's straight
 * friction times Schmidt's ratio from 1.25 times that, weighted over ln Re in between. Published only for the two ends. re > 0;
 * relRoughness 0 to 0.05 (roughness acts in the turbulent part alone); d/D up to 0.2. Errors: none.
 */
export function coilFrictionFactor(re: number, relRoughness: number, diameterM: number, coilDiameterM: number): number {
  const critical = coilCriticalReynolds(diameterM, coilDiameterM)
  const w = blend(re, critical, COIL_TRANSITION * critical)
  const laminar = w === 1 ? 0 : (64 / re) * whiteCoilRatio(deanNumber(re, diameterM, coilDiameterM))
  if (w === 0) return laminar
  return (1 - w) * laminar + w * darcyFriction(re, relRoughness) * schmidtCoilRatio(re, diameterM, coilDiameterM)
}

/** 0 at or below `from`, 1 at or above `to`, a smooth step over ln re between. */
function blend(re: number, from: number, to: number): number {
  if (re <= from) return 0
  if (re >= to) return 1
  const u = Math.log(re / from) / Math.log(to / from)
  return u * u * (3 - 2 * u)
}
