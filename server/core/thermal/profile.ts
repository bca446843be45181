import { MonitorError } from '../errors.ts'
import { integrate, type OdeOptions } from './ode.ts'

export interface TubeHeat {
  readonly lengthM: number
  /** Over all branches. */
  readonly massFlowKgS: number
  readonly cpJKgK: number
  /** U times wetted perimeter, all branches together, W/(m K). */
  readonly uaPerMWMK: number
  readonly inletK: number
  readonly coolantK: number
  /** Residence time, s. */
  readonly residenceS: number
  readonly adiabaticRiseK: number
  /** First-order rate constant at the inlet temperature, 1/s. */
  readonly rateAtInletS: number
  /** Activation energy, J/mol; 0 for a rate that temperature does not touch. */
  readonly activationJMol: number
}

export interface ProfilePoint {
  readonly zM: number
  readonly tempK: number
  readonly conversion: number
}

const gasConstant = 8.314462618

/**
 * Temperature and conversion along a cooled plug-flow tube with one first-order reaction, properties constant:
 *   dX/dz = (τ/L) k (1 − X),   k = k_in exp(−E/R (1/T − 1/T_in)),
 *   dT/dz = ΔT_ad dX/dz − (U P / (m cp)) (T − T_c)
 * z [m], τ [s], L [m], k [1/s], E [J/mol], T [K], U P [W/(m K)], m [kg/s], cp [J/(kg K)]. Axial conduction left out.
 * Source: O. Levenspiel, Chemical Reaction Engineering, ch. 9 (non-isothermal plug flow).
 * Errors: THERMAL_RANGE unless length, flow, heat capacity and residence time are > 0; from the integrator if it runs away.
 */
export function plugFlowProfile(tube: TubeHeat, options: OdeOptions = {}): ProfilePoint[] {
  const { lengthM, massFlowKgS, cpJKgK, inletK, residenceS } = tube
  if (!(lengthM > 0 && massFlowKgS > 0 && cpJKgK > 0 && residenceS > 0))
    throw new MonitorError('THERMAL_RANGE', 'a profile needs length, flow, heat capacity and residence time > 0')
  const perM = tube.uaPerMWMK / (massFlowKgS * cpJKgK)
  const slope = (_z: number, [temp = inletK, x = 0]: readonly number[]): number[] => {
    const k = tube.rateAtInletS * Math.exp((-tube.activationJMol / gasConstant) * (1 / temp - 1 / inletK))
    const dx = (residenceS / lengthM) * k * (1 - x)
    return [tube.adiabaticRiseK * dx - perM * (temp - tube.coolantK), dx]
  }
  return integrate(slope, 0, [inletK, 0], lengthM, { maxStep: lengthM / 40, ...options }).map(
    ({ x, y: [tempK = inletK, conversion = 0] }) => ({ zM: x, tempK, conversion }),
  )
}

/** The hottest point of a profile. Errors: THERMAL_RANGE for an empty one. */
export function hotSpot(profile: readonly ProfilePoint[]): ProfilePoint {
  const [first, ...rest] = profile
  if (first === undefined) throw new MonitorError('THERMAL_RANGE', 'an empty profile has no hot spot')
  return rest.reduce((best, p) => (p.tempK > best.tempK ? p : best), first)
}
