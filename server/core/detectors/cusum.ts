import { MonitorError } from '../errors.ts'
import { type Detector, quiet, type Verdict } from './detector.ts'

export interface CusumConfig {
  /** allowance [σ], half the smallest shift worth finding */
  readonly k: number
  /** decision interval [σ], from `designCusum` */
  readonly h: number
  /** where the sums stop [σ]; null for the textbook chart, whose sum unwinds for as long as a fault lasted. At 2h it clears h/k after. */
  readonly cap: number | null
  /** where both sums start, as a part of h: 0 for none, 0.5 for a fast initial response after a restart or a flush */
  readonly headStart?: number
}

/** One sum: its value [σ], the first sample since it was last zero (null before any) and how many samples since. */
interface Arm {
  readonly sum: number
  readonly fromMs: number | null
  readonly steps: number
}

export interface CusumState {
  readonly high: Arm
  readonly low: Arm
}

function grow(arm: Arm, push: number, cap: number | null, tMs: number): Arm {
  const sum = Math.min(cap ?? Number.POSITIVE_INFINITY, Math.max(0, arm.sum + push))
  if (sum === 0) return { sum, fromMs: null, steps: 0 }
  return { sum, fromMs: arm.fromMs ?? tMs, steps: arm.steps + 1 }
}

function shift(side: 'high' | 'low', arm: Arm, k: number, tMs: number): Verdict {
  const size = k + arm.sum / arm.steps
  return { kind: 'shift', side, onsetMs: arm.fromMs ?? tMs, size: side === 'high' ? size : -size }
}

/**
 * Tabular CUSUM of both sides: finds a small lasting shift of the mean and dates it.
 *
 *   high ← max(0, high + z − k)      low ← max(0, low − z − k)      shift while either exceeds h
 *
 * The onset is the first sample since the sum was last zero, the size k + sum/steps (both textbook; biased for a ramp, and without
 * meaning once a sum is capped). For a one-sided chart look at the side of the verdict. A z that is not finite counts as missing.
 * Independent normal z, k = 0.5, h = 5: 465 samples between false alarms, 10.4 to find 1 σ; readings that remember the last one alarm
 * far sooner, so whiten them and design k and h by `designCusum`.
 * Sources: E. S. Page, Biometrika 41 (1954) 100; head start: J. M. Lucas and R. B. Crosier, Technometrics 24 (1982) 199.
 * Errors: start throws CONFIG_RANGE unless k > 0, h > 0, cap above h, head start in [0, 1); step never throws.
 */
export const cusum: Detector<CusumConfig, CusumState> = {
  name: 'cusum',
  start({ k, h, cap, headStart = 0 }) {
    if (!(k > 0 && h > 0)) throw new MonitorError('CONFIG_RANGE', `cusum needs k > 0 and h > 0, got k=${k}, h=${h}`)
    if (cap !== null && !(cap > h)) throw new MonitorError('CONFIG_RANGE', `a cusum capped at ${cap} never exceeds h=${h}`)
    if (!(headStart >= 0 && headStart < 1))
      throw new MonitorError('CONFIG_RANGE', `a head start is a part of h from 0 to below 1, got ${headStart}`)
    const arm: Arm = { sum: headStart * h, fromMs: null, steps: 0 }
    return { high: arm, low: arm }
  },
  step({ k, h, cap }, state, { tMs, z }) {
    if (z === null || !Number.isFinite(z)) return { state, verdict: speak(state, k, h, tMs) }
    const next = { high: grow(state.high, z - k, cap, tMs), low: grow(state.low, -z - k, cap, tMs) }
    return { state: next, verdict: speak(next, k, h, tMs) }
  },
}

/** The verdict a state stands for; through a gap it stays what it was. */
function speak({ high, low }: CusumState, k: number, h: number, tMs: number): Verdict {
  if (high.sum > h) return shift('high', high, k, tMs)
  if (low.sum > h) return shift('low', low, k, tMs)
  return quiet
}
