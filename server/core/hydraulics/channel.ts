import { MonitorError } from '../errors.ts'
import type { ChannelSpec } from '../skid.ts'

/** One flow path, SI. Equal bores in parallel share the flow. Non-round bores: see `rectangularSection`, `annularSection`. */
export interface ChannelGeometry {
  /** Bore; of a non-round channel the hydraulic diameter 4 A/P. */
  readonly diameterM: number
  readonly lengthM: number
  readonly parallel: number
  readonly roughnessM: number
  readonly coilDiameterM: number | null
  /** Outlet above inlet. */
  readonly heightM: number
  /** 90-degree bends along one bore (zigzag plates, fittings). */
  readonly bends: number
  /** Flow area of one bore. */
  readonly areaM2: number
  /** f·Re laminar over that of a round bore (64); 1 when round. */
  readonly laminarFactor: number
}

export const roundArea = (diameterM: number): number => (Math.PI / 4) * diameterM * diameterM

/**
 * The skid file's channel in SI; null when the length, or bore and cross-section both, are not given. `depthMm` beside `widthMm`
 * makes it rectangular, `coreMm` beside `diameterMm` a ring around a core.
 */
export function channelOf(spec: ChannelSpec): ChannelGeometry | null {
  const section = sectionOf(spec)
  if (section === null || spec.lengthM === null) return null
  return {
    ...section,
    lengthM: spec.lengthM,
    parallel: spec.parallel,
    roughnessM: spec.roughnessUm * 1e-6,
    coilDiameterM: spec.coilDiameterMm === null ? null : spec.coilDiameterMm / 1000,
    heightM: spec.heightM,
    bends: spec.bends ?? 0,
  }
}

/** Hydraulic diameter 4 A/P, area and laminar friction of one cross-section. */
export type Section = Pick<ChannelGeometry, 'diameterM' | 'areaM2' | 'laminarFactor'>

function sectionOf(spec: ChannelSpec): Section | null {
  const widthMm = spec.widthMm ?? null
  const depthMm = spec.depthMm ?? null
  if (widthMm !== null && depthMm !== null) return rectangularSection(widthMm / 1000, depthMm / 1000)
  if (spec.diameterMm === null) return null
  const coreMm = spec.coreMm ?? 0
  if (coreMm > 0) return annularSection(spec.diameterMm / 1000, coreMm / 1000)
  const diameterM = spec.diameterMm / 1000
  return { diameterM, areaM2: roundArea(diameterM), laminarFactor: 1 }
}

/**
 * A rectangular channel: f Re = 96 (1 - 1.3553 a + 1.9467 a² - 1.7012 a³ + 0.9564 a⁴ - 0.2537 a⁵), a the short side over the
 * long one, 0 to 1; within 0.05 % of the series solution. Source: R. K. Shah and A. L. London, Laminar Flow Forced Convection in
 * Ducts, 1978.
 * Errors: HYDRAULICS_RANGE unless both sides are above 0.
 */
export function rectangularSection(widthM: number, depthM: number): Section {
  if (!(widthM > 0 && depthM > 0))
    throw new MonitorError('HYDRAULICS_RANGE', `a rectangular channel needs sides above 0, got ${widthM} and ${depthM} m`)
  const a = Math.min(widthM, depthM) / Math.max(widthM, depthM)
  const fRe = 96 * (1 + a * (-1.3553 + a * (1.9467 + a * (-1.7012 + a * (0.9564 - a * 0.2537)))))
  return { diameterM: (2 * widthM * depthM) / (widthM + depthM), areaM2: widthM * depthM, laminarFactor: fRe / 64 }
}

/**
 * A ring between a tube and a core in its middle: f Re = 64 (1-k)²/(1 + k² + (1-k²)/ln k), k = core over bore, exact. Source: F.
 * M. White, Viscous Fluid Flow, section 3-3 (Lamb). A core off the middle lowers it by up to 60 %. Errors: HYDRAULICS_RANGE
 * unless 0 < core < bore.
 */
export function annularSection(diameterM: number, coreM: number): Section {
  const k = coreM / diameterM
  if (!(k > 0 && k < 1))
    throw new MonitorError('HYDRAULICS_RANGE', `a ring needs a core between 0 and the bore, got ${coreM} in ${diameterM} m`)
  const fRe = (64 * (1 - k) ** 2) / (1 + k * k + (1 - k * k) / Math.log(k))
  return { diameterM: diameterM - coreM, areaM2: roundArea(diameterM) - roundArea(coreM), laminarFactor: fRe / 64 }
}

/** Volume inside one channel with all its parallel bores, m3. */
export const channelVolumeM3 = (c: ChannelGeometry): number => c.areaM2 * c.lengthM * c.parallel
