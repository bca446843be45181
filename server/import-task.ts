import { fileSource } from './analyse.ts'
import type { Act } from './core/sequence.ts'
import { importRun } from './import-run.ts'
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
  readonly startMs: number | null
}

/** Does an import to its end. Errors: those of `importRun`. */
export type ImportWork = (task: ImportTask, on: { progress: (bytes: number) => void; signal: AbortSignal }) => Promise<void>

/** Imports into an open store, beside others who write to it: commits are short, and between them there is a pause for theirs. */
export function importInto(store: MonitorStore, pauseMs: number): ImportWork {
  return async (task, { progress, signal }) => {
    await importRun({
      store,
      run: task.run,
      stepsRun: task.stepsRun,
      skid: loadSkid(task.skidText, task.skidFile),
      sources: task.logs.map(({ name, path }) => ({ name, chunks: fileSource(path).chunks })),
      startMs: task.startMs,
      acts: task.acts,
      onProgress: progress,
      signal,
      breathe: () => new Promise((done) => setTimeout(done, pauseMs)),
      rowsPerCommit: segmentRows,
    })
  }
}
