import type { Phase } from '../reading.ts'

/** What really happened in a run (`truth.json`). Times RFC 3339 UTC with milliseconds; null is what does not apply. */
export interface Truth {
  readonly case: string
  readonly category: string
  readonly skid: string
  readonly logSeconds: string
  readonly from: string
  readonly to: string
  readonly phases: readonly TruePhase[]
  readonly productionHours: number
  readonly inControlHours: number
  /** Production with no deposit growing; a loading filter does not end it. */
  readonly inControl: readonly { readonly from: string; readonly to: string }[]
  readonly fouling: readonly TrueFouling[]
  readonly exotherms: readonly TrueExotherm[]
  readonly feedErrors: readonly { readonly stream: string; readonly start: string; readonly end: string; readonly factor: number }[]
  readonly sensorFaults: readonly TrueSensorFault[]
  readonly confounders: readonly TrueConfounder[]
  readonly dirty: TrueDirty
  /** The true ratio of each segment every `everySeconds` from `start`. */
  readonly ratio: {
    readonly everySeconds: number
    readonly start: string
    readonly segments: Readonly<Record<string, readonly number[]>>
  }
}

export interface TruePhase {
  readonly phase: Phase
  readonly from: string
  readonly to: string
}

/** One growth of a deposit (or one loading of a filter), from its onset to its end. */
export interface TrueFouling {
  readonly segment: string
  readonly cause: 'fouling' | 'filter'
  readonly model: string
  /** Share of the length that narrows; null for the whole length. */
  readonly localFraction: number | null
  readonly onset: string
  readonly end: string
  readonly endedBy: string
  /** When the noise-free dP meets dpHighBar; after `end` (and `limitReached` false) where growth was ended before it. */
  readonly limitAt: string
  readonly limitReached: boolean
  /** dpHighBar over the clean dP at the nominal flow and temperature. */
  readonly limitRatioNominal: number
  readonly dpHighBar: number
  readonly ratioAtOnset: number
  readonly ratioMax: number
  readonly ratioAfterFlush: number | null
  readonly sloughs: readonly string[]
  /** [seconds after onset, true ratio], rising in time. */
  readonly trajectory: readonly (readonly [seconds: number, ratio: number])[]
  readonly checkpoints: readonly TrueCheckpoint[]
}

export interface TrueCheckpoint {
  /** Share of the time from onset to limitAt. */
  readonly fraction: number
  readonly at: string
  readonly ratio: number
  /** When the limit is met if flow and temperature stay as they are at `at`: what a forecast is asked for. */
  readonly limitAtHeld: string | null
  readonly sloughAhead: boolean
}

export interface TrueExotherm {
  readonly segment: string
  readonly kind: string
  readonly start: string
  readonly peakAt: string
  readonly end: string
  /** Excess of the fluid at the hottest thermocouple at the peak; the reading lags behind it. */
  readonly amplitudeC: number
  readonly riseS: number
  readonly hottest: string
}

export interface TrueSensorFault {
  readonly tag: string
  readonly kind: string
  readonly start: string
  readonly end: string
  readonly size: number | null
  readonly overS: number | null
  /** A reading that is plainly no measurement (frozen, open, dead, spike), against one that drifts or steps. */
  readonly hard: boolean
}

/** What else happened: `flowStep`, `coolantStep`, `gasSlug`, `backPressure`, `feedConcentration`, `nanGap` ... with its own figures. */
export interface TrueConfounder {
  readonly kind: string
  readonly at: string
  readonly until?: string
  readonly overS?: number
  readonly tags?: readonly string[] | 'all'
  readonly [figure: string]: unknown
}

export interface TrueDirty {
  readonly nanCells: Readonly<Record<string, number>>
  readonly missingRows: number
  readonly duplicateRows: number
  readonly outOfOrderRows: number
  readonly brokenRows: number
  readonly notes: readonly string[]
  readonly kinds: readonly string[]
  readonly rows: number
}
