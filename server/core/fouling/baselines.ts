import type { SegmentStep } from '../derive/observe.ts'
import { median } from '../stats/robust.ts'
import { type BaselineRecord, type SegmentWatch, steps } from './watch-state.ts'

/** One step of production goes into the window; says whether a baseline is due: provisional after 30 steps, final after 60. */
export function fillWindow(w: SegmentWatch, x: SegmentStep, fromMs: number, armed: boolean): 'provisional' | 'final' | null {
  if (w.baselined) return null
  if (w.window.dpPa.length === 0) w.window.fromMs = fromMs
  if (x.dpPa !== null) w.window.dpPa.push(x.dpPa)
  if (x.volFlowM3S !== null) w.window.flow.push(x.volFlowM3S)
  if (x.tempK !== null) w.window.tempK.push(x.tempK)
  if (!armed) return null
  if (w.window.dpPa.length === steps.provisional) return 'provisional'
  return w.window.dpPa.length >= steps.baseline ? 'final' : null
}

/** The baseline that a window gives; `sigma` of ln ratio. */
export const baselineOf = (
  w: SegmentWatch,
  toMs: number,
  sigma: number,
  provisional: boolean,
  commissioned: boolean,
): BaselineRecord => ({
  fromMs: w.window.fromMs,
  toMs,
  dpPa: median(w.window.dpPa),
  sigma,
  provisional,
  flowM3S: w.window.flow.length === 0 ? null : median(w.window.flow),
  tempK: w.window.tempK.length === 0 ? null : median(w.window.tempK),
  ...(commissioned ? { commissioned: true } : {}),
})
