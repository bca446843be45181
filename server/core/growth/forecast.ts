import { normalQuantile } from '../stats/normal.ts'
import { filmOfRatio, growthShape, ratioOfFilm } from './law.ts'
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
import { type WanderStep, wanderSteps } from './wander.ts'

export interface LimitForecast extends Interval {
  /** growth of the ratio, now [1/h] */
  readonly growthPerHour: number
}

/** State of the filter: wander z, growth clock ahead of time W [life times], clean level c, with covariance. */
interface Belief {
  z: number
  w: number
  c: number
  zz: number
  zw: number
  zc: number
  ww: number
  wc: number
  cc: number
}

interface Node {
  readonly weight: number
  /** time from now to the limit and its sd [ms] */
  readonly leftMs: number
  readonly sdMs: number
  readonly growthPerMs: number
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
 * limitRatio  the ratio over clean at which the limit is met, at the flow and temperature of now.
 * Null when the limit ratio is not above 1 and not met, when there are fewer than 4 points since the onset, when the growth does not
 * stand out of its noise by 2 sd or is below `leastPart` of the way in ln ratio (2 %), or when the median lies further ahead than `farthest` times the time grown so far (20).
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
  const nodes = mixture({
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
  const [low, at, high] = quantiles(nodes, [tail, 0.5, 1 - tail]) as [number, number, number]
  if (at > settings.farthest * (nowMs - onset.atMs)) return null
  let growth = 0
  for (const node of nodes) growth += node.weight * node.growthPerMs
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

/** What the clean means teach of level and wander; the level starts at 0 ± 0.05, as the ratio is over clean. */
function cleanBelief(clean: readonly Bin[], steps: readonly WanderStep[]): Belief {
  const b: Belief = { z: 0, w: 0, c: 0, zz: 1, zw: 0, zc: 0, ww: 0, wc: 0, cc: 0.0025 }
  for (let i = 0; i < clean.length; i++) observe(b, steps[i]!, 0, 0, clean[i]!.lnRatio)
  return b
}

/** One filter step: y = size·z + m + slope·(w − its mean) + c + white. Returns the log likelihood; a far innovation is widened. */
function observe(b: Belief, step: WanderStep, m: number, slope: number, y: number): number {
  const rho = step.rho
  b.z *= rho
  b.zz = rho * rho * b.zz + 1 - rho * rho
  b.zw *= rho
  b.zc *= rho
  const h = step.size
  const hz = h * b.zz + slope * b.zw + b.zc
  const hw = h * b.zw + slope * b.ww + b.wc
  const hc = h * b.zc + slope * b.wc + b.cc
  let s = h * hz + slope * hw + hc + step.white
  const e = y - h * b.z - m - b.c
  if (e * e > 12 * s) s = (e * e) / 12
  const kz = hz / s
  const kw = hw / s
  const kc = hc / s
  b.z += kz * e
  b.w += kw * e
  b.c += kc * e
  b.zz -= kz * hz
  b.zw -= kz * hw
  b.zc -= kz * hc
  b.ww -= kw * hw
  b.wc -= kw * hc
  b.cc -= kc * hc
  return -0.5 * (Math.log(s) + (e * e) / s)
}

interface Task {
  readonly bins: readonly Bin[]
  readonly steps: readonly WanderStep[]
  readonly falls: readonly number[]
  readonly base: Belief
  readonly lnLimit: number
  readonly onset: Interval
  readonly nowMs: number
  readonly anchor: number
  readonly lastSd: number
  readonly settings: GrowthSettings
}

/** One explanation of the growth, its life aside. */
interface Hypothesis {
  readonly onsetMs: number
  readonly k: number
  readonly fraction: number
  readonly filmLimit: number
  readonly cv: number
  /** after a slough-off growth goes on at the pace it had (true) or at the pace of the thinner film (false) */
  readonly keepsPace: boolean
}

function mixture(task: Task): Node[] {
  const { onset, nowMs, settings, base, lnLimit } = task
  // Nodes at the median and the 5 % and 95 % ends; 0.185 gives the variance of a normal distribution.
  const onsets = [
    { ms: onset.lowMs, weight: 0.185 },
    { ms: onset.atMs, weight: 0.63 },
    { ms: onset.highMs, weight: 0.185 },
  ]
  const raw: { log: number; left: number; sd: number; growth: number }[] = []
  let top = -Infinity
  const sloughed = task.falls.some((fall) => fall > 0)
  for (const { ms, weight: wOnset } of onsets) {
    const grownMs = nowMs - ms
    if (!(grownMs > 0)) continue
    for (const { fraction, weight: wFraction } of settings.fractions) {
      const filmLimit = filmOfRatio(Math.exp(lnLimit - base.c), fraction)
      for (const { k, weight: wLaw } of settings.laws) {
        for (const { cv, weight: wClock } of settings.clocks) {
          const prior = Math.log(wOnset * wFraction * wLaw * wClock)
          const { lnLifeMs, sd } = lifeNear(task, { onsetMs: ms, k, fraction, filmLimit, cv, keepsPace: false })
          const spacing = (2 * settings.gridReach * sd) / (settings.gridNodes - 1)
          for (const keepsPace of sloughed ? [false, true] : [false]) {
            for (let i = 0; i < settings.gridNodes; i++) {
              const lifeMs = Math.exp(lnLifeMs - settings.gridReach * sd + i * spacing)
              const node = follow(task, { onsetMs: ms, k, fraction, filmLimit, cv, keepsPace }, lifeMs)
              const log = prior + Math.log(spacing) + settings.forecastPower * node.log
              if (!(log > top - 30)) continue
              top = Math.max(top, log)
              raw.push({ log, left: node.left, sd: node.sd, growth: node.growth })
            }
          }
        }
      }
    }
  }
  let total = 0
  for (const r of raw) total += Math.exp(r.log - top)
  return raw
    .map((r) => ({ weight: Math.exp(r.log - top) / total, leftMs: r.left, sdMs: r.sd, growthPerMs: r.growth }))
    .filter((node) => node.weight > 1e-6)
}

/**
 * Where the life T of a hypothesis must lie to explain the rise at the anchor (the last mean, or the last before a slough-off), and
 * how loosely: sd of ln T from raggedness and noise. The grid over T lies around it, evenly in ln T.
 */
function lifeNear(task: Task, { onsetMs, k, fraction, filmLimit, cv }: Hypothesis): { lnLifeMs: number; sd: number } {
  const anchor = task.bins[task.anchor]!
  const rise = Math.max(0.002, anchor.lnRatio - task.base.c)
  const part = filmOfRatio(Math.exp(rise), fraction) / filmLimit
  const linear = Math.abs(k) < 1e-6
  const u = Math.max(0.01, Math.min(1.5, linear ? part : Math.log1p(Math.max(-0.99, part * Math.expm1(k))) / k))
  const film = Math.min(0.97, filmLimit * growthShape(k, u))
  const slope =
    (4 * fraction * (1 - film) ** -5 * filmLimit * (linear ? 1 : (k * Math.exp(k * u)) / Math.expm1(k))) /
    ratioOfFilm(film, fraction)
  const sd = Math.min(1.2, Math.hypot(cv / Math.sqrt(u), task.lastSd / Math.max(slope * u, 1e-6)))
  return { lnLifeMs: Math.log(Math.max(anchor.tMs - onsetMs, 1000) / u), sd }
}

/** One hypothesis followed through the data; times in lives T. */
function follow(task: Task, { onsetMs, k, fraction, filmLimit, cv, keepsPace }: Hypothesis, lifeMs: number) {
  const { bins, steps, falls, nowMs } = task
  let lost = 0
  const b: Belief = { ...task.base }
  const cv2 = cv * cv
  const linear = Math.abs(k) < 1e-6
  const unit = linear ? 1 : 1 / Math.expm1(k)
  let log = 0
  let before = 0
  let slopeNow = 0
  let ratioNow = 1
  for (let i = 0; i < bins.length; i++) {
    const t = (bins[i]!.tMs - onsetMs) / lifeMs
    if (t > before) {
      b.ww += cv2 * (t - before)
      before = t
    }
    const u = Math.max(0, t + b.w)
    const grow = linear ? 0 : Math.exp(k * u)
    const film = Math.max(0, Math.min(0.97, filmLimit * (linear ? u : (grow - 1) * unit) - lost))
    const gap = 1 - film
    const power = fraction / (gap * gap * gap * gap)
    const ratio = 1 - fraction + power
    const slope = t <= 0 ? 0 : (4 * power * filmLimit * (linear ? 1 : k * grow * unit)) / (gap * ratio)
    const fall = falls[i]!
    if (fall > 0 && keepsPace) {
      const rest = filmOfRatio(Math.max(1, Math.exp(bins[i]!.lnRatio - b.c)), fraction)
      lost += Math.max(0, film - rest)
      b.ww += task.lastSd ** 2 / Math.max(slope * slope, 1e-6)
      log -= Math.log(2 * fall)
      continue
    }
    if (fall > 0) b.ww += (2 * fall) ** 2 / Math.max(slope * slope, 1e-6)
    log += observe(b, steps[i]!, Math.log(ratio), slope, bins[i]!.lnRatio)
    slopeNow = slope
    ratioNow = ratio
  }
  const now = (nowMs - onsetMs) / lifeMs
  const end = 1 + lost / filmLimit
  const uEnd = linear ? end : Math.min(4, Math.log1p(Math.max(-0.99, end * Math.expm1(k))) / k)
  const left = Math.max(0, uEnd - now - b.w)
  const sd = Math.sqrt(Math.max(0, b.ww) + cv2 * (left + Math.max(0, now - before)))
  return { log, left: left * lifeMs, sd: sd * lifeMs, growth: (slopeNow * ratioNow) / lifeMs }
}

/** Equal shares of a standard normal distribution: the middles of eleven. */
const shares = Array.from({ length: 11 }, (_, i) => normalQuantile((i + 0.5) / 11))

/** Quantiles of the time left: each node lognormal about its own time, so that no part lies before now; summed on a log grid. */
function quantiles(nodes: readonly Node[], probabilities: readonly number[]): number[] {
  const centre = (node: Node) => Math.max(node.leftMs, 0.3 * node.sdMs, 1)
  const spread = nodes.map((node) => Math.sqrt(Math.log1p(Math.min(1.5, node.sdMs / centre(node)) ** 2)))
  const middle = nodes.map((node, i) => Math.log(centre(node)) - spread[i]! ** 2 / 2)
  let low = Infinity
  let high = -Infinity
  for (let i = 0; i < nodes.length; i++) {
    low = Math.min(low, middle[i]! + spread[i]! * shares[0]!)
    high = Math.max(high, middle[i]! + spread[i]! * shares[shares.length - 1]!)
  }
  const cells = new Float64Array(512)
  const width = Math.max((high - low) / (cells.length - 1), 1e-9)
  for (let i = 0; i < nodes.length; i++) {
    for (const share of shares)
      cells[Math.floor((middle[i]! + spread[i]! * share - low) / width + 1e-9)]! += nodes[i]!.weight / shares.length
  }
  let total = 0
  for (const cell of cells) total += cell
  return probabilities.map((probability) => {
    let left = probability * total
    for (let i = 0; i < cells.length; i++) {
      if (left <= cells[i]! && cells[i]! > 0) return Math.exp(low + width * (i + left / cells[i]!))
      left -= cells[i]!
    }
    return Math.exp(high)
  })
}
