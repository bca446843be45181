import type { Belief } from './growth-filter.ts'
import { filmOfRatio, growthShape, ratioOfFilm } from './law.ts'
import type { Bin, Interval } from './points.ts'
import type { GrowthSettings } from './settings.ts'
import type { WanderStep } from './wander.ts'

/** Explanations of the growth, packed: of each its weight, time left from now to the limit with its sd [ms], growth of the ratio now [1/ms]. */
export type Explained = Float64Array
export const explainedWidth = 4

/** The growth so far, and what is asked. */
export interface Task {
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
  keepsPace: boolean
}

/** Every explanation the settings allow, weighed by how well it tells the growth so far; the weights sum to 1. */
export function explanations(task: Task): Explained {
  const { onset, nowMs, settings, base, lnLimit } = task
  // Nodes at the median and the 5 % and 95 % ends; 0.185 gives the variance of a normal distribution.
  const onsets = [
    { ms: onset.lowMs, weight: 0.185 },
    { ms: onset.atMs, weight: 0.63 },
    { ms: onset.highMs, weight: 0.185 },
  ]
  const raw: number[] = []
  const seen = seenOf(task)
  const node = new Float64Array(4)
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
          const hypothesis: Hypothesis = { onsetMs: ms, k, fraction, filmLimit, cv, keepsPace: false }
          const { lnLifeMs, sd } = lifeNear(task, hypothesis)
          const spacing = (2 * settings.gridReach * sd) / (settings.gridNodes - 1)
          for (const keepsPace of sloughed ? [false, true] : [false]) {
            for (let i = 0; i < settings.gridNodes; i++) {
              const lifeMs = Math.exp(lnLifeMs - settings.gridReach * sd + i * spacing)
              hypothesis.keepsPace = keepsPace
              follow(seen, hypothesis, lifeMs, node)
              const left = node[atLeft]!
              // the question may come at any time of a life alike: a life of twice the length has half the chance to be at this age
              const age = Math.log(grownMs / (grownMs + left))
              const log = prior + Math.log(spacing) + age + settings.forecastPower * node[atLog]!
              if (!(log > top - 30)) continue
              top = Math.max(top, log)
              raw.push(log, left, node[atSd]!, node[atGrowth]!)
            }
          }
        }
      }
    }
  }
  let total = 0
  for (let at = 0; at < raw.length; at += explainedWidth) total += Math.exp(raw[at]! - top)
  const out = new Float64Array(raw.length)
  let filled = 0
  for (let at = 0; at < raw.length; at += explainedWidth) {
    const weight = Math.exp(raw[at]! - top) / total
    if (!(weight > 1e-6)) continue
    out[filled] = weight
    out[filled + 1] = raw[at + 1]!
    out[filled + 2] = raw[at + 2]!
    out[filled + 3] = raw[at + 3]!
    filled += explainedWidth
  }
  return out.subarray(0, filled)
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

/** What became of a hypothesis: ln likelihood, time left to the limit with its sd, ms, growth of the ratio now, 1/ms. */
const [atLog, atLeft, atSd, atGrowth] = [0, 1, 2, 3] as const

/** The growth so far, packed: a row of `seenWidth` numbers for each bin, then the belief from before. */
interface Seen {
  readonly count: number
  readonly data: Float64Array
  readonly nowMs: number
  readonly lastSd: number
}
const seenWidth = 6

function seenOf({ bins, steps, falls, base: b, nowMs, lastSd }: Task): Seen {
  const rows = bins.flatMap((bin, i) => [bin.tMs, bin.lnRatio, falls[i]!, steps[i]!.rho, steps[i]!.size, steps[i]!.white])
  const data = Float64Array.from([...rows, b.z, b.w, b.c, b.zz, b.zw, b.zc, b.ww, b.wc, b.cc])
  return { count: bins.length, data, nowMs, lastSd }
}

/**
 * One hypothesis followed through the data; times in lives T. Thousands are followed a forecast: `out` takes the result, and the step of
 * `growth-filter.ts` is written out here in local numbers, in the same order.
 */
function follow({ count, data, nowMs, lastSd }: Seen, hypothesis: Hypothesis, lifeMs: number, out: Float64Array): void {
  const { onsetMs, k, fraction, filmLimit, cv, keepsPace } = hypothesis
  const from = count * seenWidth
  let z = data[from]!
  let w = data[from + 1]!
  let c = data[from + 2]!
  let zz = data[from + 3]!
  let zw = data[from + 4]!
  let zc = data[from + 5]!
  let ww = data[from + 6]!
  let wc = data[from + 7]!
  let cc = data[from + 8]!
  const cv2 = cv * cv
  const linear = Math.abs(k) < 1e-6
  const unit = linear ? 1 : 1 / Math.expm1(k)
  let lost = 0
  let log = 0
  let before = 0
  let slopeNow = 0
  let ratioNow = 1
  for (let at = 0; at < from; at += seenWidth) {
    const lnRatio = data[at + 1]!
    const t = (data[at]! - onsetMs) / lifeMs
    if (t > before) {
      ww += cv2 * (t - before)
      before = t
    }
    const u = Math.max(0, t + w)
    const grow = linear ? 0 : Math.exp(k * u)
    const film = Math.max(0, Math.min(0.97, filmLimit * (linear ? u : (grow - 1) * unit) - lost))
    const gap = 1 - film
    const power = fraction / (gap * gap * gap * gap)
    const ratio = 1 - fraction + power
    const slope = t <= 0 ? 0 : (4 * power * filmLimit * (linear ? 1 : k * grow * unit)) / (gap * ratio)
    const fall = data[at + 2]!
    if (fall > 0 && keepsPace) {
      const rest = filmOfRatio(Math.max(1, Math.exp(lnRatio - c)), fraction)
      lost += Math.max(0, film - rest)
      ww += lastSd ** 2 / Math.max(slope * slope, 1e-6)
      log -= Math.log(2 * fall)
      continue
    }
    if (fall > 0) ww += (2 * fall) ** 2 / Math.max(slope * slope, 1e-6)
    const rho = data[at + 3]!
    const size = data[at + 4]!
    const white = data[at + 5]!
    z *= rho
    zz = rho * rho * zz + 1 - rho * rho
    zw *= rho
    zc *= rho
    const hz = size * zz + slope * zw + zc
    const hw = size * zw + slope * ww + wc
    const hc = size * zc + slope * wc + cc
    let s = size * hz + slope * hw + hc + white
    const e = lnRatio - size * z - Math.log(ratio) - c
    if (e * e > 25 * s) s = (e * e) / 25
    const kz = hz / s
    const kw = hw / s
    const kc = hc / s
    z += kz * e
    w += kw * e
    c += kc * e
    zz -= kz * hz
    zw -= kz * hw
    zc -= kz * hc
    ww -= kw * hw
    wc -= kw * hc
    cc -= kc * hc
    log += -0.5 * (Math.log(s) + (e * e) / s)
    slopeNow = slope
    ratioNow = ratio
  }
  const now = (nowMs - onsetMs) / lifeMs
  const end = 1 + lost / filmLimit
  const uEnd = linear ? end : Math.min(4, Math.log1p(Math.max(-0.99, end * Math.expm1(k))) / k)
  const left = Math.max(0, uEnd - now - w)
  const sd = Math.sqrt(Math.max(0, ww) + cv2 * (left + Math.max(0, now - before)))
  out[atLog] = log
  out[atLeft] = left * lifeMs
  out[atSd] = sd * lifeMs
  out[atGrowth] = (slopeNow * ratioNow) / lifeMs
}
