import { aqueousSalt } from '../deposit/aqueous.ts'
import { leastWater } from '../deposit/lithium-salts.ts'
import { pluggedRatio } from '../deposit/readings.ts'
import { runLengthS, USUAL_CAPTURE } from '../deposit/run-length.ts'
import { ratioOfThickness } from '../deposit/thickness.ts'
import { liohRateM3S, reagentShareLost, waterProducts } from '../deposit/water-in-feed.ts'
import { type ChannelGeometry, roundArea } from '../hydraulics/channel.ts'
import type { WorkedExample } from './worked-example.ts'

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
const litres6 = liohRateM3S([{ waterPpm: 300, rhoKgM3: 889, flowM3S: 6e-3 / 3600 }]) ?? Number.NaN
const hand = 'by hand: 18.015 and 23.948 g/mol, LiOH 1.46 g/cm³'
const subject = 'deposit'

export const depositExamples: readonly WorkedExample[] = [
  {
    subject,
    name: 'share of a 0.5 mol/L stream that 100 ppm of water takes, same flow',
    source: hand,
    printed: 1,
    unit: '%',
    tolerance: 0.02,
    compute: () => 100 * reagentShareLost(waterProducts(100, 889).waterMolM3, 1, 500, 1),
  },
  {
    subject,
    name: 'butane from 100 ppm of water, as gas at 25 °C',
    source: 'by hand, 24.47 L/mol',
    printed: 121,
    unit: 'mL/L',
    tolerance: 0.005,
    compute: () => waterProducts(100, 889).gasM3M3 * 1e3,
  },
  {
    subject,
    name: 'lithium hydroxide from 6 L/h of THF at 300 ppm',
    source: hand,
    printed: 1.46,
    unit: 'cm³/h',
    tolerance: 0.004,
    compute: () => litres6 * 3600e6,
  },
  {
    subject,
    name: 'time to a ratio of 1.51 in 2 mm × 5 m, a tenth of that staying',
    source: 'by hand: 0.93 % of the volume an hour',
    printed: 20,
    unit: 'h',
    tolerance: 0.01,
    compute: () => (runLengthS(channel, at, 1.51, litres6, USUAL_CAPTURE) ?? Number.NaN) / 3600,
  },
  {
    subject,
    name: 'ratio of a film that takes 10 % of the diameter, laminar',
    source: 'Hagen and Poiseuille, 0.9⁻⁴',
    printed: 1.524,
    unit: '',
    tolerance: 5e-4,
    compute: () => ratioOfThickness(channel, at, 1e-4),
  },
  {
    subject,
    name: 'ratio of one of two branches plugged, laminar',
    source: 'Hagen and Poiseuille',
    printed: 2,
    unit: '',
    tolerance: 1e-8,
    compute: () => pluggedRatio({ ...channel, parallel: 2 }, { ...at, massFlowKgS: 2e-4 }, 1),
  },
  {
    subject,
    name: 'least water for 1 g of lithium hydroxide at 20 °C',
    source: "Lange's Handbook of Chemistry (from memory)",
    printed: 8.1,
    unit: 'g',
    tolerance: 0.005,
    compute: () => leastWater('LiOH', 1e-3, 20).massKg * 1000,
  },
  {
    subject,
    name: 'density of 10 % lithium chloride in water, 25 °C',
    source: 'handbook (from memory); by Laliberté 2009',
    printed: 1054,
    unit: 'kg/m³',
    tolerance: 0.005,
    compute: () => aqueousSalt('LiCl', 0.1, 25).rhoKgM3,
  },
]
