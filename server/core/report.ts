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
}

export interface RunReport {
  readonly skid: string
  readonly from: string | null
  readonly to: string | null
  readonly scans: number
  readonly tags: readonly TagReport[]
  /** Additions: how many rows came, and how many were not used and why. */
  readonly rows: { readonly total: number; readonly late: number; readonly repeated: number; readonly outOfOrder: number; readonly badTime: number }
  /** Addition: true where the log names no phases and production was inferred. */
  readonly phaseInferred: boolean
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

export interface SegmentReport {
  readonly segment: string
  readonly baseline: BaselineReport | null
  readonly baselines: readonly BaselineReport[]
  readonly ratio: { readonly last: number | null; readonly max: number | null }
  readonly onset: OnsetReport | null
  readonly growthPerHour: number | null
  readonly forecast: ForecastReport | null
}

export const alarmKinds = ['fouling', 'dp-limit', 'pressure-limit', 'exotherm', 'temperature-limit', 'feed-ratio', 'flow', 'sensor', 'no-data', 'monitor'] as const
export type AlarmKind = (typeof alarmKinds)[number]
export type Priority = 'low' | 'medium' | 'high'
export const causes = ['fouling', 'blockage', 'filter', 'back-pressure', 'composition', 'pump', 'ice', 'sensor', 'gas', 'unknown'] as const
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
  readonly evidence: { readonly for: readonly string[]; readonly against: readonly string[]; readonly notExcluded: readonly string[] }
}

export const actions = ['flush', 'watch', 'stop-feed', 'escalate', 'change-filter', 'check-sensor', 'check-flow', 'check-outlet', 'check-cooling', 'stop-cooling'] as const
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
}

export interface FlushPlan {
  readonly steps: readonly FlushStep[]
  readonly [addition: string]: unknown
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
