import type { PropertyTable } from '../fluids/property-table.ts'
import type { ChannelGeometry } from '../hydraulics/channel.ts'
import { cleanDp } from '../hydraulics/clean-dp.ts'
import type { SegmentSpec, Skid, StreamSpec } from '../skid.ts'

/** Cells along a segment; temperatures and viscosities are resolved in them. */
export const CELLS = 5
export const FEED_K = 293.15

/** A stream as it truly is: near what the skid file says, not on it (viscosity ±6 %, its slope ±2 % a 10 K at most). */
export interface PlantStream {
  readonly spec: StreamSpec
  readonly fluid: PropertyTable
  readonly viscosityFactor: number
  readonly viscositySlopeK: number
  nominalKgS: number
  /** Lag of its pump and controller, s. */
  readonly tauS: number
}

/** A segment as it truly is: bore, coil and fittings differ a little from the file (ΔP ±10 %). */
export interface PlantSegment {
  readonly spec: SegmentSpec
  readonly streams: readonly number[]
  readonly geometry: ChannelGeometry | null
  readonly dpFactor: number
  readonly lossK: number
  /** Without geometry: ΔP = a (0.75 μ/μ0 Q/Q0 + 0.25 ρ/ρ0 (Q/Q0)²), a [Pa] at nominal. */
  assumed: { dpPa: number; viscPaS: number; rhoKgM3: number; kgS: number } | null
  readonly volumeM3: number
  /** Which coolant; the index in `Plant.coolants`. */
  readonly coolant: number
  /** Transfer units to the coolant at nominal flow. */
  readonly ntu: number
  /** Excess of the hottest place in normal production, K; 0 where nothing reacts. */
  readonly reactionK: number
  readonly hotSpot: number
  /** For each of its streams, the segment it comes from; -1 for the feed. */
  readonly upstream: readonly number[]
  readonly dpHighPa: number | null
}

export interface Plant {
  readonly skid: Skid
  readonly streams: readonly PlantStream[]
  readonly segments: readonly PlantSegment[]
  readonly coolants: readonly { readonly tag: string | null; readonly nominalK: number }[]
  /** Regulator at the outlet, gauge. */
  readonly outletPa: number
}

/**
 * What a segment without deposit truly shows, Pa, with its static head apart.
 * massKgS and viscosity factors by stream; cellsK the fluid along it. Viscosity is averaged over the cells (exact for laminar friction).
 */
export function cleanPressure(
  plant: Plant,
  s: PlantSegment,
  massKgS: ArrayLike<number>,
  factors: ArrayLike<number>,
  cellsK: ArrayLike<number>,
): { flowPa: number; staticPa: number } {
  let total = 0
  for (const i of s.streams) total += massKgS[i]!
  if (total <= 0) return { flowPa: 0, staticPa: 0 }
  let visc = 0
  let volume = 0
  for (let c = 0; c < cellsK.length; c++) {
    const t = cellsK[c]!
    let lnMu = 0
    for (const i of s.streams) {
      const w = massKgS[i]! / total
      if (w <= 0) continue
      const stream = plant.streams[i]!
      lnMu +=
        w *
        (Math.log(stream.fluid.viscPaS(t) * stream.viscosityFactor * factors[i]!) + stream.viscositySlopeK * (1 / t - 1 / FEED_K))
      volume += w / stream.fluid.rhoKgM3(t)
    }
    visc += Math.exp(lnMu)
  }
  visc /= cellsK.length
  const rho = cellsK.length / volume
  if (s.geometry !== null) {
    const dp = cleanDp(s.geometry, total, rho, visc, { lossK: s.lossK })
    return { flowPa: s.dpFactor * (dp.dpPa - dp.staticPa), staticPa: dp.staticPa }
  }
  if (s.assumed === null) return { flowPa: 0, staticPa: 0 }
  const q = (total / s.assumed.kgS) * (s.assumed.rhoKgM3 / rho)
  return {
    flowPa: s.assumed.dpPa * (0.75 * (visc / s.assumed.viscPaS) * q + 0.25 * (rho / s.assumed.rhoKgM3) * q * q),
    staticPa: 0,
  }
}

/** The same with something else than feeds in it: ln μ and ρ by the volume shares of what fills it, feeds in their usual proportion. */
export function filledPressure(
  plant: Plant,
  s: PlantSegment,
  massKgS: ArrayLike<number>,
  factors: ArrayLike<number>,
  cellsK: ArrayLike<number>,
  shares: { readonly feeds: number; readonly solvent: number; readonly water: number },
  solvent: PropertyTable,
  water: PropertyTable,
): { flowPa: number; staticPa: number } {
  const usual = s.streams.reduce((sum, i) => sum + plant.streams[i]!.nominalKgS, 0)
  let visc = 0
  let rho = 0
  let total = 0
  for (const i of s.streams) total += massKgS[i]!
  if (total <= 0) return { flowPa: 0, staticPa: 0 }
  for (let c = 0; c < cellsK.length; c++) {
    const t = cellsK[c]!
    let lnFeeds = 0
    let volume = 0
    for (const i of s.streams) {
      const stream = plant.streams[i]!
      const w = stream.nominalKgS / usual
      const mu = stream.fluid.viscPaS(t) * stream.viscosityFactor * factors[i]!
      lnFeeds += w * (Math.log(mu) + stream.viscositySlopeK * (1 / t - 1 / FEED_K))
      volume += w / stream.fluid.rhoKgM3(t)
    }
    visc += Math.exp(shares.feeds * lnFeeds + shares.solvent * solvent.lnVisc(t) + shares.water * water.lnVisc(t))
    rho += shares.feeds / volume + shares.solvent * solvent.rhoKgM3(t) + shares.water * water.rhoKgM3(t)
  }
  visc /= cellsK.length
  rho /= cellsK.length
  if (s.geometry !== null) {
    const dp = cleanDp(s.geometry, total, rho, visc, { lossK: s.lossK })
    return { flowPa: s.dpFactor * (dp.dpPa - dp.staticPa), staticPa: dp.staticPa }
  }
  if (s.assumed === null) return { flowPa: 0, staticPa: 0 }
  const q = (total / s.assumed.kgS) * (s.assumed.rhoKgM3 / rho)
  return {
    flowPa: s.assumed.dpPa * (0.75 * (visc / s.assumed.viscPaS) * q + 0.25 * (rho / s.assumed.rhoKgM3) * q * q),
    staticPa: 0,
  }
}

/** True where an event loads a filter. */
export const isFilter = (plant: Plant, id: string): boolean =>
  plant.segments.some((s) => s.spec.id === id && s.spec.kind === 'filter')
