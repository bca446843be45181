import type { SettingValue } from './settings/flat.ts'

/** The report of `analyse --json`. Times RFC 3339 UTC with milliseconds; null is absent knowledge; additions to the contract are marked. */
export interface Report {
  readonly report: 1
  readonly run: RunReport
  readonly segments: readonly SegmentReport[]
  readonly alarms: readonly AlarmReport[]
  readonly advice: readonly AdviceReport[]
  readonly timeline: readonly TimelinePoint[]
  /** Addition: what the tool left out or assumed, in plain words. */
  readonly notes: readonly string[]
  /** Additions: what the readings say of the streams, when disturbances leave the skid, how the alarm system did. */
  readonly streams: readonly StreamReport[]
  readonly outlet: readonly OutletReport[]
  readonly alarmMetrics: AlarmMetricsReport | null
  /** Addition: every flush that was followed, step by step. */
  readonly flushes: readonly FlushReport[]
}

export interface RunReport {
  readonly skid: string
  readonly from: string | null
  readonly to: string | null
  readonly scans: number
  readonly tags: readonly TagReport[]
  /** Additions: how many rows came, and how many were not used and why. */
  readonly rows: {
    readonly total: number
    readonly late: number
    readonly repeated: number
    readonly outOfOrder: number
    readonly badTime: number
  }
  /** Addition: true where the log names no phases and production was inferred. */
  readonly phaseInferred: boolean
  /** Addition: the settings that were in force, in the order they took effect. */
  readonly configuration: readonly ConfigurationReport[]
}

/** A version of the settings, or (version null) a result entered by hand that the calculation uses from then on. */
export interface ConfigurationReport {
  /** 0: the skid file of a run without versions of its own. */
  readonly version: number | null
  /** When it took effect; null: what the run began with. */
  readonly from: string | null
  readonly person: string
  readonly reason: string
  readonly changes: readonly SettingReport[]
}
export interface SettingReport {
  readonly path: string
  readonly unit: string | null
  /** null is not set. */
  readonly old: SettingValue
  readonly new: SettingValue
}

export interface TagReport {
  readonly tag: string
  readonly samples: number
  readonly good: number
  readonly uncertain: number
  readonly bad: number
  /** Addition: why readings were not good, by reason. */
  readonly reasons: Readonly<Record<string, number>>
}

export interface BaselineReport {
  readonly from: string
  readonly to: string
  readonly dpBar: number
  readonly sigma: number
  /** Additions. */
  readonly provisional: boolean
  readonly flowMlMin: number | null
  readonly tempC: number | null
  /** An accepted step test vouched for its zero or exponent. */
  readonly commissioned: boolean
}

/** What is known of a segment besides its level: exponents of ΔP in flow and viscosity, and the zero of ΔP with the pumps at rest. */
export interface LearnedReport {
  readonly flowExponent: LearnedExponentReport
  readonly viscosityExponent: LearnedExponentReport
  readonly zeroMbar: number | null
}
export interface LearnedExponentReport {
  readonly value: number
  readonly sd: number
  /** The readings have halved the doubt it began with, or a step test measured it; else it is that of the hydraulics. */
  readonly told: boolean
}

export interface OnsetReport {
  readonly at: string
  readonly low: string
  readonly high: string
  readonly level: number
}

export interface ForecastReport {
  readonly limit: string
  readonly at: string
  readonly low: string
  readonly high: string
  readonly level: number
}

/** The chart of the promise on one segment: how it was designed, where it stands, and how often it signalled on what it saw. */
export interface ChartReport {
  /** Allowance and decision interval in units of `sigma`, the sd of a whitened five-minute mean of ln ratio. */
  readonly k: number
  readonly h: number
  readonly sigma: number
  readonly cusum: number
  /** The same of the lower side, which no deposit drives. */
  readonly cusumLow: number
  /** Hours between false alarms of all charts of the skid together, as designed; and of this chart as observed, null while it has not signalled. */
  readonly designedHours: number
  readonly observedHours: number | null
  readonly hours: number
  /** Robust slope of ln ratio per hour with its 99 % interval; null while not told apart from none. */
  readonly driftPerHour: { readonly at: number; readonly low: number; readonly high: number } | null
}

export interface SegmentReport {
  readonly segment: string
  readonly baseline: BaselineReport | null
  readonly baselines: readonly BaselineReport[]
  readonly ratio: { readonly last: number | null; readonly max: number | null }
  readonly onset: OnsetReport | null
  readonly growthPerHour: number | null
  readonly forecast: ForecastReport | null
  /** Addition: null before the final baseline. */
  readonly chart: ChartReport | null
  /** Additions: what would explain the ratio, null without a deposit; heat transfer from the readings, null where they do not carry it. */
  readonly deposit: DepositReport | null
  readonly heat: HeatReport | null
  /** Addition: null before the segment's first reading in production. */
  readonly learned: LearnedReport | null
}

/** A ratio with its interval (± 2 sd) and everything that one pressure drop at one flow leaves open about it. */
export interface DepositReport {
  readonly ratio: number
  readonly low: number
  readonly high: number
  readonly readings: readonly {
    readonly kind: 'uniform' | 'local' | 'plugged-branch'
    /** Share of the length covered; what is left of the bore there. */
    readonly lengthShare: number | null
    readonly boreRatio: number
    readonly thicknessMm: number | null
    readonly depositMl: number | null
    /** Share of the liquid volume that no longer takes part. */
    readonly volumeLost: number
  }[]
  readonly cannotTell: readonly string[]
  readonly couldTell: readonly string[]
  /** Share of the lithium hydroxide that the feeds' water makes which must have stayed, as an even film, since the onset. */
  readonly capture: {
    readonly share: number
    readonly low: number | null
    readonly high: number | null
    readonly solidMlPerHour: number
  } | null
}

export interface HeatReport {
  /** Overall coefficient on the inner area now, W/(m² K), low and high from the sensors (2 sd). */
  readonly uWM2K: number
  readonly low: number
  readonly high: number
  /** The same at the clean baseline, and as computed from the file. */
  readonly cleanUWM2K: number | null
  readonly computedUWM2K: number | null
  /** 1/U − 1/U0, m² K/W. */
  readonly foulingM2KW: number | null
}

export interface StreamReport {
  readonly stream: string
  /** Viscosity over that of the file's liquid, learnt on the clean baselines of `segments` segments; null before any. */
  readonly viscosityFactor: {
    readonly factor: number
    readonly low: number
    readonly high: number
    readonly level: number
    readonly segments: number
  } | null
}

/** When what a disturbance touched leaves the skid, counted by volume; `to` is null while it stands or is still inside. */
export interface OutletReport {
  readonly alarm: number
  readonly segment: string
  /** The segment at whose end it leaves. */
  readonly outlet: string
  readonly from: string | null
  readonly to: string | null
  /** Outlet volume until its first and last part appears. */
  readonly firstMl: number
  readonly lastMl: number
  readonly divertedMl: number | null
  /** Seconds without a known flow: the window is at least as late as given. */
  readonly unknownSeconds: number
  readonly epsilon: number
  readonly models: readonly string[]
}

/** Performance of the alarm system over the run (ALM-13). */
export interface AlarmMetricsReport {
  readonly from: string
  readonly to: string
  readonly hours: number
  readonly records: number
  readonly label: string | null
  readonly annunciated: number
  readonly ratePerHour: number
  readonly tenMinutes: { readonly windows: number; readonly over10: number; readonly most: number }
  readonly hoursOver30: { readonly windows: number; readonly over30: number }
  readonly floodShare: number
  readonly floods: readonly { readonly from: string; readonly to: string; readonly count: number }[]
  readonly mostFrequent: readonly { readonly key: string; readonly count: number; readonly share: number }[]
  readonly topTenShare: number
  readonly chattering: readonly { readonly key: string; readonly at: string }[]
  readonly fleeting: readonly { readonly key: string; readonly at: string; readonly lastedSeconds: number }[]
  readonly stale: readonly { readonly key: string; readonly from: string; readonly hours: number }[]
  readonly priorityShare: Readonly<Record<Priority, number>>
  readonly suppressed: readonly { readonly key: string; readonly count: number }[]
  readonly outsideProcedure: number
  readonly refused: number
}

export const alarmKinds = [
  'fouling',
  'dp-limit',
  'pressure-limit',
  'exotherm',
  'temperature-limit',
  'feed-ratio',
  'flow',
  'sensor',
  'no-data',
  'monitor',
] as const
export type AlarmKind = (typeof alarmKinds)[number]
export type Priority = 'low' | 'medium' | 'high'
export const causes = [
  'fouling',
  'blockage',
  'filter',
  'back-pressure',
  'composition',
  'pump',
  'ice',
  'sensor',
  'gas',
  'unknown',
] as const
export type Cause = (typeof causes)[number]

export interface AlarmReport {
  readonly id: number
  readonly kind: AlarmKind
  readonly priority: Priority
  readonly segment: string | null
  readonly tag: string | null
  readonly raised: string
  readonly cleared: string | null
  readonly value: number | null
  readonly limit: number | null
  readonly unit: string | null
  readonly message: string
  readonly cause: Cause | null
  readonly onset: OnsetReport | null
  /** Additions: which detector spoke, and whether the others agree. */
  readonly detector: string
  readonly evidence: {
    readonly for: readonly string[]
    readonly against: readonly string[]
    readonly notExcluded: readonly string[]
  }
  /** Addition: version of the settings in force when it was raised. */
  readonly configuration: number
}

export const actions = [
  'flush',
  'watch',
  'stop-feed',
  'escalate',
  'change-filter',
  'check-sensor',
  'check-flow',
  'check-outlet',
  'check-cooling',
  'stop-cooling',
] as const
export type Action = (typeof actions)[number]

export interface FlushStep {
  readonly id: string
  readonly flowMlMin: number | null
  readonly volumeMl: number | null
  readonly minutes: number | null
  readonly holdPoints: readonly string[]
  readonly endsWhen: readonly string[]
  readonly hazards: readonly string[]
  /** Additions. */
  readonly title: string
  readonly liquid: string | null
  readonly basis: readonly string[]
  /** Every one accepted before the next step is shown as advised. */
  readonly criteria: readonly FlushCriterion[]
}

/** One thing to be true before a step counts as done; `id` is what an acceptance names. */
export interface FlushCriterion {
  readonly id: string
  readonly text: string
}

/** What a segment holds before the flush, counted as if nothing had reacted (worst case). */
export interface FlushInventory {
  readonly segment: string
  readonly volumeMl: number | null
  readonly reagents: readonly { readonly stream: string; readonly name: string; readonly mol: number | null }[]
  /** Heat if all organolithium met water, and if the reaction of the segment ran to its end; kJ. */
  readonly hydrolysisKJ: number | null
  /** Adiabatic rise of the segment's own liquid by that hydrolysis, K. */
  readonly hydrolysisRiseK: number | null
  readonly reactionKJ: number | null
}

/** What water is predicted to show in F3: the reference that the ratio is judged against there. */
export interface WaterReference {
  readonly segment: string
  readonly ratio: number
  readonly flowMlMin: number
  readonly tempC: number
  readonly cleanDpBar: number
  readonly predictedDpBar: number
  readonly dpHighBar: number | null
}

export interface FlushPlan {
  readonly steps: readonly FlushStep[]
  /** Segments the flush is for, and all the flush liquid passes, in flow order. */
  readonly segments: readonly string[]
  readonly path: readonly string[]
  /** Null where a step's time is not computed. */
  readonly totalMinutes: number | null
  readonly inventory: readonly FlushInventory[]
  readonly waterReference: readonly WaterReference[]
  /** Steps that are not advised at all as things stand, and why. */
  readonly refused: readonly { readonly step: string; readonly reason: string }[]
  readonly cautions: readonly string[]
  readonly assumptions: readonly string[]
  /** What could not be computed, and what is needed for it. */
  readonly missing: readonly string[]
}

/** A flush as people confirmed it. Its steps with every check; what was refused; what came of it against the clean baseline. */
export interface FlushReport {
  readonly flush: number
  readonly segments: readonly string[]
  readonly path: readonly string[]
  readonly state: 'running' | 'complete' | 'aborted'
  readonly opened: string
  readonly openedBy: string
  readonly ended: string | null
  readonly endedBy: string | null
  readonly reason: string | null
  readonly steps: readonly FlushStepReport[]
  readonly refusals: readonly {
    readonly at: string
    readonly person: string
    readonly step: string
    readonly asked: string
    readonly reasons: readonly string[]
  }[]
  readonly calls: readonly { readonly at: string; readonly kind: string; readonly segment: string; readonly text: string }[]
  readonly recovery: readonly FlushRecovery[]
  /** Checks that failed or were skipped, hand readings, steps taken back. */
  readonly exceptions: readonly { readonly at: string; readonly person: string; readonly step: string; readonly text: string }[]
}
export interface FlushStepReport {
  readonly step: string
  readonly title: string
  readonly state: 'open' | 'running' | 'accepted' | 'skipped' | 'aborted'
  readonly started: string | null
  readonly startedBy: string | null
  readonly ended: string | null
  readonly endedBy: string | null
  readonly reason: string | null
  readonly plannedMl: number | null
  readonly passedMl: number
  /** Seconds without a usable flow reading, in which nothing was counted. */
  readonly withoutFlowSeconds: number
  readonly checks: readonly FlushCheckReport[]
}
export interface FlushCheckReport {
  readonly criterion: string
  readonly part: string | null
  readonly needs: string
  readonly by: 'readings' | 'person'
  readonly state: 'met' | 'not-yet' | 'unknown' | 'failed' | 'skipped'
  readonly value: number | string | null
  readonly unit: string | null
  readonly source: string
  readonly why: string
  readonly person: string | null
  readonly at: string | null
  readonly reason: string | null
}
/** Ratio against the clean baseline before, and after with water, solvent and feeds, each against its own reference; then that of the next baseline. */
export interface FlushRecovery {
  readonly segment: string
  readonly before: number | null
  readonly water: number | null
  readonly solvent: number | null
  readonly feeds: number | null
  readonly baseline: number | null
  readonly provisional: boolean
  readonly verdict: 'open' | 'restored' | 'not-fully-restored'
}

export interface AdviceReport {
  readonly at: string
  readonly action: Action
  readonly segments: readonly string[]
  readonly reason: string
  readonly plan: FlushPlan | null
}

export interface TimelinePoint {
  readonly at: string
  readonly segment: string
  readonly ratio: number | null
  readonly forecast: ForecastReport | null
}
