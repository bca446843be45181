import { createHash } from 'node:crypto'
import type { RunRow } from '../wire/run.ts'

/** To be shown on start, on every recommendation and every export (advisory, site procedures, may be wrong). */
export const cautions: readonly string[] = [
  'Advisory only: Clearbore reads and recommends, it moves nothing and is no safety function.',
  'Follow approved site procedures, local codes and licensed, competent persons.',
  'A recommendation may be wrong.',
]

/** What an export says of itself. */
export interface ExportFacts {
  readonly export: 'alarms' | 'samples' | 'events' | 'record'
  readonly tool: { readonly name: 'clearbore'; readonly version: string }
  /** Version of the tool that recorded the run; the alarms are that version's. */
  readonly recordedWith: string
  /** First 16 hex digits of the SHA-256 of the skid file's text: the configuration the run was recorded with. */
  readonly configVersion: string
  readonly run: number
  readonly skid: string
  readonly title: string
  readonly source: string
  readonly timeZone: string
  /** Period covered and the filter it came from; null: no bound. */
  readonly from: string | null
  readonly to: string | null
  readonly filter: Readonly<Record<string, string | null>>
  /** Rows of the export. */
  readonly rows: number
  readonly exportedAt: string
  /** Where the chain of this run stood: to be printed with a report, since a chain cannot tell by itself that its end was cut off. */
  readonly trail: { readonly store: string; readonly count: number; readonly head: string }
  readonly cautions: readonly string[]
}

export const iso = (ms: number): string => new Date(ms).toISOString()
export const isoOrNull = (ms: number | null): string | null => (ms === null ? null : iso(ms))
export const configVersionOf = (skidText: string): string => createHash('sha256').update(skidText).digest('hex').slice(0, 16)

export interface FactsInput {
  readonly what: ExportFacts['export']
  readonly row: RunRow
  readonly skidText: string
  readonly timeZone: string
  readonly recordedWith: string
  readonly toolVersion: string
  readonly fromMs: number | null
  readonly toMs: number | null
  readonly filter?: Readonly<Record<string, string | null>>
  readonly rows: number
  readonly nowMs: number
  readonly trail: ExportFacts['trail']
}

export const exportFacts = (i: FactsInput): ExportFacts => ({
  export: i.what,
  tool: { name: 'clearbore', version: i.toolVersion },
  recordedWith: i.recordedWith,
  configVersion: configVersionOf(i.skidText),
  run: i.row.run,
  skid: i.row.skid,
  title: i.row.title,
  source: i.row.source,
  timeZone: i.timeZone,
  from: isoOrNull(i.fromMs ?? i.row.fromMs),
  to: isoOrNull(i.toMs ?? i.row.toMs),
  filter: i.filter ?? {},
  rows: i.rows,
  exportedAt: iso(i.nowMs),
  trail: i.trail,
  cautions,
})
