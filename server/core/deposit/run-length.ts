import { MonitorError } from '../errors.ts'
import { type ChannelGeometry, channelVolumeM3 } from '../hydraulics/channel.ts'
import { thicknessOfRatio, type WorkingPoint } from './thickness.ts'

/** What an even film of this thickness fills, m3, all parallel bores: V [1 - (1 - δ/a)²]. Round bores; others in proportion. */
export function filmVolumeM3(channel: ChannelGeometry, thicknessM: number): number {
  const left = 1 - (2 * thicknessM) / channel.diameterM
  return channelVolumeM3(channel) * (1 - left * left)
}

/** Of the solid made, the share that stays in the segment, 0 to 1. Practice counts with 0.1 where nothing is known. */
export const USUAL_CAPTURE = 0.1

/**
 * Time from clean to a limit ratio, s, when the captured share of the solid lies evenly over the walls as dense crystal and
 * flow, temperature and water stay:
 *   t = V_film(δ(r))/(c V̇)
 * A loose deposit, or one that lies in one place, gets there sooner: an upper bound for the geometry, an order of magnitude for
 * the chemistry. Null when no solid is made or captured. Errors: HYDRAULICS_RANGE when the limit is not above 1 or nothing
 * flows.
 */
export function runLengthS(
  channel: ChannelGeometry,
  at: WorkingPoint,
  limitRatio: number,
  solidM3S: number,
  captureShare: number,
): number | null {
  if (!(limitRatio > 1)) throw new MonitorError('HYDRAULICS_RANGE', `a run is over at a ratio above 1, got ${limitRatio}`)
  const rate = solidM3S * captureShare
  if (!(rate > 0)) return null
  return filmVolumeM3(channel, thicknessOfRatio(channel, at, limitRatio)) / rate
}

/**
 * The captured share that an observed growth implies: film volume gained between two ratios over the solid made in that time.
 * Above 1 the water figure cannot explain the growth: more water gets in, the deposit is loose, lies in one place, or is
 * something else. Null when no solid was made.
 * Errors: HYDRAULICS_RANGE unless the time is above 0.
 */
export function impliedCapture(
  channel: ChannelGeometry,
  at: WorkingPoint,
  fromRatio: number,
  toRatio: number,
  overS: number,
  solidM3S: number,
): number | null {
  if (!(overS > 0)) throw new MonitorError('HYDRAULICS_RANGE', `growth needs a time above 0 s, got ${overS}`)
  if (!(solidM3S > 0)) return null
  const film = (ratio: number): number => filmVolumeM3(channel, thicknessOfRatio(channel, at, ratio))
  return (film(toRatio) - film(fromRatio)) / (solidM3S * overS)
}
