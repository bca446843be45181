import { bendLoss } from '../hydraulics/bends.ts'
import { splitFlow } from '../hydraulics/branches.ts'
import { annularSection, type ChannelGeometry, rectangularSection, roundArea } from '../hydraulics/channel.ts'
import { coilFrictionFactor } from '../hydraulics/curvature.ts'
import type { WorkedExample } from './worked-example.ts'

const bore = (diameterM: number): ChannelGeometry => ({
  diameterM,
  lengthM: 5,
  parallel: 1,
  roughnessM: 0,
  coilDiameterM: null,
  heightM: 0,
  bends: 0,
  areaM2: roundArea(diameterM),
  laminarFactor: 1,
})
const subject = 'flow'

export const channelExamples: readonly WorkedExample[] = [
  {
    subject,
    name: 'square channel, laminar: f Re',
    source: 'Shah and London 1978',
    printed: 56.91,
    unit: '',
    tolerance: 1e-3,
    compute: () => rectangularSection(0.001, 0.001).laminarFactor * 64,
  },
  {
    subject,
    name: 'ring with half the bore filled, laminar: f Re',
    source: 'Shah and London 1978',
    printed: 95.25,
    unit: '',
    tolerance: 2e-4,
    compute: () => annularSection(0.002, 0.001).laminarFactor * 64,
  },
  {
    subject,
    name: 'coil of 50 mm, bore 1 mm, Re 1000: friction factor',
    source: 'fluids package 1.0.22, White 1929',
    printed: 0.109992873,
    unit: '',
    tolerance: 1e-8,
    compute: () => coilFrictionFactor(1000, 0, 0.001, 0.05),
  },
  {
    subject,
    name: 'bend of 90° in 1 mm at Re 200: loss coefficient',
    source: 'fluids package 1.0.22, Hooper 1981',
    printed: 10.6,
    unit: '',
    tolerance: 1e-8,
    compute: () => bendLoss(200, 0.001),
  },
  {
    subject,
    name: 'bores of 1 and 2 mm side by side, laminar: ratio of flows',
    source: 'Hagen and Poiseuille, 2⁴',
    printed: 16,
    unit: '',
    tolerance: 1e-8,
    compute: () => {
      const [narrow = Number.NaN, wide = Number.NaN] = splitFlow([bore(0.001), bore(0.002)], 1e-4, 900, 1e-3).flowsKgS
      return wide / narrow
    },
  },
]
