import { MonitorError } from '../errors.ts'
import { expansionLoss } from '../hydraulics/bends.ts'
import { risingRoot } from '../hydraulics/branches.ts'
import type { ChannelGeometry } from '../hydraulics/channel.ts'
import { cleanDp, type DpOptions } from '../hydraulics/clean-dp.ts'

/** A working point at which a clean channel and a fouled one are compared: the same flow, the same fluid. */
export interface WorkingPoint {
  readonly massFlowKgS: number
  readonly rhoKgM3: number
  readonly viscPaS: number
}

/** Nothing is said of a bore narrowed below this share of the clean one: the channel counts as plugged. */
const LEAST_BORE = 0.02

/**
 * The channel with every wall covered by the same thickness. Exact for a round bore; a non-round one shrinks in proportion.
 * Roughness stays.
 */
export function narrowed(channel: ChannelGeometry, thicknessM: number): ChannelGeometry {
  const diameterM = channel.diameterM - 2 * thicknessM
  return { ...channel, diameterM, areaM2: channel.areaM2 * (diameterM / channel.diameterM) ** 2 }
}

const resistance = (c: ChannelGeometry, at: WorkingPoint, options?: DpOptions): number => {
  const dp = cleanDp(c, at.massFlowKgS, at.rhoKgM3, at.viscPaS, options)
  return dp.frictionPa + dp.bendPa
}

/**
 * Resistance over clean that a uniform deposit of this thickness makes at constant flow, any regime [-]; 1 without deposit.
 * Errors: HYDRAULICS_RANGE when the thickness is negative, or leaves less than 2 % of the bore; when nothing flows.
 */
export function ratioOfThickness(channel: ChannelGeometry, at: WorkingPoint, thicknessM: number, options?: DpOptions): number {
  refuseStill(at)
  if (!(thicknessM >= 0 && thicknessM <= ((1 - LEAST_BORE) / 2) * channel.diameterM))
    throw new MonitorError('HYDRAULICS_RANGE', `a deposit of ${thicknessM} m does not leave a bore in ${channel.diameterM} m`)
  return resistance(narrowed(channel, thicknessM), at, options) / resistance(channel, at, options)
}

/**
 * Thickness of the uniform deposit that explains a ratio at constant flow, any regime [m]; 0 at a ratio of 1 or below (nothing
 * is there to be seen). The largest answer leaves 2 % of the bore. The inverse of `ratioOfThickness` to 1e-12. Errors:
 * HYDRAULICS_RANGE when nothing flows.
 */
export function thicknessOfRatio(channel: ChannelGeometry, at: WorkingPoint, ratio: number, options?: DpOptions): number {
  refuseStill(at)
  if (!(ratio > 1)) return 0
  const clean = resistance(channel, at, options)
  const most = ((1 - LEAST_BORE) / 2) * channel.diameterM
  return risingRoot((t) => Math.log(resistance(narrowed(channel, t), at, options) / clean / ratio), 0, most)
}

function refuseStill(at: WorkingPoint): void {
  if (at.massFlowKgS === 0) throw new MonitorError('HYDRAULICS_RANGE', 'a deposit cannot be told from a channel without flow')
}

/** Closed form, local: a constriction to bore ratio b (0 to 1) over a share f of the length, 1 - f + f b^-e; no throat losses. */
export const constrictionRatio = (lengthShare: number, boreRatio: number, exponent: number): number =>
  1 - lengthShare + lengthShare * boreRatio ** -exponent

/**
 * The same in full at a working point, any regime, with what the throat's ends cost: 0.5 (1 - b²) going in, Borda and Carnot's
 * (1 - b²)² coming out, both in the throat's velocity head (turbulent figures; laminar ends cost more). Errors: HYDRAULICS_RANGE
 * when nothing flows.
 */
export function ratioOfConstriction(channel: ChannelGeometry, at: WorkingPoint, lengthShare: number, boreRatio: number): number {
  refuseStill(at)
  const throat = narrowed(channel, ((1 - boreRatio) / 2) * channel.diameterM)
  const ends = 0.5 * (1 - boreRatio ** 2) + expansionLoss(boreRatio, 1)
  const part = { ...throat, lengthM: channel.lengthM * lengthShare, bends: channel.bends * lengthShare }
  const clean = resistance(channel, at)
  return 1 - lengthShare + resistance(part, at, { lossK: ends }) / clean
}

/**
 * Bore ratio b of a constriction over a share f of the length that explains a ratio, in full; 1 at r ≤ 1, at least 0.02. Errors:
 * HYDRAULICS_RANGE when nothing flows.
 */
export function constrictionOfRatio(channel: ChannelGeometry, at: WorkingPoint, lengthShare: number, ratio: number): number {
  if (!(ratio > 1)) return 1
  return 1 - risingRoot((gone) => Math.log(ratioOfConstriction(channel, at, lengthShare, 1 - gone) / ratio), 0, 1 - LEAST_BORE)
}
