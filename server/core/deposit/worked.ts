import type { WorkedExample } from '../fluids/worked.ts'
import { type ChannelGeometry, roundArea } from '../hydraulics/channel.ts'
import { aqueousSalt } from './aqueous.ts'
import { leastWater, solubilityKgKg } from './lithium-salts.ts'
import { pluggedRatio } from './readings.ts'
import { runLengthS, USUAL_CAPTURE } from './run-length.ts'
import { constrictionRatio, ratioOfThickness } from './thickness.ts'
import { liohRateM3S, waterProducts } from './water-in-feed.ts'

const channel: ChannelGeometry = {
  diameterM: 0.002,
  lengthM: 5,
  parallel: 1,
  roughnessM: 0,
  coilDiameterM: null,
  heightM: 0,
  bends: 0,
  areaM2: roundArea(0.002),
  laminarFactor: 1,
}
const at = { massFlowKgS: 1.48e-3, rhoKgM3: 889, viscPaS: 8e-4 }
const litres6 = (waterPpm: number): number => liohRateM3S([{ waterPpm, rhoKgM3: 889, flowM3S: 6e-3 / 3600 }])!
const hand = 'stoichiometry, by hand: 18.015 and 23.948 g/mol, LiOH 1.46 g/cm3'

/** Worked deposits and lithium salts. Errors: none. */
export const depositExamples: readonly WorkedExample[] = [
  {
    subject: 'LiOH from 100 ppm of water in THF of 0.889 kg/L',
    source: hand,
    printed: 118,
    unit: 'mg/L',
    tolerance: 0.005,
    compute: () => waterProducts(100, 889).liohKgM3 * 1000,
  },
  {
    subject: 'LiOH from 6 L/h of THF at 300 ppm',
    source: hand,
    printed: 1.46,
    unit: 'cm3/h',
    tolerance: 0.004,
    compute: () => litres6(300) * 3600e6,
  },
  {
    subject: 'time to a ratio of 1.51 in 2 mm x 5 m, a tenth of that staying',
    source: 'by hand: 0.93 % of the volume an hour',
    printed: 20,
    unit: 'h',
    tolerance: 0.01,
    compute: () => runLengthS(channel, at, 1.51, litres6(300), USUAL_CAPTURE)! / 3600,
  },
  {
    subject: 'a film taking 10 % of the diameter, laminar: ratio',
    source: 'Hagen and Poiseuille, 0.9^-4',
    printed: 1.524,
    unit: '-',
    tolerance: 5e-4,
    compute: () => ratioOfThickness(channel, at, 1e-4),
  },
  {
    subject: 'half the bore over 1 % of the length, laminar: ratio',
    source: 'by hand: 0.99 + 0.01·16',
    printed: 1.15,
    unit: '-',
    tolerance: 1e-8,
    compute: () => constrictionRatio(0.01, 0.5, 4),
  },
  {
    subject: 'one of two branches plugged, laminar: ratio',
    source: 'Hagen and Poiseuille',
    printed: 2,
    unit: '-',
    tolerance: 1e-8,
    compute: () => pluggedRatio({ ...channel, parallel: 2 }, { ...at, massFlowKgS: 2e-4 }, 1),
  },
  {
    subject: 'LiOH in water at 20 °C',
    source: 'Merck Index (from memory)',
    printed: 12.23,
    unit: 'g/100 g',
    tolerance: 0.03,
    compute: () => solubilityKgKg('LiOH', 20) * 100,
  },
  {
    subject: 'least water for 1 g LiOH at 20 °C',
    source: "Lange's Handbook of Chemistry (from memory)",
    printed: 8.1,
    unit: 'g',
    tolerance: 0.005,
    compute: () => leastWater('LiOH', 1e-3, 20).massKg * 1000,
  },
  {
    subject: 'density of 10 % LiCl in water at 25 °C',
    source: 'handbook (from memory); by Laliberté 2009',
    printed: 1054,
    unit: 'kg/m3',
    tolerance: 0.005,
    compute: () => aqueousSalt('LiCl', 0.1, 25).rhoKgM3,
  },
]
