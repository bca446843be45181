export interface ReactorConfig {
  readonly segment: string
  /** How many thermocouples, in flow order. */
  readonly thermocouples: number
  /** Name of the coolant reading, shared by reactors of one circuit; null where there is none. */
  readonly coolant: string | null
  /** How many feeds flow through, and which of them limits the heat; by default the first. */
  readonly streams: number
  readonly limiting?: number
  /** Feeds that come in without having passed this coolant before, so at a temperature of their own; by default none. */
  readonly foreign?: readonly boolean[]
}

export interface WatchConfig {
  readonly scanS: number
  readonly reactors: readonly ReactorConfig[]
}

/** Scan means of one reactor; null is missing or not good. */
export interface ReactorScan {
  readonly tempsC: readonly (number | null)[]
  readonly coolantC: number | null
  readonly flowsKgS: readonly (number | null)[]
  readonly production: boolean
  /** Past the start-up transient: verdicts count. */
  readonly armed: boolean
  /** The feed ratio is high now: thresholds are lowered by a third, and dosing is the likely cause. */
  readonly ratioHigh?: boolean
}

export type ExothermDetector = 'excess' | 'rise' | 'runaway'
/** dosing: feed ratio off; flow: the feed moved; coolant: its reading moved or its other reactors warm too; reaction: none of these. */
export type ExothermCause = 'dosing' | 'flow' | 'coolant' | 'reaction'

export interface ExothermVerdict {
  /** Beyond the threshold two scans in a row; null where nothing can be said (not armed, no thermocouple, not learnt). */
  readonly over: boolean | null
  /** Back below half the threshold everywhere. */
  readonly under: boolean
  /** Excess of the series nearest its threshold, and that threshold, K. */
  readonly excessC: number | null
  readonly thresholdC: number | null
  readonly of: 'thermocouple' | 'reactor' | 'all' | null
  /** Which of the ways spoke; null while none does. */
  readonly detector: ExothermDetector | null
  /** Rate of the thermocouple with most excess, line through 12 s, and its standard error, K/s; null while not over. */
  readonly ratePerS: number | null
  readonly ratePerSSe: number | null
  /** Thermocouple with most excess. */
  readonly hottest: number | null
  /** Hot spot: highest reading and its thermocouple. */
  readonly hotSpotC: number | null
  readonly hotSpot: number | null
  /** Hub-Jones criterion fulfilled, whether or not it spoke first. */
  readonly runaway: boolean
  /** As far below what is explained: a cold excursion, sustained 30 s. */
  readonly cold: boolean
  readonly cause: ExothermCause | null
  /** Estimate of when it began, ms; null while not over. */
  readonly startMs: number | null
}
