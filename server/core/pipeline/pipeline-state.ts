import type { AdviserState } from '../advice/adviser.ts'
import type { BookState } from '../alarms/book.ts'
import type { SuppressionState } from '../alarms/suppression.ts'
import type { BankSettings } from '../bank/bank-state.ts'
import type { StartingKnowledge } from '../baseline/starting-knowledge.ts'
import type { StepperState } from '../derive/step.ts'
import type { GuideState } from '../flush/course-state.ts'
import type { BaselinePoint } from '../flush/reference.ts'
import type { WatchState } from '../fouling/watch-state.ts'
import type { PresentState } from '../insight/present.ts'
import type { GridState, Scan } from '../scan/grid.ts'
import { limitNames } from '../sequence.ts'
import type { ConfigurationState } from '../settings/configuration.ts'
import type { ExcursionState } from '../signals/excursions.ts'
import type { InstrumentState } from '../signals/instruments.ts'
import type { LimitTable } from '../signals/limits.ts'
import type { Skid } from '../skid.ts'

/** Everything the pipeline knows, as plain JSON: stop anywhere, resume, and what follows is the same to the byte. */
export interface PipelineState {
  readonly version: 1
  grid: GridState
  stepper: StepperState
  watch: WatchState
  book: BookState
  instruments: InstrumentState
  excursions: ExcursionState
  adviser: AdviserState
  /** Missing in a state of an older build: learnt anew. */
  present?: PresentState
  /** Missing in a state of an older build: no flush under way. */
  flush?: GuideState
  /** Missing in a state of an older build, which had the limits alone. */
  configuration?: ConfigurationState
  suppression?: SuppressionState
  /** Of an older build: the limits as people had changed them. */
  limits?: LimitTable
  /** Alarms that clear by themselves at a time. */
  timed: { key: string; untilMs: number }[]
  timelineN: number
  production: boolean
  armed: boolean
  inferred: boolean
  /** By segment: ratio at the last step and when. */
  ratio: (number | null)[]
  ratioMs: number
  /** By segment: the last ratio known, and the clean baseline in force, final or not. Missing in a state of an older build. */
  lastRatio?: (number | null)[]
  baseline?: (BaselinePoint | null)[]
}

export interface PipelineOptions {
  /** Each closed scan, for live screens; the object is reused. */
  readonly onScan?: (scan: Scan, tMs: number) => void
  /** From an accepted step test; a saved state has it already. */
  readonly known?: readonly StartingKnowledge[]
  /** Other sizes and explanations than the defaults, to see what each is worth. */
  readonly bank?: BankSettings
  readonly charts?: boolean
}

/** What people had changed in a state that kept the limits alone. */
export function withLimits(skid: Skid, limits: LimitTable | undefined): ConfigurationState | undefined {
  if (limits === undefined) return undefined
  const changes = skid.segments.flatMap((g, i) =>
    limitNames.flatMap((name) => {
      const [old, now] = [g.limits[name], limits[i]?.[name] ?? null]
      return old === now ? [] : [{ path: `segments.${g.id}.limits.${name}`, old, new: now }]
    }),
  )
  const file = { version: 0, fromMs: -1, person: 'file', reason: 'the skid file as given', changes: [] }
  const changed = {
    version: 1,
    fromMs: 0,
    person: 'not known',
    reason: 'limits changed with an earlier version of the tool',
    changes,
  }
  return { applied: changes.length === 0 ? [file] : [file, changed], planned: [] }
}
