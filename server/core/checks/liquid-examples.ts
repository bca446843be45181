import { solubilityKgKg } from '../deposit/lithium-salts.ts'
import { waterProducts } from '../deposit/water-in-feed.ts'
import { fluidOf } from '../fluids/fluid.ts'
import { kFromC } from '../units.ts'
import type { WorkedExample } from './worked-example.ts'

const at = (solvent: string, tempC: number) => fluidOf({ kind: 'solvent', solvent }).at(kFromC(tempC))
const crc = "CRC Handbook, 'Viscosity of liquids' (from memory)"
/** Handbook viscosities, mPa s; the correlations and the handbook agree within 5 %, 10 % below −20 °C, acetonitrile 8 %. */
const viscosities: readonly (readonly [string, number, number, number])[] = [
  ['tetrahydrofuran', 0, 0.605, 0.05],
  ['tetrahydrofuran', 25, 0.456, 0.05],
  ['tetrahydrofuran', 50, 0.359, 0.05],
  ['toluene', -25, 1.165, 0.1],
  ['toluene', 25, 0.56, 0.05],
  ['hexane', 25, 0.3, 0.05],
  ['heptane', -25, 0.757, 0.1],
  ['heptane', 25, 0.387, 0.05],
  ['cyclohexane', 25, 0.894, 0.05],
  ['methanol', 25, 0.544, 0.05],
  ['ethanol', 25, 1.074, 0.05],
  ['acetone', 25, 0.306, 0.05],
  ['diethyl-ether', 25, 0.224, 0.05],
  ['dichloromethane', -25, 0.727, 0.1],
  ['dichloromethane', 25, 0.413, 0.05],
  ['ethyl-acetate', 25, 0.423, 0.05],
  ['acetonitrile', 25, 0.369, 0.08],
  ['1,4-dioxane', 25, 1.177, 0.05],
  ['dimethylformamide', 25, 0.794, 0.08],
]
/** Viscosity of water as its standard prints it, mPa s. */
const waterViscosities: readonly (readonly [number, number])[] = [
  [0, 1.792],
  [20, 1.0016],
]
const densities: readonly (readonly [string, number, number])[] = [
  ['tetrahydrofuran', 20, 888],
  ['toluene', 20, 866.8],
  ['hexane', 25, 654.8],
  ['dimethylformamide', 25, 944.5],
]
/** By hand: ppm in THF of 0.889 kg/L, water in mmol/L, LiOH in mg/L. */
const lioh: readonly (readonly [number, number, number])[] = [
  [10, 0.49, 11.8],
  [50, 2.47, 59.1],
  [100, 4.93, 118],
  [200, 9.87, 236],
  [300, 14.8, 355],
  [500, 24.7, 591],
]

export const liquidExamples: readonly WorkedExample[] = [
  {
    subject: 'liquids',
    name: 'water viscosity, 25 °C',
    source: 'IAPWS 2008, iapws package 1.5.2',
    printed: 0.890022489,
    unit: 'mPa s',
    tolerance: 0.002,
    compute: () => at('water', 25).viscPaS * 1e3,
  },
  {
    subject: 'liquids',
    name: 'water density, 25 °C',
    source: 'IAPWS-95, iapws package 1.5.2',
    printed: 997.04763676,
    unit: 'kg/m³',
    tolerance: 1e-4,
    compute: () => at('water', 25).rhoKgM3,
  },
  ...waterViscosities.map(
    ([tempC, printed]): WorkedExample => ({
      subject: 'liquids',
      name: `water viscosity, ${tempC} °C`,
      source: 'IAPWS 2008',
      printed,
      unit: 'mPa s',
      tolerance: 1e-3,
      compute: () => at('water', tempC).viscPaS * 1e3,
    }),
  ),
  ...viscosities.map(
    ([solvent, tempC, printed, tolerance]): WorkedExample => ({
      subject: 'liquids',
      name: `${solvent} viscosity, ${tempC} °C`,
      source: crc,
      printed,
      unit: 'mPa s',
      tolerance,
      compute: () => at(solvent, tempC).viscPaS * 1e3,
    }),
  ),
  ...densities.map(
    ([solvent, tempC, printed]): WorkedExample => ({
      subject: 'liquids',
      name: `${solvent} density, ${tempC} °C`,
      source: 'CRC Handbook, physical constants (from memory)',
      printed,
      unit: 'kg/m³',
      tolerance: 0.005,
      compute: () => at(solvent, tempC).rhoKgM3,
    }),
  ),
  ...lioh.flatMap(([ppm, mmol, mg]): WorkedExample[] => [
    {
      subject: 'deposit',
      name: `water in THF, ${ppm} ppm`,
      source: 'hand computation, H2O + RLi = RH + LiOH',
      printed: mmol,
      unit: 'mmol/L',
      tolerance: 0.01,
      compute: () => waterProducts(ppm, 889).waterMolM3,
    },
    {
      subject: 'deposit',
      name: `lithium hydroxide from ${ppm} ppm`,
      source: 'hand computation, H2O + RLi = RH + LiOH',
      printed: mg,
      unit: 'mg/L',
      tolerance: 0.005,
      compute: () => waterProducts(ppm, 889).liohKgM3 * 1e3,
    },
  ]),
  {
    subject: 'deposit',
    name: 'lithium hydroxide in water, 20 °C',
    source: 'Merck Index, 10.9 mass %',
    printed: 12.23,
    unit: 'g/100 g',
    tolerance: 0.03,
    compute: () => 100 * solubilityKgKg('LiOH', 20),
  },
]
