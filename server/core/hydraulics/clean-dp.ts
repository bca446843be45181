import type { PropertyTable } from '../fluids/property-table.ts'
import { bendLoss } from './bends.ts'
import type { ChannelGeometry } from './channel.ts'
import { COIL_TRANSITION, coilCriticalReynolds, coilFrictionFactor, deanNumber, whiteCoilRatio } from './curvature.ts'
import { darcyFriction, LAMINAR_TO_ROUNDING } from './friction.ts'

export interface DpOptions {
  /** Loss coefficients besides the channel's bends, K [-] (ΔP = K ρ v²/2): entrance, exit, fittings, a valve. Default 0. */
  readonly lossK?: number
}

export interface CleanDp {
  /** Inlet minus outlet pressure: friction, losses and static head. Follows the sign of the flow but for the head. */
  readonly dpPa: number
  readonly frictionPa: number
  readonly bendPa: number
  readonly staticPa: number
  readonly re: number
  /** Null for a straight channel. */
  readonly de: number | null
  /** Re between laminar and turbulent, or outside what the formulas cover. */
  readonly uncertain: boolean
}

const G = 9.80665
/** Straight tube: laminar below, turbulent above; between them no formula is better than 20 %. */
const STRAIGHT_TRANSITION = [2000, 4000] as const

/**
 * What a clean channel of uniform properties would show.
 *   ΔP = (f L/d + K) ρ v²/2 + ρ g h,  v = ṁ/(n ρ A),  Re = ρ v d/μ
 * massFlowKgS over all n = `parallel` bores; f: Churchill straight, White and Schmidt coiled; K: Hooper's 90-degree bends and
 * `lossK`. g = 9.80665 m/s2. A non-round bore counts with Re·64/(f Re)lam in f (O. C. Jones, J. Fluids Eng. 98 (1976) 173),
 * which is exact when laminar and within 5 % turbulent. Developing flow at the inlet is not counted: it adds about 1.2 ρ v²/2 (K
 * = 1.2, laminar).
 * Errors: none; a flow of 0 gives the head alone. The caller hands in checked, positive rho, mu and geometry.
 */
export function cleanDp(
  channel: ChannelGeometry,
  massFlowKgS: number,
  rhoKgM3: number,
  viscPaS: number,
  options?: DpOptions,
): CleanDp {
  const staticPa = channel.heightM === 0 ? 0 : rhoKgM3 * G * channel.heightM
  const v = massFlowKgS / (channel.parallel * channel.areaM2 * rhoKgM3)
  const speed = Math.abs(v)
  const d = channel.diameterM
  const re = (rhoKgM3 * speed * d) / viscPaS
  const coil = channel.coilDiameterM
  const de = coil === null ? null : deanNumber(re, d, coil)
  const frictionPa = v === 0 ? 0 : frictionGradient(channel, v, rhoKgM3, viscPaS, re) * channel.lengthM
  const bendPa = lossPa(channel, v, rhoKgM3, re, options?.lossK ?? 0)
  return { dpPa: frictionPa + bendPa + staticPa, frictionPa, bendPa, staticPa, re, de, uncertain: isUncertain(channel, re) }
}

/** Bends and single losses, Pa, with the sign of v. */
function lossPa(channel: ChannelGeometry, v: number, rho: number, re: number, lossK: number): number {
  const k = lossK + (channel.bends > 0 && re > 0 ? channel.bends * bendLoss(re, channel.diameterM) : 0)
  return (k * rho * v * Math.abs(v)) / 2
}

/** dp/dx by friction, Pa/m, with the sign of v. Laminar: 32 μ v/d², times the shape and curvature factors. */
function frictionGradient(channel: ChannelGeometry, v: number, rho: number, visc: number, re: number): number {
  const d = channel.diameterM
  const coil = channel.coilDiameterM
  const reRound = re / channel.laminarFactor
  if (coil === null) {
    if (reRound < LAMINAR_TO_ROUNDING) return (32 * visc * v * channel.laminarFactor) / (d * d)
    return (darcyFriction(reRound, channel.roughnessM / d) * rho * v * Math.abs(v)) / (2 * d)
  }
  if (reRound < 2300) return ((32 * visc * v * channel.laminarFactor) / (d * d)) * whiteCoilRatio(deanNumber(reRound, d, coil))
  return (coilFrictionFactor(reRound, channel.roughnessM / d, d, coil) * rho * v * Math.abs(v)) / (2 * d)
}

function isUncertain(channel: ChannelGeometry, re: number): boolean {
  const coil = channel.coilDiameterM
  const reRound = re / channel.laminarFactor
  if (reRound < STRAIGHT_TRANSITION[0]) return false
  if (reRound > 1e8 || channel.roughnessM > 0.05 * channel.diameterM) return true
  if (coil === null) return reRound < STRAIGHT_TRANSITION[1]
  const critical = coilCriticalReynolds(channel.diameterM, coil)
  return reRound > 0.9 * critical && reRound < COIL_TRANSITION * critical
}

/**
 * The same along a temperature profile: temperatures evenly spaced along the flow, inlet first (one: uniform), friction and head
 * trapezoidal over the length, losses likewise. Re and De are the lowest along the path, `uncertain` if any reading's place is.
 * The trapezoid reads high by (ΔT)²/12 times the curvature of μ(T): 1.0 % between two readings 20 K apart in THF at -20 °C, 0.25
 * % with one in between. Never throws: temperatures beyond the fluid's limits are clamped by the table and marked uncertain.
 * Null without a temperature.
 */
export function cleanDpAlong(
  channel: ChannelGeometry,
  massFlowKgS: number,
  tempsK: readonly number[],
  fluid: PropertyTable,
  options?: DpOptions,
): CleanDp | null {
  const n = tempsK.length
  if (n === 0) return null
  const d = channel.diameterM
  const flux = massFlowKgS / (channel.parallel * channel.areaM2)
  const lossK = options?.lossK ?? 0
  let gradient = 0
  let bendPa = 0
  let rhoMean = 0
  let reLow = Number.POSITIVE_INFINITY
  let reHigh = 0
  let uncertain = false
  for (let i = 0; i < n; i++) {
    const tempK = tempsK[i]!
    const w = n === 1 ? 1 : i === 0 || i === n - 1 ? 0.5 / (n - 1) : 1 / (n - 1)
    const rho = fluid.rhoKgM3(tempK)
    const visc = fluid.viscPaS(tempK)
    const v = flux / rho
    const re = (Math.abs(flux) * d) / visc
    rhoMean += w * rho
    if (v !== 0) gradient += w * frictionGradient(channel, v, rho, visc, re)
    if (lossK !== 0 || channel.bends !== 0) bendPa += w * lossPa(channel, v, rho, re, lossK)
    if (re < reLow) reLow = re
    if (re > reHigh) reHigh = re
    uncertain ||= fluid.uncertain(tempK)
  }
  const frictionPa = gradient * channel.lengthM
  const staticPa = channel.heightM === 0 ? 0 : rhoMean * G * channel.heightM
  return {
    dpPa: frictionPa + bendPa + staticPa,
    frictionPa,
    bendPa,
    staticPa,
    re: reLow,
    de: channel.coilDiameterM === null ? null : deanNumber(reLow, d, channel.coilDiameterM),
    uncertain: uncertain || isUncertain(channel, reHigh) || isUncertain(channel, reLow),
  }
}

/**
 * How the clean ΔP without its static head answers to mass flow and viscosity at a working point: n = ∂ln ΔP/∂ln ṁ, k = ∂ln
 * ΔP/∂ln μ. Central differences of 1e-4 in the logarithm (error below 1e-6). Laminar and straight: 1 and 1; k is close to 2 - n
 * where ρ is constant.
 */
export function exponents(
  channel: ChannelGeometry,
  massFlowKgS: number,
  rhoKgM3: number,
  viscPaS: number,
  options?: DpOptions,
): { readonly n: number; readonly k: number } {
  const h = 1e-4
  const ln = (m: number, mu: number): number => {
    const at = cleanDp(channel, m, rhoKgM3, mu, options)
    return Math.log(Math.abs(at.frictionPa + at.bendPa))
  }
  const up = Math.exp(h)
  return {
    n: (ln(massFlowKgS * up, viscPaS) - ln(massFlowKgS / up, viscPaS)) / (2 * h),
    k: (ln(massFlowKgS, viscPaS * up) - ln(massFlowKgS, viscPaS / up)) / (2 * h),
  }
}
