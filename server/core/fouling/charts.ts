import { type CusumDesign, designCusum } from '../design/cusum-design.ts'
import { type CusumState, cusum } from '../detectors/cusum.ts'
import { type DriftState, drift } from '../detectors/drift.ts'
import type { GrowthPoint } from '../growth/points.ts'
import type { ChartReport } from '../report.ts'

/** Steps averaged to one point of the charts: five minutes on a one-second grid. */
export const stepsPerPoint = 10
/** What flow and viscosity corrections leave unexplained for hours, as a share of ΔP; noise alone would promise too much. Starting value. */
const modelSd = 0.004
/** The drift chart looks back a month: creeping growth is a matter of days. */
const driftConfig = { windowHours: 720, leastPerHour: 0, level: 0.99 }
/** Share of the rise to be found that the last half hour must stand at before the charts alone raise an alarm; below clean all of it, as a word on it is no alarm. */
const riseShare = 0.6
const fallShare = 1
const recentPoints = 6

/** The charts a plant engineer can follow by hand, one pair for each segment, from a final baseline on. Plain JSON. */
export interface ChartState {
  /** k, h in units of `design.chartSigma`, the σ of a surprise; σ of a point. */
  readonly design: CusumDesign
  readonly sigma: number
  /** Share of the wander left a point later, and of a surprise that is wander. */
  readonly memory: number
  readonly gain: number
  /** ln ratio that the charts stand on: that of the baseline, and steps explained since. */
  zeroLn: number
  sum: number
  n: number
  sumMs: number
  /** Wander expected in the next point. */
  expected: number
  recent: number[]
  cusum: CusumState
  drift: DriftState
  points: GrowthPoint[]
  /** Points since the start, and how often the CUSUM began to signal: the false-alarm interval observed while clean. */
  seen: number
  signals: number
  over: boolean
  /** The sum of the lower side exceeds the interval. */
  under?: boolean
}

export interface ChartReading {
  /** CUSUM of the upper side and its decision interval, in σ of a surprise. */
  readonly cusum: number
  readonly h: number
  readonly cusumOver: boolean
  /** Robust slope with its 99 % interval, ln ratio per hour; null while not told apart from none. */
  readonly drift: { readonly perHour: number; readonly low: number; readonly high: number } | null
  /** Both signal and the last half hour stands high: the charts alone would raise an alarm. */
  readonly alarms: boolean
  /** The lower side signals and the last half hour stands as far below clean as the rise to be found: nothing that a deposit does. */
  readonly below: boolean
}

/**
 * Designs the pair of charts of a segment from the promise: on average one false fouling alarm per skid in `falseAlarmDays` of clean
 * production, all `charts` together; find a rise of `riseToFindPct`. Points are means of ten detector steps; the wander (mean-reverting,
 * `wanderTauS`) correlates them. The CUSUM takes what of a point the points before did not foretell, e = x − x̂, x̂ ← ρ(x̂ + K·e), which is white
 * for wander plus white noise (steady Kalman filter); x − φ·x₋₁ is not, and signalled 3.5 times too often. A lasting shift δ shows as δ(1 − ρ)/(1 − ρ(1 − K)).
 */
export function startCharts(
  promise: { readonly falseAlarmDays: number; readonly riseToFindPct: number },
  charts: number,
  noise: { readonly whiteSd: number; readonly wanderSd: number; readonly wanderTauS: number; readonly stepS: number },
  zeroLn: number,
): ChartState {
  const pointS = stepsPerPoint * noise.stepS
  const slow = noise.wanderSd ** 2
  const white = noise.whiteSd ** 2 / stepsPerPoint + modelSd ** 2
  const memory = Math.exp(-pointS / noise.wanderTauS)
  const { gain, variance } = steady(memory, slow, white)
  const design = designCusum({
    falseAlarmHours: 24 * promise.falseAlarmDays,
    stepS: pointS,
    charts,
    sigma: Math.sqrt(variance),
    shift: (Math.log1p(promise.riseToFindPct / 100) * (1 - memory)) / (1 - memory * (1 - gain)),
  })
  return {
    design, sigma: Math.sqrt(slow + white), memory, gain, zeroLn, sum: 0, n: 0, sumMs: 0, expected: 0, recent: [],
    cusum: cusum.start({ k: design.k, h: design.h, cap: 2 * design.h, headStart: 0.5 }),
    drift: drift.start(driftConfig), points: [], seen: 0, signals: 0, over: false,
  } // biome-ignore format: a list
}

/**
 * Something that is no growth has been told of, and moved the zero by `byLn`: what stood in the sum until then goes. The drift stays, since a few points
 * among those of a month do not turn a robust slope. Changes the state in place.
 */
export function resumeCharts(c: ChartState, byLn: number): void {
  c.zeroLn += byLn
  c.sum = c.sumMs = c.n = c.expected = 0
  c.recent = []
  c.cusum = cusum.start({ k: c.design.k, h: c.design.h, cap: 2 * c.design.h })
  c.over = c.under = false
}

/** Steady gain of the filter of a mean-reverting wander of variance `slow` in white noise, and the variance of its surprises. */
function steady(memory: number, slow: number, white: number): { gain: number; variance: number } {
  let ahead = slow
  for (let i = 0; i < 500; i++) ahead = memory ** 2 * ahead * (white / (ahead + white)) + slow * (1 - memory ** 2)
  return { gain: ahead / (ahead + white), variance: ahead + white }
}

/** One detector step; ln ratio null leaves everything as it is. Changes the state in place. */
export function stepCharts(c: ChartState, tMs: number, lnRatio: number | null): void {
  if (lnRatio === null) return
  c.sum += lnRatio - c.zeroLn
  c.sumMs += tMs
  c.n++
  if (c.n < stepsPerPoint) return
  const x = c.sum / c.n
  const at = c.sumMs / c.n
  c.sum = c.sumMs = c.n = 0
  const surprise = x - c.expected
  c.expected = c.memory * (c.expected + c.gain * surprise)
  const out = cusum.step({ k: c.design.k, h: c.design.h, cap: 2 * c.design.h }, c.cusum, {
    tMs: at,
    z: surprise / c.design.chartSigma,
  })
  c.cusum = out.state
  const over = out.verdict.kind === 'shift' && out.verdict.side === 'high'
  if (over && !c.over) c.signals++
  c.over = over
  c.under = out.state.low.sum > c.design.h
  c.seen++
  c.recent = [...c.recent, x].slice(-recentPoints)
  c.drift = drift.step(driftConfig, c.drift, { tMs: at, z: x / c.sigma }).state
  c.points.push({ tMs: at, lnRatio: x })
  if (c.points.length > 480) c.points = c.points.filter((_, i) => i % 2 === 0)
}

/** The chart as the report shows it; `stepS` is the detector step. */
export function chartReport(c: ChartState, riseToFindPct: number, stepS: number): ChartReport {
  const now = readCharts(c, riseToFindPct)
  const hours = (c.seen * stepsPerPoint * stepS) / 3600
  return {
    k: c.design.k,
    h: c.design.h,
    sigma: c.design.chartSigma,
    cusum: now.cusum,
    cusumLow: c.cusum.low.sum,
    designedHours: c.design.falseAlarmHours,
    observedHours: c.signals === 0 ? null : hours / c.signals,
    hours,
    driftPerHour: now.drift === null ? null : { at: now.drift.perHour, low: now.drift.low, high: now.drift.high },
  }
}

/** Where the last half hour stands over the charts' zero, ln ratio. */
export const standing = (c: ChartState): number => c.recent.reduce((a, b) => a + b, 0) / Math.max(1, c.recent.length)

/** The same less its highest and lowest point: an instrument that jumped is told within one of them. */
function standingMost(c: ChartState): number {
  const sorted = [...c.recent].sort((a, b) => a - b).slice(1, -1)
  return sorted.reduce((a, b) => a + b, 0) / Math.max(1, sorted.length)
}

export function readCharts(c: ChartState, riseToFindPct: number): ChartReading {
  const v = c.drift.verdict
  const rising =
    v.kind === 'rising' ? { perHour: v.perHour * c.sigma, low: v.lowPerHour * c.sigma, high: v.highPerHour * c.sigma } : null
  const mean = standing(c)
  const rise = Math.log1p(riseToFindPct / 100)
  const full = c.recent.length === recentPoints
  const stands = full && mean > riseShare * rise
  return {
    cusum: c.cusum.high.sum,
    h: c.design.h,
    cusumOver: c.over,
    drift: rising,
    alarms: c.over && rising !== null && stands,
    below: c.under === true && full && standingMost(c) < -fallShare * rise,
  }
}
