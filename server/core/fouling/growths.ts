import { forecastLimit } from '../growth/forecast.ts'
import { fitOnset } from '../growth/onset.ts'
import type { GrowthPoint, Interval, Noise } from '../growth/points.ts'
import { median } from '../stats/robust.ts'
import { type DpLimit, type Growth, steps } from './watch-state.ts'

/** Share of a growth's age after which its forecast is made anew. */
const renewShare = 0.03

/** A growth that stands from now on; `rise` is what it has reached, ln ratio. */
export const growthFrom = (points: GrowthPoint[], onset: Interval | null, rise: number, tMs: number): Growth => ({
  raisedMs: tMs,
  onset,
  riseAtFit: Math.max(rise, 0.01),
  fits: 1,
  points,
  peakLn: rise,
  forecast: null,
  growthPerHour: null,
  lastForecastMs: 0,
})

/** A deposit that the bank has called: its onset from the points of the hours before, read as clean is known to be now. */
export function beginGrowth(points: GrowthPoint[], noise: Noise, tMs: number): Growth {
  const onset = points.length === 0 ? null : fitOnset(points, noise, points[0]!.tMs)
  const rise = points.slice(-3).reduce((a, p) => a + p.lnRatio / 3, 0)
  return growthFrom(points, onset, rise, tMs)
}

/**
 * One more step of a growth: its onset once more when it has doubled, its forecast every two steps or 3 % of its age, whichever is longer (what an
 * hour taught stands longer than what a minute did). `cleanLn`: ln of the clean ΔP over the last ten minutes.
 */
export function growOn(
  g: Growth,
  tMs: number,
  ln: number,
  noise: Noise,
  limit: DpLimit | null,
  cleanLn: readonly number[],
  stepMs: number,
): { onset: Interval | null; forecast: boolean } {
  g.points.push({ tMs, lnRatio: ln })
  g.points = thin(g.points)
  g.peakLn = Math.max(g.peakLn, ln)
  const recent = g.points.slice(-3).reduce((a, p) => a + p.lnRatio, 0) / Math.min(3, g.points.length)
  let onset: Interval | null = null
  if (g.fits === 1 && recent > 2 * g.riseAtFit && g.onset !== null) {
    onset = fitOnset(g.points, noise, g.points[0]!.tMs)
    g.fits = 2
    if (onset !== null) g.onset = onset
  }
  const age = g.onset === null ? 0 : tMs - g.onset.atMs
  if (tMs - g.lastForecastMs < Math.max(steps.forecast * stepMs, renewShare * age)) return { onset, forecast: false }
  g.lastForecastMs = tMs
  if (limit === null || g.onset === null || cleanLn.length === 0) {
    g.forecast = null
    return { onset, forecast: false }
  }
  const cleanPa = Math.exp(cleanLn.reduce((a, b) => a + b, 0) / cleanLn.length)
  const made = forecastLimit(g.points, noise, g.onset, limit.pa / cleanPa, tMs)
  g.growthPerHour = made === null ? null : made.growthPerHour
  g.forecast =
    made === null ? null : { limit: limit.name, atMs: made.atMs, lowMs: made.lowMs, highMs: made.highMs, level: made.level }
  return { onset, forecast: true }
}

/** The resistance came down: a filter that was changed, a deposit that let go. Six steps must agree. `sigma` of ln ratio. */
export function hasFallenBack(g: Growth, isFilter: boolean, sigma: number): boolean {
  const since = g.points.slice(-6).filter((p) => p.tMs > g.raisedMs)
  if (since.length < 6) return false
  const level = median(since.map((p) => p.lnRatio))
  const floor = isFilter ? Math.max(0.35 * g.peakLn, 3 * sigma) : Math.max(0.012, 3 * sigma)
  return g.peakLn > 2 * floor && level < floor
}

/** Keeps the points of a long growth bounded: beyond the limit every other one of the older half goes. */
function thin(points: GrowthPoint[]): GrowthPoint[] {
  if (points.length <= steps.pointsKept) return points
  const half = points.length >> 1
  return points.filter((_, j) => j >= half || j % 2 === 0)
}
