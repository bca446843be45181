import { fileSource } from './analyse.ts'
import type { Act } from './core/sequence.ts'
import { type Begins, importRun } from './import-run.ts'
import type { MonitorStore } from './monitor/needs.ts'
import { loadSkid } from './skid/check.ts'
import type { RunId } from './store/keys.ts'
import { segmentRows } from './store/segment.ts'

/** An import as plain data, so that it can be handed to a thread. */
export interface ImportTask {
  readonly run: RunId
  readonly stepsRun: RunId
  readonly skidFile: string
  readonly skidText: string
  readonly logs: readonly { readonly name: string; readonly path: string }[]
  readonly acts: readonly Act[]
  readonly commissioned?: Begins
  readonly startMs: number | null
  /** Others write to the store meanwhile: commits are short, and between them there is a pause for theirs, ms. Null when nobody does. */
  readonly pauseMs: number | null
}

/** What came of an import: rows taken in, and broken ones left out. */
export interface Imported {
  readonly rows: number
  readonly broken: number
}

/** Does an import to its end. Errors: those of `importRun`. */
export type ImportWork = (task: ImportTask, on: { progress: (bytes: number) => void; signal: AbortSignal }) => Promise<Imported>

/** Imports into an open store, in the thread of the caller. */
export function importInto(store: MonitorStore): ImportWork {
  return async (task, { progress, signal }) => {
    const { pauseMs } = task
    const beside = pauseMs === null ? {} : { rowsPerCommit: segmentRows, breathe: () => later(pauseMs) }
    const { rows, tallies } = await importRun({
      store,
      run: task.run,
      stepsRun: task.stepsRun,
      skid: loadSkid(task.skidText, task.skidFile),
      sources: task.logs.map(({ name, path }) => ({ name, chunks: fileSource(path).chunks })),
      startMs: task.startMs,
      acts: task.acts,
      ...(task.commissioned === undefined ? {} : { commissioned: task.commissioned }),
      onProgress: progress,
      signal,
      ...beside,
    })
    return { rows, broken: tallies.reduce((n, t) => n + t.broken, 0) }
  }
}

const later = (ms: number): Promise<void> => new Promise((done) => setTimeout(done, ms))
