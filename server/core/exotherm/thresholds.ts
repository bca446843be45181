import { type Pace, riseK, type Series } from './series.ts'
import type { ExothermDetector } from './types.ts'

export const exothermDefaults = {
  blockS: 30,
  /** Least thresholds, K, on 4-s means: one thermocouple, mean of a reactor or of all, rise over 12 or 25 s of either. */
  oneK: 0.45,
  meanK: 0.28,
  riseK: 0.5,
  sds: 5.5,
  /** What the model may err by: share of the difference of the lags still open, of the gain for the feed's lag, sds of the offset. */
  lagShare: 0.7,
  flowShare: 0.9,
  offsetSds: 2,
  ratioHighShare: 2 / 3,
  /** Noise is what it is, whatever the feeds do. */
  ratioHighSds: 4.5,
  coldShare: 2,
  coldS: 30,
} as const
const d = exothermDefaults

/** What one scan of one reactor showed. */
export interface Finding {
  sum: number
  /** Sum of the latest excesses, not averaged over 4 s. */
  rawSum: number
  allow: number
  n: number
  meanK: number
  hottest: number | null
  hottestK: number
  hotSpot: number | null
  hotSpotC: number | null
  excessK: number
  thresholdK: number
  of: 'thermocouple' | 'reactor' | 'all' | null
  nearest: Series | null
  /** Series that spoke, and where it was by rise: the rise and its limit, K. */
  spoke: Series | null
  risenK: number
  riseLimitK: number
  detector: ExothermDetector | null
  under: boolean
  runaway: boolean
  cold: boolean
}

export const noFinding = (): Finding => ({
  sum: 0,
  rawSum: 0,
  allow: 0,
  n: 0,
  meanK: 0,
  hottest: null,
  hottestK: Number.NEGATIVE_INFINITY,
  hotSpot: null,
  hotSpotC: null,
  excessK: 0,
  thresholdK: 1e9,
  of: null,
  nearest: null,
  spoke: null,
  risenK: 0,
  riseLimitK: 0,
  detector: null,
  under: true,
  runaway: false,
  cold: false,
})

/** Clears a finding for the next scan; one object a reactor is kept, field by field, since this runs at every scan. */
export function clearFinding(f: Finding): void {
  f.sum = f.rawSum = f.allow = f.n = f.meanK = f.excessK = f.risenK = f.riseLimitK = 0
  f.hottest = f.hotSpot = f.hotSpotC = f.of = f.nearest = f.spoke = f.detector = null
  f.hottestK = Number.NEGATIVE_INFINITY
  f.thresholdK = 1e9
  f.under = true
  f.runaway = f.cold = false
}

const rank = { excess: 2, rise: 1, runaway: 0 }
/** excess outranks rise outranks runaway: the plainest of those that speak is named. */
export function speak(f: Finding, by: ExothermDetector): void {
  if (f.detector === null || rank[by] > rank[f.detector]) f.detector = by
}

/** One 4-s mean `x`, and the latest excess `raw`, against the thresholds of its series; notes in the finding what follows. */
export function test(
  f: Finding,
  series: Series,
  x: number,
  raw: number,
  leastK: number,
  allow: number,
  ratioHigh: boolean,
  p: Pace,
  of: 'thermocouple' | 'reactor' | 'all',
): void {
  const share = ratioHigh ? d.ratioHighShare : 1
  const noiseK = (ratioHigh ? d.ratioHighSds : d.sds) * series.sdK
  const level = Math.max(share * leastK, noiseK) + allow
  const rise = Math.max(share * d.riseK, Math.SQRT2 * noiseK) + allow
  const risen = riseK(series, p, x)
  // The latest reading itself must be half way there: one wild reading lives on in the mean for 4 s and is no excursion.
  const high = x > level && raw > 0.5 * level
  const up = risen !== null && risen > rise && risen + raw - x > 0.5 * rise
  series.high = high || up ? series.high + 1 : 0
  if (series.high >= 2) {
    speak(f, high ? 'excess' : 'rise')
    f.spoke ??= series
    if (up && risen - rise > f.risenK - f.riseLimitK) {
      f.risenK = risen
      f.riseLimitK = rise
    }
  }
  if (x > 0.5 * level) f.under = false
  if (x - level > f.excessK - f.thresholdK) {
    f.excessK = x
    f.thresholdK = level
    f.of = of
    f.nearest = series
  }
  const coldBy = d.coldShare * Math.max(leastK, d.sds * series.sdK) + allow
  series.low = x < -coldBy ? series.low + 1 : 0
  if (of !== 'all' && series.low * p.scanS >= d.coldS && series.low >= 2) f.cold = true
}
