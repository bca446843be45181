import { MonitorError } from '../errors.ts'
import { type Detector, quiet, type Verdict } from './detector.ts'

export interface EwmaConfig {
  /** weight of the newest reading, above 0 to 1; 0.1 to 0.2 suits shifts of a σ or so */
  readonly lambda: number
  /** limits [σ of the average], from `ewmaLimit` */
  readonly c: number
}

/** The average [σ], how many readings it holds, and since when it has been on its present side of 0. */
export interface EwmaState {
  readonly average: number
  readonly steps: number
  readonly fromMs: number | null
}

/**
 * Exponentially weighted moving average, the chart a person reads most easily: one smoothed line between two limits.
 *
 *   E ← (1 − λ) E + λ z from 0;   shift while |E| > c √(λ/(2 − λ) (1 − (1 − λ)^2n)), the limits of the n-th reading
 *
 * The onset is the first reading since E last crossed 0, the size E itself; both lag a shift that has just begun. As for every chart
 * here z must be independent from reading to reading: whiten first.
 * Sources: S. W. Roberts, Technometrics 1 (1959) 239; J. M. Lucas and M. S. Saccucci, Technometrics 32 (1990) 1.
 * Errors: start throws CONFIG_RANGE unless 0 < λ ≤ 1 and c > 0; step never throws.
 */
export const ewma: Detector<EwmaConfig, EwmaState> = {
  name: 'ewma',
  start({ lambda, c }) {
    if (!(lambda > 0 && lambda <= 1 && c > 0))
      throw new MonitorError('CONFIG_RANGE', `ewma needs 0 < lambda <= 1 and c > 0, got ${lambda}, ${c}`)
    return { average: 0, steps: 0, fromMs: null }
  },
  step(config, state, { tMs, z }) {
    if (z === null || !Number.isFinite(z)) return { state, verdict: speak(config, state, tMs) }
    const average = (1 - config.lambda) * state.average + config.lambda * z
    const stays = state.fromMs !== null && Math.sign(average) === Math.sign(state.average)
    const next = { average, steps: state.steps + 1, fromMs: stays ? state.fromMs : tMs }
    return { state: next, verdict: speak(config, next, tMs) }
  },
}

function speak({ lambda, c }: EwmaConfig, { average, steps, fromMs }: EwmaState, tMs: number): Verdict {
  const limit = c * Math.sqrt((lambda / (2 - lambda)) * (1 - (1 - lambda) ** (2 * steps)))
  if (!(Math.abs(average) > limit)) return quiet
  return { kind: 'shift', side: average > 0 ? 'high' : 'low', onsetMs: fromMs ?? tMs, size: average }
}
