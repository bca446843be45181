import { MonitorError } from '../errors.ts'
import { waterDensity } from '../fluids/water.ts'
import { kFromC } from '../units.ts'

interface Coefficients {
  /** Apparent density. */
  readonly c: readonly [number, number, number, number, number]
  readonly v: readonly [number, number, number, number, number, number]
  readonly maxFraction: number
  readonly rangeC: readonly [number, number]
}

const coefficients: Readonly<Record<'LiOH' | 'LiCl', Coefficients>> = {
  LiOH: {
    c: [3.55823799848, 0.98898635742, -0.0697252979272, -6.39986669565e-5, -2513.09471354],
    v: [39.0264343363, 0.897852229501, 10.8940174977, 0.00913581872761, 2.74306606694, 3.26426404124],
    maxFraction: 0.1133,
    rangeC: [20, 40],
  },
  LiCl: {
    c: [1777.71168869, 208.095675886, 0.0924032897423, -9.6513819464e-5, -303.212122199],
    v: [18.6178234589, 0.773036318483, 2.15660166137, 0.00435445218019, 1023.45333258, 2.38089336779],
    maxFraction: 0.4539,
    rangeC: [-5, 100],
  },
}

export interface AqueousState {
  readonly rhoKgM3: number
  readonly viscPaS: number
  readonly uncertain: boolean
}

/**
 * Density and viscosity of LiOH or LiCl in water: what a flush carries away is thicker than water (LiOH 2 %: +22 % at 25 °C), so
 * ΔP reads high while it dissolves.
 *   1/ρ = w_w/ρ_w + w/ρ_app,  ρ_app = (c0 w + c1) exp[1e-6 (t + c4)²]/(w + c2 + c3 t)
 *   ln μ = w_w ln μ_w + w ln μ_s,  μ_s = exp[(v1 w^v2 + v3)/(v4 t + 1)]/(v5 w^v6 + 1)  [mPa s],  μ_w = (t + 246)/((0.05594 t +
 *   5.2842) t + 137.37)
 * w mass fraction of salt, t in °C. LiOH 20 to 40 °C and up to 11.3 %, LiCl -5 to 100 °C and up to 45 %; outside: uncertain.
 * Density 0.5 %, viscosity 5 %.
 * Source: M. Laliberté, J. Chem. Eng. Data 52 (2007) 321 and 1507, 54 (2009) 1725; water's density as in fluids/water.ts. Pure
 * water by μ_w is within 1 % of IAPWS.
 * Errors: FLUID_RANGE for a fraction below 0 or above 0.5, or outside 0 to 100 °C.
 */
export function aqueousSalt(salt: 'LiOH' | 'LiCl', massFraction: number, tempC: number): AqueousState {
  if (!(massFraction >= 0 && massFraction <= 0.5 && tempC >= 0 && tempC <= 100))
    throw new MonitorError('FLUID_RANGE', `no figures for ${salt} at mass fraction ${massFraction} and ${tempC} °C`)
  const { c, v, maxFraction, rangeC } = coefficients[salt]
  const w = massFraction
  const apparent = ((c[0] * w + c[1]) * Math.exp(1e-6 * (tempC + c[4]) ** 2)) / (w + c[2] + c[3] * tempC)
  const solute = Math.exp((v[0] * w ** v[1] + v[2]) / (v[3] * tempC + 1)) / (v[4] * w ** v[5] + 1)
  const solvent = (tempC + 246) / ((0.05594 * tempC + 5.2842) * tempC + 137.37)
  return {
    rhoKgM3: 1 / ((1 - w) / waterDensity.at(kFromC(tempC)) + w / apparent),
    viscPaS: 1e-3 * Math.exp((1 - w) * Math.log(solvent) + w * Math.log(solute)),
    uncertain: w > maxFraction || tempC < rangeC[0] || tempC > rangeC[1],
  }
}
