import { kFromC } from '../units.ts'
import { fluidOf } from './fluid.ts'

/** A figure printed somewhere, and what this program makes of the same inputs; for the page of the self-check. */
export interface WorkedExample {
  readonly subject: string
  readonly source: string
  readonly printed: number
  readonly unit: string
  /** Largest relative difference that the source's own accuracy and digits allow. */
  readonly tolerance: number
  readonly compute: () => number
}

const crc = 'CRC Handbook of Chemistry and Physics (from memory)'
const visc = (
  solvent: string,
  tempC: number,
  printed: number,
  source = crc,
  tolerance = tempC < -20 ? 0.1 : 0.05,
): WorkedExample => ({
  subject: `viscosity of ${solvent} at ${tempC} °C`,
  source,
  printed,
  unit: 'mPa s',
  tolerance,
  compute: () => fluidOf({ kind: 'solvent', solvent }).at(kFromC(tempC)).viscPaS * 1000,
})
const density = (solvent: string, tempC: number, printed: number, source = crc, tolerance = 0.005): WorkedExample => ({
  subject: `density of ${solvent} at ${tempC} °C`,
  source,
  printed,
  unit: 'kg/m3',
  tolerance,
  compute: () => fluidOf({ kind: 'solvent', solvent }).at(kFromC(tempC)).rhoKgM3,
})

/** Published liquid properties; Errors: none (every temperature is in range). */
export const fluidExamples: readonly WorkedExample[] = [
  visc('water', 0, 1.792, 'IAPWS 2008', 1e-3),
  visc('water', 20, 1.0016, 'IAPWS 2008', 1e-3),
  visc('tetrahydrofuran', 0, 0.605),
  visc('tetrahydrofuran', 25, 0.456),
  visc('toluene', -25, 1.165),
  visc('hexane', 25, 0.3),
  visc('heptane', 25, 0.387),
  visc('dichloromethane', -25, 0.727),
  visc('methanol', 25, 0.544),
  density('water', 20, 998.207, 'IAPWS-95', 2e-5),
  density('tetrahydrofuran', 20, 888),
  density('toluene', 20, 866.8),
]
