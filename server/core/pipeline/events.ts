import type { AlarmRecord } from '../alarms/alarm-state.ts'
import type { AlarmChange } from '../alarms/occurrence.ts'
import type { Course } from '../flush/course-state.ts'
import type { BaselineRecord, ForecastRecord } from '../fouling/watch-state.ts'
import type { Interval } from '../growth/points.ts'
import type { AdviceReport } from '../report.ts'
import type { Act } from '../sequence.ts'
import type { Applied } from '../settings/configuration.ts'

/** What the pipeline says while the sequence goes through it, in order. Shells store, publish and fold these; they add nothing. */
export type PipelineEvent =
  | { readonly kind: 'alarm'; readonly change: AlarmChange }
  | { readonly kind: 'transition'; readonly record: AlarmRecord }
  | { readonly kind: 'baseline'; readonly segment: string; readonly baseline: BaselineRecord }
  | { readonly kind: 'onset'; readonly segment: string; readonly onset: Interval }
  | { readonly kind: 'advice'; readonly tMs: number; readonly advice: AdviceReport }
  | { readonly kind: 'timeline'; readonly tMs: number; readonly points: readonly TimelineEntry[] }
  | { readonly kind: 'note'; readonly tMs: number; readonly text: string }
  | { readonly kind: 'act'; readonly act: Act }
  /** A flush as it stands, told when something of it is new. */
  | { readonly kind: 'flush'; readonly tMs: number; readonly course: Course }
  /** A version of the settings, or a result entered by hand, has taken effect. */
  | { readonly kind: 'configuration'; readonly tMs: number; readonly applied: Applied }
  /** Logic that suppresses alarms by design began or ended to hold. */
  | { readonly kind: 'suppression'; readonly tMs: number; readonly logic: string; readonly on: boolean }
  | {
      readonly kind: 'step'
      readonly tMs: number
      readonly production: boolean
      readonly inferred: boolean
      readonly segments: readonly StepEntry[]
    }

export interface TimelineEntry {
  readonly segment: string
  readonly ratio: number | null
  readonly forecast: ForecastRecord | null
}

/** A segment in one detector step, for trends. */
export interface StepEntry {
  readonly ratio: number | null
  readonly dpBar: number | null
  readonly flowMlMin: number | null
  readonly tempC: number | null
}
