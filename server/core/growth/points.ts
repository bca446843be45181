/** One detector step of a segment (typically a 30-s mean), stamped at its middle: lnRatio = ln of resistance over clean [-]. */
export interface GrowthPoint {
  readonly tMs: number
  readonly lnRatio: number
}

/** Noise of lnRatio: a mean-reverting wander (sd, correlation time) plus white noise of one step. */
export interface Noise {
  readonly wanderSd: number
  readonly wanderTauS: number
  readonly whiteSd: number
  readonly stepS: number
}

/** A date with its interval; `level` is the probability that the truth lies inside. */
export interface Interval {
  readonly atMs: number
  readonly lowMs: number
  readonly highMs: number
  readonly level: number
}

/** Mean of the points of one stretch of time. */
export interface Bin {
  readonly tMs: number
  readonly lnRatio: number
  readonly count: number
  readonly widthMs: number
}

/** The finite points, in the order given. */
export const finitePoints = (points: readonly GrowthPoint[]): GrowthPoint[] =>
  points.filter((p) => Number.isFinite(p.tMs) && Number.isFinite(p.lnRatio))

/**
 * Means of the points between neighbouring edges [ms, rising]; a stretch without a point gives no bin, so a gap stays a gap.
 * Points before the first or from the last edge on are left out. The bin is as wide as its points span, one step at least.
 */
export function binPoints(points: readonly GrowthPoint[], edges: readonly number[], stepMs: number): Bin[] {
  const bins: Bin[] = []
  let i = 0
  while (i < points.length && points[i]!.tMs < edges[0]!) i++
  for (let k = 1; k < edges.length; k++) {
    const first = i
    let sumT = 0
    let sum = 0
    for (; i < points.length && points[i]!.tMs < edges[k]!; i++) {
      sumT += points[i]!.tMs - points[first]!.tMs
      sum += points[i]!.lnRatio
    }
    const count = i - first
    if (count === 0) continue
    const tMs = points[first]!.tMs + sumT / count
    bins.push({ tMs, lnRatio: sum / count, count, widthMs: points[i - 1]!.tMs - points[first]!.tMs + stepMs })
  }
  return bins
}

/** Edges of n equal stretches from a to b, b included by a hair. */
export function evenEdges(aMs: number, bMs: number, n: number): number[] {
  const edges: number[] = []
  for (let k = 0; k < n; k++) edges.push(aMs + ((bMs - aMs) * k) / n)
  edges.push(bMs + 1)
  return edges
}

/**
 * The points without lone spikes (a gas slug, a flow step caught half way): those further from the median of themselves and up to
 * three neighbours on each side than `sigmas` times the noise of a step plus what those (the outermost aside) span: a steep or
 * ragged rise has no spikes. The first and last three stay: growth shows there first.
 */
export function withoutSpikes(points: readonly GrowthPoint[], noise: Noise, sigmas: number): GrowthPoint[] {
  const around = 3
  const limit = sigmas * Math.hypot(noise.whiteSd, wanderOver(noise, around * noise.stepS))
  const near = new Float64Array(2 * around + 1)
  return points.filter((p, i) => {
    if (i < around || i >= points.length - around) return true
    sortedInto(near, points, i - around)
    return Math.abs(p.lnRatio - near[around]!) <= limit + near[2 * around - 1]! - near[1]!
  })
}

/** Fills `into` with ln ratios from point `from` on, in rising order. A handful: sorted as they come. */
function sortedInto(into: Float64Array, points: readonly GrowthPoint[], from: number): void {
  for (let n = 0; n < into.length; n++) {
    const x = points[from + n]!.lnRatio
    let k = n
    for (; k > 0 && into[k - 1]! > x; k--) into[k] = into[k - 1]!
    into[k] = x
  }
}

/** sd of what the wander changes by in a time [-]. */
const wanderOver = (noise: Noise, seconds: number): number =>
  noise.wanderSd * Math.sqrt(-2 * Math.expm1(-seconds / Math.max(noise.wanderTauS, 1e-9)))

/**
 * Times at which a deposit sloughed off: a lasting sudden fall of lnRatio, the medians of the few points before and after it
 * apart by more than `sigmas` times their noise. Returns the first point after each fall with the size of the fall.
 */
export function findSloughs(
  points: readonly GrowthPoint[],
  noise: Noise,
  sigmas: number,
  leastFall: number,
): { tMs: number; fall: number }[] {
  const half = 3
  const few = new Float64Array(half)
  const found: { tMs: number; fall: number }[] = []
  const limit = Math.max(leastFall, sigmas * Math.hypot(wanderOver(noise, (half + 1) * noise.stepS), noise.whiteSd * 1.2))
  let best: { tMs: number; fall: number } | null = null
  for (let i = half; i + half <= points.length; i++) {
    sortedInto(few, points, i - half)
    const before = few[1]!
    sortedInto(few, points, i)
    const fall = before - few[1]!
    if (fall > limit) {
      if (best === null || fall > best.fall) best = { tMs: points[i]!.tMs, fall }
    } else if (best !== null) {
      found.push(best)
      best = null
    }
  }
  if (best !== null) found.push(best)
  return found
}
