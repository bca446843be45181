import { MonitorError } from '../errors.ts'
import { coilCriticalReynolds } from '../hydraulics/curvature.ts'

/** Largest Reynolds number of laminar flow in a straight tube, and the least of fully turbulent flow (Gnielinski 2013). */
const reLaminar = 2300
const reTurbulent = 4000

/** Filonenko friction factor of a smooth tube, f = (0.79 ln Re − 1.64)^−2 [-], 3e3 < Re < 5e6. Source: Petukhov, Adv. Heat Transfer 6 (1970). */
export const filonenko = (re: number): number => (0.79 * Math.log(re) - 1.64) ** -2

/**
 * Mean Nusselt number of laminar flow in a straight tube of constant wall temperature, velocity profile developed.
 *   Nu = 3.66 + 0.0668 Gz / (1 + 0.04 Gz^(2/3)),   Gz = Re Pr D/L  [-]
 * Validity: Re < 2300. Source: H. Hausen, VDI-Z. Beih. Verfahrenstechnik 4 (1943) 91, as in Incropera & DeWitt (8.56). About 10 %.
 */
export const hausen = (gz: number): number => 3.66 + (0.0668 * gz) / (1 + 0.04 * gz ** (2 / 3))

/**
 * Mean Nusselt number of laminar flow, thermally developing: Nu = 1.86 Gz^(1/3) [-], viscosity factor taken as 1.
 * Validity: Gz > 8 (below, the value falls under the developed 3.66). Source: E. N. Sieder, G. E. Tate, Ind. Eng. Chem. 28 (1936) 1429. About 20 %.
 */
export const siederTate = (gz: number): number => 1.86 * Math.cbrt(gz)

/**
 * Mean Nusselt number of laminar flow, constant wall temperature, from the developed limit to the entrance.
 *   Nu³ = 3.66³ + 0.7³ + (1.615 Gz^(1/3) − 0.7)³  [-]
 * Validity: Re < 2300, any Gz. Source: VDI Heat Atlas, 2nd ed., G1 eq. (4), from memory. About 5 %.
 */
export const gnielinskiLaminar = (gz: number): number => Math.cbrt(3.66 ** 3 + 0.7 ** 3 + (1.615 * Math.cbrt(gz) - 0.7) ** 3)

/**
 * Nusselt number of fully developed turbulent flow: Nu = (f/8)(Re − 1000) Pr / (1 + 12.7 √(f/8) (Pr^(2/3) − 1)) [-].
 * Validity: 3e3 < Re < 5e6, 0.5 < Pr < 2000, smooth. Source: V. Gnielinski, Int. Chem. Eng. 16 (1976) 359. About 10 %.
 */
export function gnielinskiTurbulent(re: number, pr: number, f: number = filonenko(re)): number {
  return ((f / 8) * (re - 1000) * pr) / (1 + 12.7 * Math.sqrt(f / 8) * (pr ** (2 / 3) - 1))
}

/**
 * Nusselt number of turbulent flow, Nu = 0.023 Re^0.8 Pr^n, n = 0.4 heated and 0.3 cooled [-]: kept as the second opinion.
 * Validity: Re > 1e4, 0.6 < Pr < 160, L/D > 10. Source: Dittus & Boelter (1930) in McAdams' form. About 25 %.
 */
export const dittusBoelter = (re: number, pr: number, heated: boolean): number => 0.023 * re ** 0.8 * pr ** (heated ? 0.4 : 0.3)

/**
 * Nusselt number of laminar flow in a coil, constant wall temperature, c = d/D of the coil:
 *   Nu = 3.65 + 0.08 (1 + 0.8 c^0.9) Re^(0.5 + 0.2903 c^0.194) Pr^(1/3)  [-]
 * Validity: 100 < Re < critical, c 0.012 to 0.2. Source: E. F. Schmidt, Chem.-Ing.-Tech. 39 (1967) 781 (VDI Heat Atlas G3), from memory. About 15 %.
 */
export const schmidtCoil = (re: number, pr: number, curvature: number): number =>
  3.65 + 0.08 * (1 + 0.8 * curvature ** 0.9) * re ** (0.5 + 0.2903 * curvature ** 0.194) * Math.cbrt(pr)

/**
 * Nusselt number of laminar flow in a coil, constant wall temperature: Nu³ = (3.657 + 4.343/x1)³ + 1.158 (De/x2)^1.5,
 * x1 = (1 + 957/(De² Pr))², x2 = 1 + 0.477/Pr, De = Re √(d/D) [-].
 * Source: R. L. Manlapaz, S. W. Churchill, Chem. Eng. Commun. 9 (1981) 185, from memory. About 15 % for Pr up to 10; it stops growing
 * with Pr above, where Schmidt does not (factor 2 at Pr 50).
 */
export function manlapazChurchill(re: number, pr: number, curvature: number): number {
  const de = re * Math.sqrt(curvature)
  const x1 = (1 + 957 / (de * de * pr)) ** 2
  return Math.cbrt((3.657 + 4.343 / x1) ** 3 + 1.158 * (de / (1 + 0.477 / pr)) ** 1.5)
}

/** Turbulent coil: Gnielinski's form with f = 0.3164 Re^−0.25 + 0.03 √c, Re > 2.2e4. Source: Gnielinski, Int. Chem. Eng. 28 (1988) / VDI G3, from memory. */
const turbulentCoil = (re: number, pr: number, curvature: number): number => {
  const f = 0.3164 * re ** -0.25 + 0.03 * Math.sqrt(curvature)
  return ((f / 8) * re * pr) / (1 + 12.7 * Math.sqrt(f / 8) * (pr ** (2 / 3) - 1))
}
const reTurbulentCoil = 22_000

export interface TubeFlow {
  readonly re: number
  readonly pr: number
  /** Heated length over bore. */
  readonly lengthOverDiameter: number
  /** Bore over coil diameter; null for a straight tube. */
  readonly curvature: number | null
  /** True where the wall is the hotter side; sets the exponent of the second opinion only. */
  readonly heated: boolean
}

export interface Nusselt {
  readonly nu: number
  /** Range from a second, independent correlation, at least ±10 %. */
  readonly low: number
  readonly high: number
  readonly regime: 'laminar' | 'transitional' | 'turbulent'
  readonly notes: readonly string[]
}

const blend = (x: number, x0: number, x1: number, y0: number, y1: number): number => y0 + ((x - x0) / (x1 - x0)) * (y1 - y0)

function straight(re: number, pr: number, lengthOverDiameter: number): number {
  const laminar = (r: number) => gnielinskiLaminar((r * pr) / lengthOverDiameter)
  const turbulent = (r: number) => gnielinskiTurbulent(r, pr) * (1 + lengthOverDiameter ** (-2 / 3))
  if (re <= reLaminar) return laminar(re)
  if (re >= reTurbulent) return turbulent(re)
  return blend(re, reLaminar, reTurbulent, laminar(reLaminar), turbulent(reTurbulent))
}

function coil(re: number, pr: number, curvature: number): number {
  const critical = Math.min(coilCriticalReynolds(curvature, 1), reTurbulentCoil * 0.95)
  if (re <= critical) return schmidtCoil(re, pr, curvature)
  if (re >= reTurbulentCoil) return turbulentCoil(re, pr, curvature)
  return blend(re, critical, reTurbulentCoil, schmidtCoil(critical, pr, curvature), turbulentCoil(reTurbulentCoil, pr, curvature))
}

/**
 * The straight tube's value that a coil never falls below: laminar to the coil's critical Re, turbulent from 22 000, linear between, as
 * the coil stays laminar long after a straight tube has not.
 */
function coilFloor(re: number, pr: number, lengthOverDiameter: number, curvature: number): number {
  const critical = Math.min(coilCriticalReynolds(curvature, 1), reTurbulentCoil * 0.95)
  const laminar = (r: number) => gnielinskiLaminar((r * pr) / lengthOverDiameter)
  if (re <= critical) return laminar(re)
  if (re >= reTurbulentCoil) return straight(re, pr, lengthOverDiameter)
  return blend(re, critical, reTurbulentCoil, laminar(critical), straight(reTurbulentCoil, pr, lengthOverDiameter))
}

/**
 * Mean Nusselt number inside a tube over every regime, with the spread of a second correlation as its range.
 * Straight: Gnielinski laminar to Re 2300, linear between 2300 and 4000 (Gnielinski, Int. J. Heat Mass Transfer 63 (2013) 134), Gnielinski
 * turbulent with entry factor 1 + (D/L)^(2/3) above. Coil: Schmidt to the critical Re, linear to 22 000, turbulent above; never below
 * `coilFloor` (at Re < 100 a coil is a straight tube). Second opinions: Hausen, Sieder-Tate, Dittus-Boelter, Manlapaz-Churchill.
 * Errors: THERMAL_RANGE unless Re > 0, Pr > 0, L/D > 0 and curvature in 0 … 0.5.
 */
export function nusselt(flow: TubeFlow): Nusselt {
  const { re, pr, lengthOverDiameter, curvature, heated } = flow
  if (!(re > 0 && pr > 0 && lengthOverDiameter > 0 && (curvature === null || (curvature > 0 && curvature < 0.5)))) {
    throw new MonitorError(
      'THERMAL_RANGE',
      `film coefficient needs Re, Pr, L/D > 0 and d/D below 0.5, got Re=${re}, Pr=${pr}, L/D=${lengthOverDiameter}, d/D=${curvature}`,
    )
  }
  const notes: string[] = []
  const gz = (re * pr) / lengthOverDiameter
  const critical = curvature === null ? reLaminar : coilCriticalReynolds(curvature, 1)
  const full = curvature === null ? reTurbulent : reTurbulentCoil
  const regime = re <= critical ? 'laminar' : re >= full ? 'turbulent' : 'transitional'
  const asStraight = straight(re, pr, lengthOverDiameter)
  const nu = curvature === null ? asStraight : Math.max(coil(re, pr, curvature), coilFloor(re, pr, lengthOverDiameter, curvature))
  const others: number[] = []
  if (regime === 'laminar') {
    others.push(hausen(gz))
    if (gz > 8) others.push(siederTate(gz))
    if (curvature !== null) others.splice(0, others.length, pr <= 10 ? manlapazChurchill(re, pr, curvature) : 0.75 * nu)
  } else if (re > 1e4) others.push(dittusBoelter(re, pr, heated))
  if (regime === 'transitional') notes.push(`Re ${re.toFixed(0)} is transitional: film coefficient uncertain by 30 %`)
  if (curvature !== null && pr > 10) notes.push('no second coil correlation above Pr 10: 25 % assumed')
  if (curvature !== null && re < 100) notes.push('coil correlation below Re 100: out of its range')
  if (curvature !== null && (curvature < 0.012 || curvature > 0.2))
    notes.push("coil curvature outside 0.012 to 0.2: out of the correlation's range")
  if (regime === 'turbulent' && (pr < 0.5 || pr > 2000)) notes.push('Prandtl number outside 0.5 to 2000')
  const share = regime === 'transitional' ? 0.3 : 0.1
  return { nu, low: Math.min(nu * (1 - share), ...others), high: Math.max(nu * (1 + share), ...others), regime, notes }
}

/** Film coefficient h = Nu k / D [W/(m² K)] of a tube of bore D [m] and liquid conductivity k [W/(m K)]. */
export const filmCoefficient = (nu: number, condWMK: number, diameterM: number): number => (nu * condWMK) / diameterM
