import type { Layout } from '../derive/layout.ts'

export interface Disturbances {
  readonly levelStart: number
  readonly levelWalk: number
  readonly coilAndFittings: number
  readonly zeroOffsetPa: number
  readonly zeroOffsetCheckedPa: number
  readonly zeroShareAtMost: number
  readonly viscositySlope: number
  readonly viscositySlopeOneThermocouple: number
  readonly wander: number
  readonly wanderPa: number
  readonly wanderTauH: number
  readonly tapWalkPa: number
  readonly tapDriftingWalkPa: number
  readonly tapGain: number
  readonly meter: number
  readonly meterTauH: number
  readonly viscosityWalk: number
  readonly thermalLag: number
  readonly flowMove: number
  readonly profileSpread: number
  readonly restartFouled: number
  readonly restartClean: number
}

/**
 * Sizes of everything known to disturb a clean segment, as standard deviations. They are defaults under change control: start
 * values from a study of simulated skids, to be replaced by what a skid's own clean runs show. Per root hour where they walk.
 */
export const disturbances: Disturbances = {
  levelStart: 1,
  levelWalk: 0.0005,
  coilAndFittings: 0.05,
  zeroOffsetPa: 2400,
  zeroOffsetCheckedPa: 500,
  zeroShareAtMost: 0.3,
  viscositySlope: 0.05,
  viscositySlopeOneThermocouple: 0.09,
  wander: 0.0022,
  wanderPa: 150,
  wanderTauH: 40 / 60,
  tapWalkPa: 100,
  tapDriftingWalkPa: 2000,
  tapGain: 0.0025,
  meter: 0.0025,
  meterTauH: 3,
  viscosityWalk: 0.0004,
  /** ln ΔP per unit of: change of ln μ since the last step, change of ln flow, spread of the temperature profile. */
  thermalLag: 1,
  flowMove: 0.1,
  profileSpread: 0.02 * 0.24,
  /** Level's doubt after a stop: with a deposit before, without. */
  restartFouled: 0.2,
  restartClean: 0.006,
}

/** Where each state sits in the vector. Segment s owns c, a, k, w at 4s … 4s+3. */
export interface StateMap {
  readonly size: number
  readonly level: (s: number) => number
  readonly flowExp: (s: number) => number
  readonly viscExp: (s: number) => number
  readonly wander: (s: number) => number
  /** Zero of a tap that two segments share; −1 for an end tap, whose zero is the level of its one segment. */
  readonly tapZero: readonly number[]
  readonly tapGain: readonly number[]
  readonly meter: readonly number[]
  readonly visc: readonly number[]
}

export function stateMap(layout: Layout): StateMap {
  let next = 4 * layout.segments.length
  const tapZero = layout.taps.map((t) => (t.inletOf.length + t.outletOf.length > 1 ? next++ : -1))
  const tapGain = layout.taps.map(() => next++)
  const meter = layout.streams.map(() => next++)
  const visc = layout.streams.map(() => next++)
  return {
    size: next,
    level: (s) => 4 * s,
    flowExp: (s) => 4 * s + 1,
    viscExp: (s) => 4 * s + 2,
    wander: (s) => 4 * s + 3,
    tapZero,
    tapGain,
    meter,
    visc,
  }
}

/** One segment in one step, as the filter sees it; the object is null where ΔP, flow or temperature is missing. */
export interface SegmentObservation {
  /** ln ΔP − ln ΔP_model at the step's flow and viscosity. */
  readonly y: number
  readonly dpPa: number
  /** ln(m/m_ref), ln(μ/μ_ref). */
  readonly lnFlow: number
  readonly lnVisc: number
  /** d ln ΔP_model / d ln m and / d ln μ at the reference. */
  readonly n0: number
  readonly k0: number
  /** Mass fraction of each stream of the layout in the segment. */
  readonly share: readonly number[]
  /** Pressure of each tap of the layout, Pa; null where missing. */
  readonly tapPa: readonly (number | null)[]
  /** Rms change of the temperature profile against its mean since the start, K. */
  readonly profileSpreadK: number
  readonly stepVar: number
}

/** Sparse row of the measurement matrix: y = Σ value · x[index] + noise. */
export interface Row {
  readonly index: number[]
  readonly value: number[]
}

/** H of one segment's y. `tapStartPa` are the tap pressures when the filter began. */
export function rowOf(
  layout: Layout,
  map: StateMap,
  s: number,
  o: SegmentObservation,
  tapStartPa: readonly (number | null)[],
): Row {
  const seg = layout.segments[s]!
  const index = [map.level(s), map.flowExp(s), map.viscExp(s), map.wander(s)]
  const value = [1, o.lnFlow, o.lnVisc, 1]
  for (const [tap, sign] of [
    [seg.tapIn, 1],
    [seg.tapOut, -1],
  ] as const) {
    if (tap === null) continue
    if (map.tapZero[tap]! >= 0) {
      index.push(map.tapZero[tap]!)
      value.push(sign / o.dpPa)
    }
    const p = o.tapPa[tap]
    const p0 = tapStartPa[tap]
    if (p != null && p0 != null) {
      index.push(map.tapGain[tap]!)
      value.push((sign * (p - p0)) / o.dpPa)
    }
  }
  for (const i of seg.streams) {
    index.push(map.meter[i]!, map.visc[i]!)
    value.push(o.n0 * o.share[i]!, o.k0 * o.share[i]!)
  }
  return { index, value }
}
