import { MonitorError } from '../errors.ts'
import { baselineDoubt, falseAlarmRate, inControlRunLength } from './baseline-doubt.ts'
import { cusumRunLength, siegmundRunLength } from './run-length.ts'

export interface CusumPromise {
  /** on average at most one false alarm of all charts together in so many hours in control */
  readonly falseAlarmHours: number
  /** one step of the chart [s] */
  readonly stepS: number
  /** how many charts share the promise */
  readonly charts: number
  /** sd of one step and the shift to be found, in the same unit (of the ratio, say) */
  readonly sigma: number
  readonly shift: number
  readonly sided?: 'one' | 'two'
  /** lag-1 correlation of the steps when the chart takes whitened steps x − φ x₋₁; null or left out: independent steps */
  readonly correlation?: number | null
  /** steps the baseline was estimated from; null or left out: known exactly */
  readonly baselineSteps?: number | null
  /** head start as a part of h, 0 to below 1; 0.5 by default */
  readonly headStart?: number
}

export interface CusumDesign {
  /** allowance and decision interval, in σ of what the chart takes */
  readonly k: number
  readonly h: number
  /** σ of what the chart takes: of a step, or of a whitened step */
  readonly chartSigma: number
  /** mean run length in control [steps] and its median, doubt about the baseline included */
  readonly arl0: number
  readonly median0: number
  /** hours between false alarms of all charts together, on average over what the baseline may be */
  readonly falseAlarmHours: number
  /** mean run length after the shift [steps], from a sum at 0, and with the head start */
  readonly arl1: number
  readonly arl1HeadStart: number
  readonly expectedDelayS: number
}

/** Allowance limits [σ]: a deposit is a ramp and passes the small shifts first, and noise is never known well enough for less. */
const LEAST_K = 0.1
const MOST_K = 1
/** Beyond this interval [σ] a chart finds nothing in useful time; a baseline that would need more cannot keep the promise. */
const MOST_H = 60

/**
 * From a promise to the chart. k is half the shift to be found, between 0.1 and 1 σ; h makes the false alarms of all charts together
 * keep the promise: per step 1/(falseAlarmHours·3600/stepS·charts), averaged over what an estimated baseline may be. Whitened steps
 * have σ√(1 − φ²) and show (1 − φ) of a lasting shift after their first.
 * A baseline too short for the promise ends at h = 60 and a `falseAlarmHours` below the one asked for: read it.
 * Valid for |φ| < 0.98, baselines of 10 steps or more, promises up to 1e8 steps.
 * Errors: CONFIG_RANGE for anything not positive, |φ| ≥ 0.98, fewer than 10 baseline steps, a head start outside [0, 1).
 */
export function designCusum(promise: CusumPromise): CusumDesign {
  const { falseAlarmHours, stepS, charts, sigma, shift, sided = 'one', headStart = 0.5 } = promise
  const correlation = promise.correlation ?? null
  const baselineSteps = promise.baselineSteps ?? null
  for (const [name, value] of Object.entries({ falseAlarmHours, stepS, charts, sigma, shift }))
    if (!(value > 0 && Number.isFinite(value))) throw new MonitorError('CONFIG_RANGE', `a chart needs ${name} > 0, got ${value}`)
  if (correlation !== null && !(Math.abs(correlation) < 0.98))
    throw new MonitorError('CONFIG_RANGE', `a chart needs a correlation within ±0.98, got ${correlation}`)
  if (baselineSteps !== null && !(baselineSteps >= 10))
    throw new MonitorError('CONFIG_RANGE', `a baseline needs 10 steps or more, got ${baselineSteps}`)
  if (!(headStart >= 0 && headStart < 1))
    throw new MonitorError('CONFIG_RANGE', `a head start is a part of h, 0 to below 1, got ${headStart}`)

  const phi = correlation ?? 0
  const chartSigma = sigma * Math.sqrt(1 - phi * phi)
  const lasting = ((1 - phi) * shift) / chartSigma
  const first = shift / chartSigma
  const k = Math.min(MOST_K, Math.max(LEAST_K, lasting / 2))
  const doubt = baselineSteps === null ? null : baselineDoubt(baselineSteps, correlation)
  const wanted = (falseAlarmHours * 3600 * charts) / stepS
  const h = intervalFor(k, wanted, (at) => 1 / falseAlarmRate({ k, h: at, sided }, doubt))
  const { mean, median } = inControlRunLength({ k, h, sided }, doubt)
  const arl1 = cusumRunLength({ k, h, sided }, lasting, first)
  return {
    k,
    h,
    chartSigma,
    arl0: mean,
    median0: median,
    falseAlarmHours: stepS / 3600 / charts / falseAlarmRate({ k, h, sided }, doubt),
    arl1,
    arl1HeadStart: cusumRunLength({ k, h, sided, start: headStart * h }, lasting, first),
    expectedDelayS: arl1 * stepS,
  }
}

/** The h whose run length is the wanted one: secant on its logarithm, nearly a straight line in h, kept between brackets. */
function intervalFor(k: number, wanted: number, runLength: (h: number) => number): number {
  let low = 0.05
  let high = 1
  while (siegmundRunLength(k, high, 0) < wanted && high < MOST_H) high = Math.min(MOST_H, 1.2 * high)
  const target = Math.log(wanted)
  while (Math.log(runLength(high)) < target && high < MOST_H) high = Math.min(MOST_H, 1.3 * high)
  if (Math.log(runLength(high)) < target) return high
  let lnLow = Math.log(runLength(low))
  let lnHigh = Math.log(runLength(high))
  if (lnLow >= target) return low
  let h = high
  for (let i = 0; i < 60; i++) {
    const line = low + ((high - low) * (target - lnLow)) / (lnHigh - lnLow)
    h = i % 3 === 2 ? (low + high) / 2 : line
    const ln = Math.log(runLength(h))
    if (Math.abs(ln - target) < 1e-9 || high - low < 1e-12) break
    if (ln < target) {
      low = h
      lnLow = ln
    } else {
      high = h
      lnHigh = ln
    }
  }
  return h
}
