import { constrictionRatio } from '../deposit/thickness.ts'
import { flowAtDp } from '../hydraulics/branches.ts'
import { type ChannelGeometry, roundArea } from '../hydraulics/channel.ts'
import { cleanDp } from '../hydraulics/clean-dp.ts'
import { coilCriticalReynolds, whiteCoilRatio } from '../hydraulics/curvature.ts'
import { colebrook, darcyFriction, reynolds } from '../hydraulics/friction.ts'
import type { WorkedExample } from './worked-example.ts'

const pipe = (diameterM: number, lengthM: number, more: Partial<ChannelGeometry> = {}): ChannelGeometry => ({
  diameterM,
  lengthM,
  parallel: 1,
  roughnessM: 0,
  coilDiameterM: null,
  heightM: 0,
  bends: 0,
  areaM2: roundArea(diameterM),
  laminarFactor: 1,
  ...more,
})
const subject = 'flow'
const white = 'F. M. White, Fluid Mechanics, worked example (from memory)'
const oil = pipe(0.06, 10, { heightM: 10 * Math.sin((40 * Math.PI) / 180) })

export const flowExamples: readonly WorkedExample[] = [
  {
    subject,
    name: 'friction factor, asphalted pipe, Re 270 000, ε/D 0.0008',
    source: white,
    printed: 0.02,
    unit: '',
    tolerance: 0.02,
    compute: () => colebrook(270_000, 0.0008),
  },
  {
    subject,
    name: 'its pressure drop, 200 ft of 6 in pipe at 6 ft/s',
    source: white,
    printed: 13_406,
    unit: 'Pa',
    tolerance: 0.03,
    compute: () =>
      cleanDp(
        pipe(0.1524, 60.96, { roughnessM: 0.0008 * 0.1524 }),
        999.5 * roundArea(0.1524) * 1.8288,
        999.5,
        (999.5 * 1.8288 * 0.1524) / 270_000,
      ).dpPa,
  },
  ...(
    [
      [4000, 0.0399],
      [1e4, 0.0309],
      [1e5, 0.018],
      [1e6, 0.0116],
      [1e7, 0.0081],
    ] as const
  ).map(
    ([re, f]): WorkedExample => ({
      subject,
      name: `smooth pipe friction factor, Re ${re}`,
      source: 'F. M. White, Fluid Mechanics, sec. 6.6 (from memory)',
      printed: f,
      unit: '',
      tolerance: 0.006,
      compute: () => colebrook(re, 0),
    }),
  ),
  {
    subject,
    name: 'laminar friction factor, Re 1000 (Hagen-Poiseuille, 64/Re)',
    source: 'definition',
    printed: 0.064,
    unit: '',
    tolerance: 1e-9,
    compute: () => darcyFriction(1000, 0),
  },
  {
    subject,
    name: 'laminar oil up a 40° incline, 350 to 250 kPa: flow',
    source: white,
    printed: 0.0076,
    unit: 'm³/s',
    tolerance: 0.01,
    compute: () => flowAtDp(oil, 100_000, 900, 0.18) / 900,
  },
  {
    subject,
    name: 'the same: Reynolds number',
    source: white,
    printed: 810,
    unit: '',
    tolerance: 0.01,
    compute: () => reynolds(flowAtDp(oil, 100_000, 900, 0.18), 0.06, 0.18),
  },
  {
    subject,
    name: 'coil friction over straight, Re 1000, 1 mm bore on 50 mm',
    source: 'fluids package 1.0.22, helical_laminar_fd_White',
    printed: 0.109992873379 / 0.064,
    unit: '',
    tolerance: 1e-9,
    compute: () => whiteCoilRatio(1000 * Math.sqrt(1 / 50)),
  },
  {
    subject,
    name: 'critical Re of the same coil',
    source: 'fluids package 1.0.22, helical_transition_Re_Schmidt',
    printed: 5701.65124408,
    unit: '',
    tolerance: 1e-9,
    compute: () => coilCriticalReynolds(0.001, 0.05),
  },
  {
    subject,
    name: 'ratio of a bore narrowed to half over 1 % of the length',
    source: 'hand computation, 0.99 + 0.01 · 2⁴',
    printed: 1.15,
    unit: '',
    tolerance: 0.005,
    compute: () => constrictionRatio(0.01, 0.5, 4),
  },
]
