import { coilCriticalReynolds } from '../hydraulics/curvature.ts'
import { darcyFriction } from '../hydraulics/friction.ts'
import type { SegmentKind } from '../skid.ts'
import { taylorAris, turbulentPe } from './dispersion.ts'
import type { Rtd } from './rtd.ts'

export interface VesselFlow {
  readonly kind: SegmentKind
  /** Null where the channel is not known. */
  readonly tube: {
    readonly diameterM: number
    readonly lengthM: number
    readonly coilDiameterM: number | null
    readonly velocityMS: number
    readonly re: number
  } | null
  /** Molecular diffusivity of what is washed out, m²/s. */
  readonly diffusivityM2S: number
}

/** Bent tubes mix across themselves from about this Dean number on; below it the coil counts as straight (common practice). */
const deanMixes = 5

/**
 * The residence-time model that fits what is known of a vessel, the slower one in doubt: turbulent tube dispersion with open ends (Taylor 1954);
 * laminar tube Taylor-Aris once diffusion has had time to level the profile, else laminar flow with diffusion across it, of a coil where it is bent; a vessel
 * without a known channel one stirred tank, the slowest of well-made small vessels. Every choice is an assumption until a tracer test stands in its place.
 */
export function rtdOf({ kind, tube, diffusivityM2S }: VesselFlow): { readonly rtd: Rtd; readonly why: string } {
  if (tube === null) return { rtd: { kind: 'tanks', n: 1 }, why: `${kind} without a known channel taken as one stirred tank` }
  const { diameterM, lengthM, coilDiameterM, velocityMS, re } = tube
  const critical = coilDiameterM === null ? 2300 : coilCriticalReynolds(diameterM, coilDiameterM)
  if (re > 1.7 * critical) {
    return {
      rtd: { kind: 'dispersion', pe: turbulentPe(lengthM / diameterM, darcyFriction(re, 0)), ends: 'open' },
      why: `turbulent (Re ${re.toFixed(0)}): axial dispersion`,
    }
  }
  const taylor = taylorAris(diameterM / 2, velocityMS, lengthM, diffusivityM2S)
  if (taylor.settled)
    return { rtd: { kind: 'dispersion', pe: taylor.pe, ends: 'open' }, why: 'laminar and slow enough for Taylor-Aris dispersion' }
  const beta = (diffusivityM2S * (lengthM / velocityMS)) / (diameterM / 2) ** 2
  if (coilDiameterM !== null && re * Math.sqrt(diameterM / coilDiameterM) > deanMixes)
    return { rtd: { kind: 'coil', beta }, why: 'laminar, too fast for Taylor-Aris' }
  return { rtd: { kind: 'laminar', beta }, why: 'laminar, too fast for Taylor-Aris' }
}

/**
 * Molecular diffusivity of a small solute in a liquid, 0.5e-9 m²/s at 1 mPa s and 298 K, in proportion to T/μ (Stokes-Einstein) [m²/s].
 * The lower end of 0.5 to 2 for water, salts and organolithium clusters (common practice): slow diffusion is the
 * cautious side for a washout, which answers to its cube root.
 */
export const smallSoluteDiffusivity = (tempK: number, viscPaS: number): number => (0.5e-9 * (tempK / 298.15) * 1e-3) / viscPaS
