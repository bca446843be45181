import { explainedWidth, explanations } from './explanations.ts'
import { cleanBelief } from './growth-filter.ts'
import { mixtureQuantiles } from './mixture-quantiles.ts'
import {
  type Bin,
  binPoints,
  evenEdges,
  findSloughs,
  finitePoints,
  type GrowthPoint,
  type Interval,
  type Noise,
  withoutSpikes,
} from './points.ts'
import { type GrowthSettings, growthDefaults } from './settings.ts'
import { wanderSteps } from './wander.ts'

export interface LimitForecast extends Interval {
  /** growth of the ratio, now [1/h] */
  readonly growthPerHour: number
}

/**
 * When will the ratio reach the limit: a mixture over the time from onset to limit, growth law, constricted length and onset, each
 * weighed by how well it tells the growth so far.
 *
 *   ln r = c + m(u),  m from the film δ = δ_limit (e^(Ku) − 1)/(e^K − 1) on the length fraction f,  u = (t − onset + W)/T
 *
 * W is the raggedness of growth: a clock that wanders with variance cv²·T per time, followed by a Kalman filter together with the
 * clean level c and the wander of the measurement. The interval holds the doubt about all of them and the ragged growth still to
 * come. After a slough-off growth goes on either at the pace of the film that is left or at the pace it had; both are weighed.
 * Held less often than it says: growth twice as ragged as the settings know, and a law they lack (a sigmoid), 65 % instead of 80.
 * limitRatio  the ratio over clean at which the limit is met, at the flow and temperature of now.
 * Null when the limit ratio is not above 1 and not met, when there are fewer than 4 points since the onset, when the growth does not
 * stand out of its noise by 2 sd or is below `leastPart` of the way in ln ratio (2 %), or when the median lies further ahead than
 * `farthest` times the time grown so far (20).
 * At or over the limit already (mean of the last points): now, with an interval of no length.
 */
export function forecastLimit(
  points: readonly GrowthPoint[],
  noise: Noise,
  onset: Interval,
  limitRatio: number,
  nowMs: number,
  settings: GrowthSettings = growthDefaults,
): LimitForecast | null {
  const seen = withoutSpikes(
    finitePoints(points).filter((p) => p.tMs <= nowMs),
    noise,
    settings.spikeSigmas,
  )
  const stepMs = noise.stepS * 1000
  const grownFrom = Math.min(onset.atMs, nowMs)
  const grown = seen.filter((p) => p.tMs >= grownFrom)
  if (grown.length < 4 || !(limitRatio > 0) || !Number.isFinite(limitRatio)) return null
  const lnLimit = Math.log(limitRatio)
  const sloughs = findSloughs(grown, noise, settings.sloughSigmas, settings.sloughLeast)
  const clean = binPoints(seen, evenEdges(seen[0]!.tMs, Math.max(seen[0]!.tMs, onset.lowMs), 4), stepMs)
  // a step that straddles a slough-off belongs to neither side; its mean would look like ragged growth
  const whole = grown.filter((p) => sloughs.every((f) => p.tMs < f.tMs - 2.5 * stepMs || p.tMs > f.tMs + 1.5 * stepMs))
  if (whole.length < 4) return null
  const bins = binPoints(whole, growthEdges(grownFrom, whole[whole.length - 1]!.tMs, sloughs, settings.forecastMeans), stepMs)
  const steps = wanderSteps([...clean, ...bins], noise)
  const base = cleanBelief(clean, steps)
  const last = bins[bins.length - 1]!
  const recent = whole.slice(-4)
  const nowLn = recent.reduce((sum, p) => sum + p.lnRatio, 0) / recent.length
  const lastSd = Math.hypot(steps[steps.length - 1]!.size, Math.sqrt(steps[steps.length - 1]!.white), Math.sqrt(base.cc))
  if (nowLn >= lnLimit) {
    return { atMs: nowMs, lowMs: nowMs, highMs: nowMs, level: settings.forecastLevel, growthPerHour: localGrowth(bins, nowLn) }
  }
  const rise = last.lnRatio - base.c
  if (!(lnLimit - base.c > 0.01) || rise < 2 * lastSd || rise < settings.leastPart * (lnLimit - base.c)) return null

  const falls = bins.map((bin, i) =>
    sloughs.reduce((sum, f) => (f.tMs <= bin.tMs && (i === 0 || f.tMs > bins[i - 1]!.tMs) ? sum + f.fall : sum), 0),
  )
  const firstFall = falls.findIndex((fall) => fall > 0)
  const anchor = firstFall > 0 ? firstFall - 1 : bins.length - 1
  const nodes = explanations({
    bins,
    steps: steps.slice(clean.length),
    falls,
    base,
    lnLimit,
    onset,
    nowMs,
    anchor,
    lastSd,
    settings,
  })
  if (nodes.length === 0) return null
  const tail = (1 - settings.forecastLevel) / 2
  const [low, at, high] = mixtureQuantiles(nodes, [tail, 0.5, 1 - tail]) as [number, number, number]
  if (at > settings.farthest * (nowMs - onset.atMs)) return null
  let growth = 0
  for (let at = 0; at < nodes.length; at += explainedWidth) growth += nodes[at]! * nodes[at + 3]!
  return {
    atMs: Math.round(nowMs + at),
    lowMs: Math.floor(nowMs + low),
    highMs: Math.ceil(nowMs + high),
    level: settings.forecastLevel,
    growthPerHour: growth * 3_600_000,
  }
}

/** Even stretches of the growth, cut at each slough-off. */
function growthEdges(fromMs: number, toMs: number, sloughs: readonly { tMs: number }[], n: number): number[] {
  const edges = evenEdges(fromMs, toMs, n)
  for (const { tMs } of sloughs) if (!edges.includes(tMs)) edges.push(tMs)
  return edges.sort((a, b) => a - b)
}

/** Slope of the ratio over the last quarter of the growth [1/h], never below 0. */
function localGrowth(bins: readonly Bin[], nowLn: number): number {
  const from = bins[Math.max(0, bins.length - 1 - Math.ceil(bins.length / 4))]!
  const to = bins[bins.length - 1]!
  if (to.tMs <= from.tMs) return 0
  return Math.max(0, ((to.lnRatio - from.lnRatio) / (to.tMs - from.tMs)) * Math.exp(nowLn) * 3_600_000)
}
