import { MonitorError } from '../errors.ts'
import { monotoneCubic } from '../fluids/monotone.ts'
import { waterDensity } from '../fluids/water.ts'
import { kFromC } from '../units.ts'

/** A lithium salt that falls out in the channel and whether water takes it away again. */
export interface LithiumSalt {
  readonly name: 'LiOH' | 'LiCl' | 'LiBr' | 'LiF' | 'Li2CO3'
  readonly molarMassKgMol: number
  readonly densityKgM3: number
  /** Solubility by temperature, g per 100 g water. */
  readonly solubility: readonly (readonly [tempC: number, gPer100g: number])[]
  /** Of the anhydrous salt in much water, J/mol; negative gives off heat. */
  readonly dissolutionJMol: number
  /** False: a flush with water does not take a deposit of it away (practice: LiF, Li2CO3). */
  readonly washesOut: boolean
}

/**
 * Solubilities: LiOH, Lange's Handbook of Chemistry (from memory; the Merck Index is within 1 % at 0 and 20 °C, 10 % lower at
 * 100 °C); LiCl, LiBr, LiF, Li2CO3 from memory after handbook tables, 5 % (10 % for LiBr). Crystal densities: CRC Handbook; LiOH
 * 1460, others 1 %. Heats of dissolution at 25 °C: CRC Handbook, enthalpy of solution of electrolytes (from memory), 3 %.
 */
export const lithiumSalts: readonly LithiumSalt[] = [
  {
    name: 'LiOH',
    molarMassKgMol: 0.023948,
    densityKgM3: 1460,
    solubility: [
      [0, 11.91],
      [20, 12.35],
      [40, 13.22],
      [80, 16.56],
      [100, 19.12],
    ],
    dissolutionJMol: -23560,
    washesOut: true,
  },
  {
    name: 'LiCl',
    molarMassKgMol: 0.042394,
    densityKgM3: 2070,
    solubility: [
      [0, 69],
      [20, 83.5],
      [40, 89.8],
      [60, 98.4],
      [80, 112],
      [100, 128],
    ],
    dissolutionJMol: -37030,
    washesOut: true,
  },
  {
    name: 'LiBr',
    molarMassKgMol: 0.086845,
    densityKgM3: 3464,
    solubility: [
      [0, 143],
      [20, 160],
      [40, 205],
      [60, 224],
      [80, 245],
      [100, 266],
    ],
    dissolutionJMol: -48830,
    washesOut: true,
  },
  { name: 'LiF', molarMassKgMol: 0.025939, densityKgM3: 2640, solubility: [[20, 0.13]], dissolutionJMol: 4730, washesOut: false },
  {
    name: 'Li2CO3',
    molarMassKgMol: 0.073891,
    densityKgM3: 2110,
    solubility: [
      [0, 1.54],
      [20, 1.33],
      [40, 1.17],
      [60, 1.01],
      [80, 0.85],
      [100, 0.72],
    ],
    dissolutionJMol: -18200,
    washesOut: false,
  },
]

const curves = new Map(
  lithiumSalts.map(
    (s) =>
      [
        s.name,
        monotoneCubic(
          s.solubility.map((p) => p[0]),
          s.solubility.map((p) => p[1]),
        ),
      ] as const,
  ),
)

/** The salt by its formula. Errors: FLUID_UNKNOWN. */
export function lithiumSalt(name: LithiumSalt['name']): LithiumSalt {
  const salt = lithiumSalts.find((s) => s.name === name)
  if (salt === undefined)
    throw new MonitorError('FLUID_UNKNOWN', `unknown lithium salt '${name}'`, {
      hint: `one of ${lithiumSalts.map((s) => s.name).join(', ')}`,
    })
  return salt
}

/** Solubility, kg salt per kg water, monotone between the table's points; 0 to 100 °C. Errors: FLUID_RANGE outside (ice, steam). */
export function solubilityKgKg(name: LithiumSalt['name'], tempC: number): number {
  const curve = curves.get(lithiumSalt(name).name)!
  if (!(tempC >= 0 && tempC <= 100))
    throw new MonitorError('FLUID_RANGE', `solubility in water is asked at ${tempC} °C; water is liquid from 0 to 100 °C`)
  return curve(tempC) / 100
}

export interface LeastWater {
  readonly massKg: number
  readonly volumeM3: number
  /** Given off while all of it dissolves, J; negative would be taken up. */
  readonly heatJ: number
  /** Rise of that water if no heat leaves, K: the most a correct water step can warm by. */
  readonly riseK: number
  readonly washesOut: boolean
}

/**
 * Heat capacity of a saturated lithium salt solution is below water's; water's 4180 J/(kg K) over the water alone keeps the rise
 * within 15 %.
 */
const WATER_CP = 4180

/**
 * Least water that can dissolve a deposit: m_water = m_salt/s(T). At equilibrium, evenly wetted; a plan takes several times it
 * (the caller's margin).
 *   heat = -ΔH_sol m/M,  rise = heat/(m_water cp)
 * tempC: the coldest the water may be. Errors: FLUID_RANGE outside 0 to 100 °C or for a negative mass.
 */
export function leastWater(name: LithiumSalt['name'], saltKg: number, tempC: number): LeastWater {
  if (!(saltKg >= 0)) throw new MonitorError('FLUID_RANGE', `a deposit must be 0 kg or more, got ${saltKg}`)
  const salt = lithiumSalt(name)
  const massKg = saltKg / solubilityKgKg(name, tempC)
  const heatJ = (-salt.dissolutionJMol * saltKg) / salt.molarMassKgMol
  return {
    massKg,
    volumeM3: massKg / waterDensity.at(kFromC(tempC)),
    heatJ,
    riseK: massKg === 0 ? 0 : heatJ / (massKg * WATER_CP),
    washesOut: salt.washesOut,
  }
}
