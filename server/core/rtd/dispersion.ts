import { lnNormalTail } from './special.ts'

/**
 * What has not yet left at θ volumes, 1 − F(θ), in an axially dispersed vessel; q = √(Pe/(2θ)), Pe = uL/D [-]:
 *   open-open (Levenspiel; probes inside an endless tube)    Φ(−q(θ−1)) + e^Pe Φ(−q(θ+1)),   mean 1 + 2/Pe
 *   flux-flux (inverse Gaussian; cups at both ends)           Φ(−q(θ−1)) − e^Pe Φ(−q(θ+1)),   mean 1
 * Source: O. Levenspiel, Chemical Reaction Engineering, ch. 13; A. Kreft, A. Zuber, Chem. Eng. Sci. 33 (1978) 1471.
 */
export function residualOpen(pe: number, theta: number, ends: 'open' | 'flux'): number {
  if (theta <= 0) return 1
  const q = Math.sqrt(pe / (2 * theta))
  const direct = Math.exp(lnNormalTail(q * (theta - 1)))
  const reflected = Math.exp(pe + lnNormalTail(q * (theta + 1)))
  return Math.min(1, Math.max(0, ends === 'open' ? direct + reflected : direct - reflected))
}

/** Real part of (1 − g(s))/s, g the closed vessel's transform, at s = re + i·im. */
function transformOfResidual(pe: number, re: number, im: number): number {
  // a = √(1 + 4 s/Pe)
  const u = 1 + (4 * re) / pe
  const v = (4 * im) / pe
  const m = Math.hypot(u, v)
  const ar = Math.sqrt((m + u) / 2)
  const ai = Math.sign(v) * Math.sqrt(Math.max(0, (m - u) / 2))
  const cexp = (r: number, i: number): readonly [number, number] => [Math.exp(r) * Math.cos(i), Math.exp(r) * Math.sin(i)]
  const [er, ei] = cexp((pe / 2) * (1 - ar), (-pe / 2) * ai)
  const numR = 4 * (ar * er - ai * ei)
  const numI = 4 * (ar * ei + ai * er)
  const [fr, fi] = cexp(-pe * ar, -pe * ai)
  const pr = (1 + ar) ** 2 - ai * ai
  const pi = 2 * (1 + ar) * ai
  const mr = (1 - ar) ** 2 - ai * ai
  const mi = -2 * (1 - ar) * ai
  const denR = pr - (mr * fr - mi * fi)
  const denI = pi - (mr * fi + mi * fr)
  const den = denR * denR + denI * denI
  const restR = 1 - (numR * denR + numI * denI) / den
  const restI = -(numI * denR - numR * denI) / den
  return (restR * re + restI * im) / (re * re + im * im)
}

const contour = 25
const binomial = [1, 11, 55, 165, 330, 462, 462, 330, 165, 55, 11, 1]

/**
 * 1 − F(θ) of a vessel closed to dispersion at both ends (Danckwerts), Pe = uL/D [-], mean 1.
 *   transform of E:  4a e^(Pe/2) / ((1+a)² e^(aPe/2) − (1−a)² e^(−aPe/2)),  a = √(1 + 4s/Pe)
 * inverted by a Fourier series on Re s = 12.5/θ with the last twelve partial sums averaged (error below 1e-10 absolute).
 * Source: P. V. Danckwerts, Chem. Eng. Sci. 2 (1953) 1; inversion: J. Abate, W. Whitt, ORSA J. Computing 7 (1995) 36.
 */
export function residualClosed(pe: number, theta: number): number {
  if (theta <= 0) return 1
  // past this frequency the transform of E is under e^-10 of its start and the summands only alternate
  const grow = 1 + 20 / pe
  const omega = (pe / 4) * Math.sqrt(Math.max(0, (2 * grow * grow - 1) ** 2 - 1))
  const plain = Math.min(20_000, Math.ceil((omega * theta) / Math.PI) + 15)
  const re = contour / (2 * theta)
  const scale = Math.exp(contour / 2) / theta
  let sum = (scale / 2) * transformOfResidual(pe, re, 0)
  let mean = 0
  for (let k = 1; k <= plain + 11; k++) {
    sum += (k % 2 === 0 ? scale : -scale) * transformOfResidual(pe, re, (k * Math.PI) / theta)
    if (k >= plain) mean += ((binomial[k - plain] ?? 0) / 2048) * sum
  }
  return Math.min(1, Math.max(0, mean))
}

/** Variance of a closed vessel's θ, 2/Pe − 2(1 − e^−Pe)/Pe² [-]. Source: Levenspiel, ch. 13. */
export const varianceClosed = (pe: number): number => (pe < 1e-3 ? 1 - pe / 3 : 2 / pe - (2 * -Math.expm1(-pe)) / (pe * pe))

/**
 * Dispersion of a laminar tube, D_eff = D_m + a²u²/(48 D_m) [m²/s], and Pe = uL/D_eff; a radius [m], u mean velocity [m/s], D_m molecular
 * diffusivity [m²/s]. `settled` is the validity: t > 0.8 a²/D_m (V. Ananthakrishnan et al., AIChE J. 11 (1965) 1063).
 * Source: R. Aris, Proc. R. Soc. A 235 (1956) 67.
 */
export function taylorAris(
  radiusM: number,
  velocityMS: number,
  lengthM: number,
  diffusivityM2S: number,
): { readonly dispersionM2S: number; readonly pe: number; readonly settled: boolean } {
  const dispersionM2S = diffusivityM2S + (radiusM * velocityMS) ** 2 / (48 * diffusivityM2S)
  return {
    dispersionM2S,
    pe: (velocityMS * lengthM) / dispersionM2S,
    settled: lengthM / velocityMS > (0.8 * radiusM * radiusM) / diffusivityM2S,
  }
}

/** Pe = uL/D of a turbulent straight tube, D = 10.1 a u √(f/8), f Darcy friction factor [-]. Source: G. I. Taylor, Proc. R. Soc. A 223 (1954) 446. */
export const turbulentPe = (lengthOverDiameter: number, f: number): number => lengthOverDiameter / (5.05 * Math.sqrt(f / 8))
