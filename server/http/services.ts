import type { Skid } from '../core/skid.ts'
import type { exportRun } from '../export-run.ts'
import type { Catalogue } from '../monitor/catalogue.ts'
import type { MonitorStore } from '../monitor/needs.ts'
import type { Monitor } from '../monitor.ts'
import type { RunRow } from '../wire/run.ts'
import type { Access } from './access.ts'

/** What the routes call; `app.ts` hands it to them. */
export interface Services {
  readonly store: MonitorStore
  readonly monitor: Pick<Monitor, 'engine' | 'state' | 'act' | 'lives'>
  readonly catalogue: Catalogue
  readonly access: Pick<Access, 'demand'>
  readonly toolVersion: string
  readonly isDemo: () => boolean
  readonly wallMs: () => number
  readonly uploadMaxBytes: number
  readonly exportRun: typeof exportRun
  readonly skidOf: (text: string, file: string) => Skid
  /** Begins an import of logs that lie on disk; the run is listed at once, `done` runs when the files may go. */
  readonly importLogs: (job: ImportJob) => RunRow
}

export interface ImportJob {
  readonly title: string
  readonly person: string
  readonly skidFile: string
  readonly skidText: string
  readonly logs: readonly { readonly name: string; readonly path: string }[]
  readonly events: { readonly name: string; readonly text: string } | null
  readonly start: string | null
  readonly done: () => void
}
