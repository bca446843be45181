import type { WorkedExample } from '../fluids/worked.ts'
import { bendLoss } from './bends.ts'
import { flowAtDp, splitFlow } from './branches.ts'
import { annularSection, type ChannelGeometry, rectangularSection, roundArea } from './channel.ts'
import { cleanDp } from './clean-dp.ts'
import { coilFrictionFactor } from './curvature.ts'
import { colebrook, reynolds } from './friction.ts'

const tube = (diameterM: number, lengthM: number, over: Partial<ChannelGeometry> = {}): ChannelGeometry => ({
  diameterM,
  lengthM,
  parallel: 1,
  roughnessM: 0,
  coilDiameterM: null,
  heightM: 0,
  bends: 0,
  areaM2: roundArea(diameterM),
  laminarFactor: 1,
  ...over,
})

const white = 'F. M. White, Fluid Mechanics (from memory)'
const iron = { diameterM: 0.1524, velocityMS: 1.8288, rhoKgM3: 999.5, re: 270000, relRoughness: 0.0008 }
const ironFlow = iron.rhoKgM3 * iron.velocityMS * roundArea(iron.diameterM)
const ironVisc = (iron.rhoKgM3 * iron.velocityMS * iron.diameterM) / iron.re
const inclined = tube(0.06, 10, { heightM: 10 * Math.sin((40 * Math.PI) / 180) })

/** Worked pipe flow. Errors: none. */
export const hydraulicExamples: readonly WorkedExample[] = [
  {
    subject: '200 ft of 6 in asphalted cast iron, water at 6 ft/s: friction factor',
    source: white,
    printed: 0.02,
    unit: '-',
    tolerance: 0.02,
    compute: () => colebrook(iron.re, iron.relRoughness),
  },
  {
    subject: 'the same: pressure drop',
    source: `${white}, 280 lbf/ft2`,
    printed: 13406,
    unit: 'Pa',
    tolerance: 0.02,
    compute: () =>
      cleanDp(tube(iron.diameterM, 60.96, { roughnessM: iron.relRoughness * iron.diameterM }), ironFlow, iron.rhoKgM3, ironVisc)
        .dpPa,
  },
  {
    subject: '100 kPa up 10 m of 6 cm at 40 degrees, oil of 0.18 Pa s: flow',
    source: white,
    printed: 0.0076,
    unit: 'm3/s',
    tolerance: 0.01,
    compute: () => flowAtDp(inclined, 100_000, 900, 0.18) / 900,
  },
  {
    subject: 'the same: Reynolds number',
    source: white,
    printed: 810,
    unit: '-',
    tolerance: 0.01,
    compute: () => reynolds(flowAtDp(inclined, 100_000, 900, 0.18), 0.06, 0.18),
  },
  {
    subject: 'smooth pipe at Re 100000: friction factor',
    source: white,
    printed: 0.018,
    unit: '-',
    tolerance: 0.003,
    compute: () => colebrook(1e5, 0),
  },
  {
    subject: 'square channel, laminar: f Re',
    source: 'Shah and London 1978',
    printed: 56.91,
    unit: '-',
    tolerance: 1e-3,
    compute: () => rectangularSection(0.001, 0.001).laminarFactor * 64,
  },
  {
    subject: 'ring with half the bore filled, laminar: f Re',
    source: 'Shah and London 1978',
    printed: 95.25,
    unit: '-',
    tolerance: 2e-4,
    compute: () => annularSection(0.002, 0.001).laminarFactor * 64,
  },
  {
    subject: 'coil of 50 mm, bore 1 mm, Re 1000 (White 1929): friction factor',
    source: 'fluids package 1.0.22',
    printed: 0.109992873,
    unit: '-',
    tolerance: 1e-8,
    compute: () => coilFrictionFactor(1000, 0, 0.001, 0.05),
  },
  {
    subject: 'bend in 1 mm at Re 200 (Hooper 1981): K',
    source: 'fluids package 1.0.22',
    printed: 10.6,
    unit: '-',
    tolerance: 1e-8,
    compute: () => bendLoss(200, 0.001),
  },
  {
    subject: 'bores of 1 and 2 mm side by side, laminar: ratio of flows',
    source: 'Hagen and Poiseuille, 2^4',
    printed: 16,
    unit: '-',
    tolerance: 1e-8,
    compute: () => {
      const [narrow, wide] = splitFlow([tube(0.001, 5), tube(0.002, 5)], 1e-4, 900, 1e-3).flowsKgS
      return wide! / narrow!
    },
  },
]
