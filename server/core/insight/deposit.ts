import { depositReadings } from '../deposit/readings.ts'
import { impliedCapture } from '../deposit/run-length.ts'
import { dpUncertainty } from '../figures/dp-uncertainty.ts'
import type { SegmentOperation } from '../figures/operation.ts'
import type { Interval } from '../growth/points.ts'
import type { DepositReport } from '../report.ts'
import type { Skid } from '../skid.ts'

export interface DepositInput {
  readonly skid: Skid
  /** The segment at its clean working point. */
  readonly op: SegmentOperation
  readonly ratio: number
  readonly baseline: { readonly dpPa: number; readonly sigma: number }
  readonly onset: Interval | null
  readonly nowMs: number
  /** Solid that the feeds' water makes in this segment, m³/s; null where not known. */
  readonly solidM3S: number | null
}

/**
 * What the ratio of a segment with a deposit stands for: the films and constrictions that would show it, what one ΔP leaves open, and the share
 * of the lithium hydroxide made that must have stayed. The ratio's interval is ±2 sd,
 *   sd² = σ² + ((r − 1) u/ΔP0)²
 * σ of the clean ratio, u of the taps on the clean ΔP0: an offset shared by clean and fouled ΔP acts on what was added only (SIG-08).
 * Null where channel, liquid or flow is missing, or nothing is there to be explained. Errors: FLUID_RANGE, HYDRAULICS_RANGE.
 */
export function depositInsight(x: DepositInput): DepositReport | null {
  const { channel, fluid, massFlowKgS, tempK, spec } = x.op
  if (channel === null || fluid === null || massFlowKgS === null || massFlowKgS <= 0 || !(x.ratio > 1)) return null
  const { rhoKgM3, viscPaS } = fluid.at(tempK)
  const at = { massFlowKgS, rhoKgM3, viscPaS }
  const { uPa } = dpUncertainty(x.skid, spec)
  const sd = Math.hypot(x.baseline.sigma, ((x.ratio - 1) * (uPa ?? 0)) / x.baseline.dpPa)
  const ratio = { value: x.ratio, low: Math.max(1, x.ratio - 2 * sd), high: x.ratio + 2 * sd }
  const { readings, cannotTell, couldTell } = depositReadings(channel, at, ratio)
  const { onset, solidM3S, nowMs } = x
  const capture = (to: number, sinceMs: number): number | null =>
    solidM3S === null || nowMs <= sinceMs ? null : impliedCapture(channel, at, 1, to, (nowMs - sinceMs) / 1000, solidM3S)
  const share = onset === null ? null : capture(ratio.value, onset.atMs)
  return {
    ratio: ratio.value,
    low: ratio.low,
    high: ratio.high,
    readings: readings.map((r) => ({
      kind: r.kind,
      lengthShare: r.lengthShare,
      boreRatio: r.boreRatio,
      thicknessMm: r.thicknessM === null ? null : r.thicknessM * 1000,
      depositMl: r.depositM3 === null ? null : r.depositM3 * 1e6,
      volumeLost: r.volumeLost,
    })),
    cannotTell,
    couldTell,
    capture:
      share === null || onset === null || solidM3S === null
        ? null
        : {
            share,
            low: capture(ratio.low, onset.lowMs),
            high: capture(ratio.high, onset.highMs),
            solidMlPerHour: solidM3S * 3.6e9,
          },
  }
}
