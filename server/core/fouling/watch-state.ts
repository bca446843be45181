import type { BankEvent, BankState, LearnedExponent } from '../bank/bank-state.ts'
import type { SegmentObservation } from '../bank/model.ts'
import type { ObserveState, SegmentStep } from '../derive/observe.ts'
import type { GrowthPoint, Interval } from '../growth/points.ts'
import type { LimitName } from '../sequence.ts'
import type { ChartReading, ChartState } from './charts.ts'
import type { Mode, ModeState } from './mode.ts'

export interface BaselineRecord {
  fromMs: number
  toMs: number
  dpPa: number
  sigma: number
  provisional: boolean
  flowM3S: number | null
  tempK: number | null
  /** A step test vouched for zero or exponent beneath it. */
  commissioned?: boolean
}

/** What the readings (or a step test) taught of a segment besides its level. */
export interface Learned {
  readonly flow: LearnedExponent
  readonly viscosity: LearnedExponent
  /** Zero offset of ΔP as read with the pumps at rest, Pa; null where they never stood still. */
  readonly zeroPa: number | null
}

export interface ForecastRecord extends Interval {
  readonly limit: LimitName
}

/** A ΔP that must not be passed, Pa. */
export interface DpLimit {
  readonly name: LimitName
  readonly pa: number
}

/** A deposit (or blockage) that stands in a segment. */
export interface Growth {
  raisedMs: number
  onset: Interval | null
  /** Rise of ln ratio at the last fit of the onset; fitted once more at twice that, then left. */
  riseAtFit: number
  fits: number
  points: GrowthPoint[]
  peakLn: number
  forecast: ForecastRecord | null
  growthPerHour: number | null
  lastForecastMs: number
}

export interface SegmentWatch {
  recent: number[]
  last: number | null
  max: number | null
  growth: Growth | null
  hindsight: Interval | null
  window: { dpPa: number[]; flow: number[]; tempK: number[]; fromMs: number }
  baselined: boolean
  /** The charts by the promise, from the final baseline on; null before. */
  charts: ChartState | null
  /** ln of the clean ΔP over the last ten minutes, newest last. */
  cleanLn: number[]
  /** Steps of production in a row without what a ratio needs; missing in a state of an older build. */
  blind?: number
}

export interface WatchState {
  mode: ModeState
  observer: ObserveState
  bank: BankState | null
  segments: SegmentWatch[]
  history: { tMs: number; o: (SegmentObservation | null)[] }[]
}

export type WatchEvent =
  | { readonly kind: 'bank'; readonly event: BankEvent; readonly onset: Interval | null; readonly ratio: number | null }
  /** Both charts of a segment signal and no explanation of the bank has taken the rise: creeping growth. `shared`: its neighbours rise alike. */
  | {
      readonly kind: 'creep'
      readonly segment: number
      readonly onset: Interval | null
      readonly ratio: number
      readonly reading: ChartReading
      readonly shared: boolean
    }
  /** The lower side of the chart: a slow fall below clean by this share, told once. */
  | { readonly kind: 'below'; readonly segment: number; readonly ratio: number; readonly share: number }
  /** Produced for a quarter of an hour without the readings that a ratio needs: nothing is judged, which must not pass for clean. */
  | { readonly kind: 'unjudged'; readonly segment: number; readonly lacks: 'dp' | 'flow' | 'temperature' | 'signal' }
  | { readonly kind: 'onset'; readonly segment: number; readonly onset: Interval }
  | { readonly kind: 'forecast'; readonly segment: number; readonly forecast: ForecastRecord | null }
  | { readonly kind: 'cleared'; readonly segment: number; readonly why: 'stopped' | 'fell back' }
  | { readonly kind: 'baseline'; readonly segment: number; readonly baseline: BaselineRecord }

export interface SegmentNow {
  readonly ratio: number | null
  readonly step: SegmentStep
  readonly lnRatio: number | null
  readonly whiteSd: number
  readonly wanderSd: number
}

export interface WatchStep {
  readonly mode: Mode
  readonly now: SegmentNow[]
  readonly events: WatchEvent[]
}

/** Steps: of history kept for an onset; in a baseline before it is final; averaged for the ratio shown; between forecasts. */
export const steps = { history: 420, baseline: 60, provisional: 30, shown: 3, forecast: 2, clean: 20, pointsKept: 480, blind: 30 }

const freshWindow = (): SegmentWatch['window'] => ({ dpPa: [], flow: [], tempK: [], fromMs: 0 })

export const freshSegment = (): SegmentWatch => ({
  recent: [],
  last: null,
  max: null,
  growth: null,
  hindsight: null,
  window: freshWindow(),
  baselined: false,
  charts: null,
  cleanLn: [],
})

/** What is normal may have changed: the baseline, and the charts that stand on it, are to be found anew. */
export function forgetBaseline(w: SegmentWatch): void {
  w.baselined = false
  w.charts = null
  w.window = freshWindow()
  w.recent = []
}

/** Ratio as shown, over the last few steps; the caller has at least one. */
export const shownRatio = (w: SegmentWatch): number => Math.exp(w.recent.reduce((a, x) => a + x, 0) / w.recent.length)
