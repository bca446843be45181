import { MonitorError } from '../errors.ts'
import { kFromC } from '../units.ts'
import { monotoneCubic } from './monotone.ts'
import { FAR_K, type Fluid, refuseFar } from './state.ts'

/** Slope of ln μ over 1/T for a user who gives one viscosity only, K; light organic liquids have 700 to 1000 (from memory). */
const ONE_POINT_SLOPE_K = 900
const ASSUMED_CP = 1900
const ASSUMED_COND = 0.13

/**
 * A liquid by the user's own figures: one density [kg/m3], held over temperature (liquids lose about 0.1 % per kelvin), and
 * viscosities [(°C, mPa s), ...] interpolated monotonically in ln μ over temperature (Fritsch and Carlson 1980). Beyond the
 * table: uncertain, ln μ going on over 1/T with the end's slope; a single point is trusted for 5 K either side. Heat capacity
 * 1900 J/(kg K) and conductivity 0.13 W/(m K) are assumed (organic liquids, 20 %) and said so in `assumed`.
 * Errors: FLUID_RANGE for no point, a repeated temperature, or a value that is not positive and finite.
 */
export function tableFluid(densityKgM3: number, viscosityMPaS: readonly (readonly [tempC: number, mPaS: number])[]): Fluid {
  const points = [...viscosityMPaS].sort((a, b) => a[0] - b[0])
  if (!(densityKgM3 > 0 && Number.isFinite(densityKgM3)))
    throw new MonitorError('FLUID_RANGE', `density must be above 0 kg/m3, got ${densityKgM3}`)
  if (points.length === 0)
    throw new MonitorError('FLUID_RANGE', 'the viscosity table is empty', { hint: 'give at least one [tempC, mPa s]' })
  for (const [i, [tempC, v]] of points.entries()) {
    if (!(Number.isFinite(tempC) && tempC > -273.15 && v > 0 && Number.isFinite(v)))
      throw new MonitorError(
        'FLUID_RANGE',
        `the viscosity table needs temperatures above -273.15 °C and viscosities above 0, got [${tempC}, ${v}]`,
      )
    if (points[i + 1]?.[0] === tempC) throw new MonitorError('FLUID_RANGE', `the viscosity table gives ${tempC} °C twice`)
  }
  const temps = points.map((p) => kFromC(p[0]))
  const lnVisc = points.map((p) => Math.log(p[1] / 1000))
  const inside = monotoneCubic(temps, lnVisc)
  const firstK = temps[0]!
  const lastK = temps.at(-1)!
  const slack = temps.length === 1 ? 5 : 0
  const slopeAt = (edgeK: number, innerK: number): number =>
    temps.length === 1 ? ONE_POINT_SLOPE_K : (inside(innerK) - inside(edgeK)) / (1 / innerK - 1 / edgeK)
  const span = Math.min(1, lastK - firstK)
  const slopeLow = slopeAt(firstK, firstK + span)
  const slopeHigh = slopeAt(lastK, lastK - span)
  const rangeK = [firstK - slack, lastK + slack] as const
  const limitK = [Math.max(1, rangeK[0] - FAR_K), rangeK[1] + FAR_K] as const
  return {
    name: 'own table',
    rangeK,
    limitK,
    freezingK: null,
    boilingK: null,
    waterMiscible: 'none',
    molarMassKgMol: null,
    waterFraction: 0,
    mixesBadly: false,
    viscosityErrorPct: 5,
    source: 'the skid file',
    assumed: [
      `heat capacity ${ASSUMED_CP} J/(kg K)`,
      `conductivity ${ASSUMED_COND} W/(m K)`,
      'density constant over temperature',
      'does not mix with water',
    ],
    at(tempK) {
      refuseFar('the viscosity table of the skid file', tempK, limitK)
      const ln =
        tempK < firstK
          ? lnVisc[0]! + slopeLow * (1 / tempK - 1 / firstK)
          : tempK > lastK
            ? lnVisc.at(-1)! + slopeHigh * (1 / tempK - 1 / lastK)
            : inside(tempK)
      return {
        rhoKgM3: densityKgM3,
        viscPaS: Math.exp(ln),
        cpJKgK: ASSUMED_CP,
        condWMK: ASSUMED_COND,
        uncertain: tempK < rangeK[0] || tempK > rangeK[1],
      }
    },
  }
}
