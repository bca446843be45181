import type { FlushPlan } from '../report.ts'

/** A point counts as met only by good readings that say so, or by a person's record; bad or missing data is `unknown`, never met. */
export type PointState = 'met' | 'not-yet' | 'unknown' | 'failed' | 'skipped'
export type StepState = 'open' | 'running' | 'accepted' | 'skipped' | 'aborted'
export type CourseState = 'running' | 'complete' | 'aborted'

/** One thing to be true before a step can be accepted, as it stands. A criterion of the plan may have several parts. */
export interface Point {
  readonly criterion: string
  readonly part: string | null
  readonly needs: string
  /** Judged from readings each scan, or by a person. */
  readonly by: 'readings' | 'person'
  state: PointState
  value: number | string | null
  readonly unit: string | null
  /** First value read in this step; where the line of allowed values lies and on which side of it they are, null for a band or a word. */
  from: number | null
  readonly limit: number | null
  readonly allowed: 'above' | 'below' | null
  /** Tags the value comes from, or where the person read it. */
  source: string
  /** Why it stands as it does. */
  why: string
  /** Since when readings have said so without a break; null while they do not. */
  sinceMs: number | null
  /** Who recorded it and when; null where readings alone decide. */
  person: string | null
  tMs: number | null
  reason: string | null
}

export interface CourseStep {
  readonly step: string
  readonly title: string
  readonly liquid: string | null
  readonly plannedMl: number | null
  readonly flowMlMin: number | null
  readonly minutes: number | null
  state: StepState
  startedMs: number | null
  startedBy: string | null
  endedMs: number | null
  endedBy: string | null
  /** Of a skip or an abort. */
  reason: string | null
  /** ∫Q dt over the readings there were, mL; seconds without a usable flow add nothing. */
  passedMl: number
  withoutFlowS: number
  points: Point[]
}

/** An act that the course did not take, and why. */
export interface Refusal {
  readonly tMs: number
  readonly person: string
  readonly step: string
  readonly asked: string
  readonly reasons: readonly string[]
}

/** What the course has to say by itself, once each. */
export interface Call {
  readonly tMs: number
  readonly kind: 'ice' | 'not-water-soluble' | 'not-fully-restored'
  readonly segment: string
  readonly text: string
}

/** Ratio against the clean baseline before the flush and after, of one flushed segment: each liquid against its own reference. */
export interface Recovery {
  readonly segment: string
  before: number | null
  /** At the end of F3 against water, of F5 against the solvent, of F6 against the feeds. */
  water: number | null
  solvent: number | null
  feeds: number | null
  /** The next clean baseline over the last one, both at their own flow and temperature; while that is provisional it may still move. */
  baseline: number | null
  provisional: boolean
  verdict: 'open' | 'restored' | 'not-fully-restored'
}

/** One flush from F0 to its end, as it stands. Times ms UTC. */
export interface Course {
  readonly flush: number
  readonly segments: readonly string[]
  readonly path: readonly string[]
  readonly openedMs: number
  readonly openedBy: string
  state: CourseState
  endedMs: number | null
  endedBy: string | null
  reason: string | null
  steps: CourseStep[]
  refusals: Refusal[]
  calls: Call[]
  recovery: Recovery[]
  /** Failed and skipped checks, and steps taken back: they stay visible. */
  exceptions: { readonly tMs: number; readonly person: string; readonly step: string; readonly text: string }[]
}

/** What a point is judged by, fixed when the flush opens. Tag and segment numbers are those of the skid file. */
export type Rule =
  | { readonly kind: 'flow-zero'; readonly tag: number; readonly belowSi: number; readonly holdS: number }
  | { readonly kind: 'dp-zero'; readonly segment: number; readonly belowPa: number; readonly holdS: number }
  | { readonly kind: 'volume'; readonly ml: number }
  | {
      readonly kind: 'heat-gone'
      readonly out: number
      readonly coolant: number
      readonly withinK: number
      readonly holdS: number
    }
  | { readonly kind: 'warm'; readonly tags: readonly number[]; readonly aboveK: number; readonly holdS: number }
  | { readonly kind: 'pressure-steady'; readonly tags: readonly number[]; readonly risePa: number }
  | { readonly kind: 'no-heat'; readonly tags: readonly number[]; readonly coolant: number | null; readonly riseK: number }
  | {
      readonly kind: 'ratio'
      readonly segment: number
      readonly liquid: Liquid
      readonly highest: number
      /** Must have stopped changing as well. */
      readonly flat: boolean
      readonly holdS: number
    }
  | { readonly kind: 'no-ice'; readonly segment: number; readonly tags: readonly number[]; readonly coldK: number }
  | { readonly kind: 'flow-normal'; readonly tag: number; readonly lowSi: number; readonly highSi: number; readonly holdS: number }
  | {
      readonly kind: 'temperature-normal'
      readonly tag: number
      readonly atK: number
      readonly withinK: number
      readonly holdS: number
    }
  | { readonly kind: 'no-alarm'; readonly segments: readonly string[] }
  /** A number at most so large, recorded by a person, after the volume has passed. */
  | { readonly kind: 'at-most'; readonly limit: number }
  | null
export type Liquid = 'feeds' | 'displacement' | 'drying' | 'water'

/** What a rule remembers between scans. */
export interface Memory {
  low: number | null
  /** Seconds since the last sample of `trail`, which holds a value each half minute. */
  beatS: number
  trail: number[]
}

/** A leg of the path: how its pressure drop is turned into a ratio. */
export interface LegState {
  readonly id: string
  readonly segment: number
  readonly asked: boolean
  readonly volumeMl: number | null
  /** Mass share of each of its streams in production. */
  readonly shares: readonly number[]
  /** Measured over computed clean ΔP: of the feeds on the clean baseline, and of solvent in F1 freed of the ratio then. */
  feedFactor: number | null
  solventFactor: number | null
  readonly before: number | null
  /** Smoothed measured over computed clean ΔP of the liquid that fills it now; null while two share it or it stands. */
  raw: number | null
}

/** Everything the guided flush knows, plain JSON: the flush under way or the last one. */
export interface GuideState {
  count: number
  course: Course | null
  plan: FlushPlan | null
  /** By step, by point. */
  rules: Rule[][]
  memory: Memory[][]
  legs: LegState[]
  /** Flow tags of the path with the density that turns mass into volume, by step (1 for a volume flow), kg/m³. */
  meters: { readonly tag: number; readonly rho: readonly number[]; readonly usualSi: number | null }[]
  pathMl: number | null
  displacement: string
  drying: string
  /** Segments whose alarm of ice is up. */
  ice: string[]
  /** When the course was last told as an event, and which points stood how. */
  toldMs: number
  told: string
}

export const freshGuide = (): GuideState => ({
  count: 0,
  course: null,
  plan: null,
  rules: [],
  memory: [],
  legs: [],
  meters: [],
  pathMl: null,
  displacement: '',
  drying: '',
  ice: [],
  toldMs: 0,
  told: '',
})
