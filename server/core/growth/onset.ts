import { normalCdf } from '../stats/normal.ts'
import {
  binPoints,
  evenEdges,
  findSloughs,
  finitePoints,
  type GrowthPoint,
  type Interval,
  type Noise,
  withoutSpikes,
} from './points.ts'
import { leastSquares, raggedFit, shape } from './ragged-fit.ts'
import { type GrowthSettings, growthDefaults } from './settings.ts'
import { wanderSteps, whiten, whitener } from './wander.ts'

export interface Onset extends Interval {
  /** ln ratio before the onset, as fitted [-] */
  readonly cleanLnRatio: number
  /** fitted rise of ln ratio from the onset to the last point used [-] */
  readonly riseLn: number
  /** ln likelihood ratio of this growth against none; below about 4 the date means little */
  readonly evidence: number
}

interface Pass {
  readonly tausMs: number[]
  readonly weights: number[]
  readonly clean: number
  readonly rise: number
  readonly evidence: number
}

/**
 * When did the deposit begin to grow: median and interval of the onset τ.
 *
 *   ln r = c + A·g(t − τ) for t > τ, c before;  g from the thickness law at constant deposition: −4 ln(1 − x s/4), unit at the end
 *
 * with wander and white noise, c and A > 0 integrated out, τ on a grid, the likelihood to the power `onsetPower`. A first pass over
 * everything finds the region, a second works there with finer means. Lone spikes, and all after a slough-off, are not used.
 * Works for runs of minutes as for weeks: all lengths are taken from the points. Source of the method: two-phase regression with
 * integrated nuisance parameters (common practice); the power as in tempered likelihoods, set for coverage.
 * points  at the middles of their steps, rising in time, clean part included.  searchFromMs  the earliest onset possible.
 * Null when there are fewer than 4 points, no time to search in, or no rise at all.
 */
export function fitOnset(
  points: readonly GrowthPoint[],
  noise: Noise,
  searchFromMs: number,
  settings: GrowthSettings = growthDefaults,
): Onset | null {
  let used = withoutSpikes(finitePoints(points), noise, settings.spikeSigmas)
  if (used.length < 4) return null
  const fall = findSloughs(used, noise, settings.sloughSigmas, settings.sloughLeast)[0]
  if (fall !== undefined) {
    const before = used.filter((p) => p.tMs < fall.tMs)
    if (before.length >= 4) used = before
  }
  const stepMs = noise.stepS * 1000
  const firstMs = used[0]!.tMs - stepMs / 2
  const lastMs = used[used.length - 1]!.tMs
  const fromMs = Math.max(searchFromMs, firstMs - 20 * (lastMs - firstMs))
  const toMs = lastMs - 0.75 * stepMs
  if (!(toMs > fromMs)) return null

  const coarse = pass(used, noise, evenEdges(firstMs, lastMs, settings.onsetPoints), evenEdges(fromMs, toMs, 60), settings)
  if (coarse === null) return null
  const margin = (toMs - fromMs) / 60
  const regionFrom = Math.max(fromMs, quantile(coarse, 0.002) - margin)
  const regionTo = Math.min(toMs, quantile(coarse, 0.998) + margin)
  const finer = pass(
    used,
    noise,
    focusEdges(firstMs, lastMs, regionFrom, regionTo, settings.onsetPoints),
    evenEdges(regionFrom, regionTo, 72),
    settings,
  )
  if (finer === null) return null
  const tail = (1 - settings.onsetLevel) / 2
  return {
    atMs: Math.round(quantile(finer, 0.5)),
    lowMs: Math.floor(quantile(finer, tail)),
    highMs: Math.ceil(quantile(finer, 1 - tail)),
    level: settings.onsetLevel,
    cleanLnRatio: finer.clean,
    riseLn: finer.rise,
    evidence: finer.evidence,
  }
}

/** Half of the means over the region where the onset may lie and as much again beside it, a quarter before, a quarter after. */
function focusEdges(firstMs: number, lastMs: number, fromMs: number, toMs: number, n: number): number[] {
  const wide = (toMs - fromMs) / 2
  const a = Math.min(Math.max(firstMs, fromMs - wide), lastMs)
  const b = Math.max(a, Math.min(lastMs, toMs + wide))
  const edges = a > firstMs ? evenEdges(firstMs, a, n / 4).slice(0, -1) : []
  edges.push(...evenEdges(a, b, n / 2).slice(0, -1))
  edges.push(...(b < lastMs ? evenEdges(b, lastMs, n / 4) : [lastMs + 1]))
  return edges
}

function pass(
  points: readonly GrowthPoint[],
  noise: Noise,
  edges: readonly number[],
  tausMs: number[],
  settings: GrowthSettings,
): Pass | null {
  const bins = binPoints(points, edges, noise.stepS * 1000)
  const n = bins.length
  const steps = wanderSteps(bins, noise)
  const filter = whitener(steps)
  const work = {
    bins,
    steps,
    y: new Float64Array(n),
    one: new Float64Array(n).fill(1),
    g: new Float64Array(n),
    slope: new Float64Array(n),
  }
  for (let i = 0; i < n; i++) work.y[i] = bins[i]!.lnRatio
  const whiteY = whiten(filter, work.y)
  const whiteOne = whiten(filter, work.one)
  const lastMs = bins[n - 1]!.tMs
  const p = settings.onsetPower
  const film = filmSpan(work.y)
  const logs: number[] = []
  let best = { log: -Infinity, clean: 0, rise: 0, evidence: 0 }
  for (const tau of tausMs) {
    shape(work, tau, Math.max(lastMs - tau, 1), film)
    const plain = leastSquares(whiteOne, whiten(filter, work.g), whiteY)
    if (plain === null) {
      logs.push(-Infinity)
      continue
    }
    const ragged = raggedFit(work, tau, plain.rise, lastMs, settings) ?? plain
    const { d, j } = ragged
    const log =
      p * ((d * d) / (2 * j) + ragged.level) - 0.5 * Math.log(j) + Math.log(Math.max(normalCdf(d * Math.sqrt(p / j)), 1e-300))
    logs.push(log)
    if (log > best.log && d > 0)
      best = { log, rise: ragged.rise, clean: ragged.clean, evidence: (plain.d * plain.d) / (2 * plain.j) }
  }
  if (best.log === -Infinity) return null
  let top = -Infinity
  for (const log of logs) top = Math.max(top, log)
  return { tausMs, weights: logs.map((log) => Math.exp(log - top)), clean: best.clean, rise: best.rise, evidence: best.evidence }
}

/** x at the end of the window from the rise of ln ratio so far: 4(1 − e^(−rise/4)), ends taken as means of a tenth. */
function filmSpan(values: Float64Array): number {
  const tenth = Math.max(1, Math.round(values.length / 10))
  const mean = (v: Float64Array) => v.reduce((sum, x) => sum + x, 0) / v.length
  const low = Math.min(mean(values.slice(0, tenth)), mean(values.slice(0, Math.max(1, values.length >> 1))))
  const rise = mean(values.slice(-Math.min(tenth, 3))) - low
  return 4 * -Math.expm1(-Math.max(0, rise) / 4)
}

/** Quantile of a density given on grid points, trapezoids between them. */
function quantile({ tausMs, weights }: Pass, probability: number): number {
  let total = 0
  const n = tausMs.length
  for (let i = 1; i < n; i++) total += ((weights[i - 1]! + weights[i]!) / 2) * (tausMs[i]! - tausMs[i - 1]!)
  let left = probability * total
  for (let i = 1; i < n; i++) {
    const a = weights[i - 1]!
    const b = weights[i]!
    const width = tausMs[i]! - tausMs[i - 1]!
    const mass = ((a + b) / 2) * width
    if (left <= mass && mass > 0) {
      const slope = (b - a) / width
      const x = Math.abs(slope * width) < 1e-9 * (a + b) ? left / a : (Math.sqrt(a * a + 2 * slope * left) - a) / slope
      return tausMs[i - 1]! + x
    }
    left -= mass
  }
  return tausMs[n - 1]!
}
