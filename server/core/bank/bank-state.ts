import type { KnownSegment } from './filter.ts'
import { type Believable, believable, type ColumnState, type Kind } from './hypotheses.ts'
import { type Disturbances, disturbances } from './model.ts'
import type { Rival } from './verdicts.ts'

/** A verdict as the bank acted on it. */
export type BankEvent = {
  readonly likelihood: number
  readonly ageSteps: number
  readonly rivals: readonly Rival[]
  /** It began with a step of flow or temperature: then the exponents are at fault, not the skid. */
  readonly nearMove: boolean
} & (
  | { readonly kind: 'deposit' | 'blockage' | 'step'; readonly segment: number; readonly size: number }
  | {
      readonly kind: 'instrument'
      readonly tag: string
      readonly segment: number
      readonly neighbours: boolean
      readonly ramp: boolean
      readonly sizePa: number
      /** All that is known of this tap's shifts lies well within its accuracy: taken into the model, no alarm. */
      readonly slight?: boolean
    }
  | { readonly kind: 'stream'; readonly stream: number; readonly size: number }
)

/** What the bank keeps of one segment beside the filter. */
export interface SegmentTrack {
  started: boolean
  /** Left out of the filter: a deposit stands here; its clean parameters are those in `clean`. */
  fouled: boolean
  clean: { c: number; a: number; k: number } | null
  /** White noise of one step's mean ΔP, Pa²: instruments are noisy in bar, whatever the ΔP. */
  noisePa2: number
  noiseSteps: number
  lastResidual: number | null
  lastLnVisc: number | null
  lastLnFlow: number | null
  viscMove: number
  lnViscMean: number
  /** Normalised innovations of the last two steps; 0 where none. */
  z1: number
  z2: number
  /** Level at the first clean baseline: what ratios are taken against. */
  cRef: number | null
  /** Sd of the exponents of flow and viscosity before the first reading, and the hydraulics' exponents they stand on. */
  prior?: { readonly a: number; readonly k: number; readonly n0: number; readonly k0: number }
  /** Steps since production began, with an observation. */
  seen: number
  lastDpPa: number | null
  /** Mean of y over the last few steps. */
  yMean: number | null
  /** ln flow and ln viscosity as they stand between moves: what exponents are learnt from. */
  flowHeld?: number
  viscHeld?: number
  /** Lone falls in a row that began with no move of flow or viscosity: how many, and their sum, ln. */
  falls?: number
  fallen?: number
}

export interface BankState {
  steps: number
  x: number[]
  p: number[]
  tracks: SegmentTrack[]
  columns: ColumnState[]
  tapStartPa: (number | null)[]
  /** Pressure of each tap over the last few steps before this one. */
  tapMeanPa: (number | null)[]
  drifting: boolean[]
  /** Shifts of shared taps told so far, Pa: taken off their readings; missing where there were none. */
  tapShiftPa?: number[]
  sinceGap: number
  gapAt: number
  sinceMove: number
  moves: number[]
  started: boolean
  /** What step tests taught, by segment; missing where there were none. */
  known?: readonly KnownSegment[]
}

/** What the bank takes for granted: sizes of disturbances and explanations, and which kinds of explanation there are. */
export interface BankSettings {
  readonly disturbances: Disturbances
  readonly believable: Believable
  readonly kinds: readonly Kind[]
}
export const bankSettings: BankSettings = {
  disturbances,
  believable,
  kinds: ['deposit', 'step', 'settling', 'tap-ramp', 'tap-step', 'stream'],
}

/** An exponent as the bank holds it: hydraulics plus what was learnt; `told` once readings have halved the doubt it began with, or a step test measured it. */
export interface LearnedExponent {
  readonly value: number
  readonly sd: number
  readonly told: boolean
}

/** Result of one step for one segment: ln of its resistance over clean, wander included. */
export interface BankSegment {
  readonly lnRatio: number | null
  /** Sd of the white part and of the wander, for charts and fits. */
  readonly whiteSd: number
  readonly wanderSd: number
}

/** A segment before its first reading. */
export const freshTrack = (): SegmentTrack => ({
  started: false,
  fouled: false,
  clean: null,
  noisePa2: 0,
  noiseSteps: 0,
  lastResidual: null,
  lastLnVisc: null,
  lastLnFlow: null,
  viscMove: 0,
  lnViscMean: 0,
  z1: 0,
  z2: 0,
  cRef: null,
  seen: 0,
  lastDpPa: null,
  yMean: null,
})

/** Less than this is a reading's noise, not a move, ln. */
const leastMove = 0.01

/**
 * Flow or viscosity since its last move: constant in between. A mean that follows would not do: knowing the noise of past readings helps to
 * foretell the wander, and so would still teach an exponent.
 */
export function held(t: SegmentTrack, of: 'flowHeld' | 'viscHeld', now: number): number {
  const was = t[of]
  if (was !== undefined && Math.abs(now - was) <= leastMove) return was
  t[of] = now
  return now
}

/** White noise of ln ΔP at a ΔP; never better than 0.03 %. */
export const whiteVar = (t: { readonly noisePa2: number }, dpPa: number | null): number =>
  Math.max(1e-7, dpPa === null ? 1e-5 : t.noisePa2 / dpPa ** 2)
