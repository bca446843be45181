import type { StartingKnowledge } from './baseline/starting-knowledge.ts'
import type { RowBlock } from './reading.ts'
import type { SettingChange } from './settings/flat.ts'

/** What a person does; every act names who and when, and is part of the recorded sequence. */
export type Act = { readonly tMs: number; readonly person: string } & (
  | { readonly kind: 'acknowledge'; readonly alarm: number }
  /** Missing in a record of an older build. */
  | { readonly kind: 'reset'; readonly alarm: number; readonly reason?: string }
  | { readonly kind: 'shelve'; readonly alarm: number; readonly minutes: number; readonly reason: string }
  | { readonly kind: 'unshelve'; readonly alarm: number; readonly reason: string }
  | { readonly kind: 'comment'; readonly alarm: number | null; readonly text: string }
  /** An alarm by its key (`flow:R1:flowLow`), for maintenance, whether or not it stands. */
  | { readonly kind: 'out-of-service' | 'in-service'; readonly key: string; readonly reason: string }
  /** One limit, in force at once. `version` is that of the settings it makes; missing in a record of an older build. */
  | {
      readonly kind: 'limit'
      readonly segment: string
      readonly limit: LimitName
      readonly value: number | null
      readonly reason: string
      readonly version?: number
    }
  /** A version of the settings, in force from `effectiveMs` of the sequence's time on; without changes it names what the run began with. */
  | {
      readonly kind: 'settings'
      readonly version: number
      readonly effectiveMs: number
      readonly changes: readonly SettingChange[]
      readonly reason: string
    }
  /** What an accepted step test measured, before the first reading of a run; later it comes too late. */
  | { readonly kind: 'commissioned'; readonly known: readonly StartingKnowledge[]; readonly reason: string }
  | {
      readonly kind: 'flush-step'
      readonly segment: string
      readonly step: string
      readonly state: 'started' | 'accepted' | 'refused' | 'skipped' | 'ended' | 'aborted'
      readonly reason: string
    }
  /** What a person read or saw of one point of a flush step; `criterion` as the plan names it, with `:part` where it has parts. */
  | {
      readonly kind: 'flush-check'
      readonly segment: string
      readonly step: string
      readonly criterion: string
      readonly verdict: 'met' | 'failed' | 'skipped'
      readonly value: number | string | null
      readonly source: string
      readonly reason: string
    }
  /** A row of the events file or an entry by hand: Karl Fischer result, drum change, filter change ... */
  | {
      readonly kind: 'event'
      readonly event: string
      readonly value: number | null
      readonly unit: string | null
      readonly note: string
      /** Stream or segment it belongs to. */
      readonly of?: string | null
      /** When the sample was taken, where that is not the time of entry. */
      readonly atMs?: number | null
    }
)

/** Limits that a person may change during a run; values in the unit the name ends with (flowLow: the flow tag's own unit). */
export const limitNames = [
  'dpHighBar',
  'dpHighHighBar',
  'pressureHighBar',
  'temperatureHighC',
  'temperatureHighHighC',
  'temperatureLowC',
  'flowLow',
] as const
export type LimitName = (typeof limitNames)[number]

/**
 * One step of the recorded sequence. Live, imported, simulated and replayed runs are all this: rows in arrival order, ticks of the
 * monitor's clock, acts. Where rows are split into blocks makes no difference; their order does.
 */
export type Entry =
  | { readonly kind: 'rows'; readonly block: RowBlock }
  | { readonly kind: 'tick'; readonly tMs: number }
  | { readonly kind: 'act'; readonly act: Act }
