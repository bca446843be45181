import type { ChannelSpec } from '../skid.ts'

/** One flow path, SI. Equal bores in parallel share the flow. Non-round bores: see `rectangularChannel`, `annularChannel`. */
export interface ChannelGeometry {
  /** Bore; of a non-round channel the hydraulic diameter 4 A/P. */
  readonly diameterM: number
  readonly lengthM: number
  readonly parallel: number
  readonly roughnessM: number
  readonly coilDiameterM: number | null
  /** Outlet above inlet. */
  readonly heightM: number
  /** Flow area of one bore. */
  readonly areaM2: number
  /** f·Re laminar over that of a round bore (64); 1 when round. */
  readonly laminarFactor: number
}

export const roundArea = (diameterM: number): number => (Math.PI / 4) * diameterM * diameterM

/** The skid file's channel in SI; null when bore or length are not given. */
export function channelOf(spec: ChannelSpec): ChannelGeometry | null {
  if (spec.diameterMm === null || spec.lengthM === null) return null
  const diameterM = spec.diameterMm / 1000
  return {
    diameterM,
    lengthM: spec.lengthM,
    parallel: spec.parallel,
    roughnessM: spec.roughnessUm * 1e-6,
    coilDiameterM: spec.coilDiameterMm === null ? null : spec.coilDiameterMm / 1000,
    heightM: spec.heightM,
    areaM2: roundArea(diameterM),
    laminarFactor: 1,
  }
}

/** Volume inside one channel with all its parallel bores, m3. */
export const channelVolumeM3 = (c: ChannelGeometry): number => c.areaM2 * c.lengthM * c.parallel
