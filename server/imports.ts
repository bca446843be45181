import { MonitorError } from './core/errors.ts'
import type { Act } from './core/sequence.ts'
import type { Skid } from './core/skid.ts'
import { type ImportWork, importInto } from './import-task.ts'
import { readEvents } from './ingest/events-file.ts'
import { instantOf } from './ingest/instant.ts'
import { type Busy, createPair } from './monitor/catalogue.ts'
import type { MonitorStore } from './monitor/needs.ts'
import type { RunId } from './store/keys.ts'

export interface UploadJob {
  readonly title: string
  readonly person: string
  readonly skidFile: string
  readonly skidText: string
  readonly logs: readonly { readonly name: string; readonly path: string; readonly bytes?: number }[]
  readonly events: { readonly name: string; readonly text: string } | null
  readonly start: string | null
  readonly done: () => void
}

export interface ImportsOptions {
  readonly store: MonitorStore
  readonly skidOf: (text: string, file: string) => Skid
  readonly toolVersion: string
  readonly wallMs: () => number
  readonly log: (line: string) => void
  /** A run appeared, moved on or ended. */
  readonly changed: () => void
  /** Does the imports; left out, they share the thread of the caller. */
  readonly work?: ImportWork
}

/** Imports asked for by pages, one after the other beside the live runs. */
export function createImports(o: ImportsOptions) {
  const importing = o.work ?? importInto(o.store)
  const work = new Map<number, { progress: number; fault: string | null }>()
  const abort = new AbortController()
  let queue: Promise<void> = Promise.resolve()

  async function run(id: RunId, stepsRun: RunId, acts: readonly Act[], startMs: number | null, job: UploadJob): Promise<void> {
    const at = work.get(id)!
    const total = Math.max(
      1,
      job.logs.reduce((sum, l) => sum + (l.bytes ?? 0), 0),
    )
    try {
      const { skidFile, skidText } = job
      const logs = job.logs.map(({ name, path }) => ({ name, path }))
      await importing(
        { run: id, stepsRun, skidFile, skidText, logs, acts, startMs, pauseMs: 2 },
        {
          progress: (bytes) => {
            at.progress = Math.min(1, bytes / total)
          },
          signal: abort.signal,
        },
      )
      work.delete(id)
    } catch (error) {
      if (abort.signal.aborted) return
      at.fault = error instanceof MonitorError ? error.line() : 'the import failed; the log of the server says why'
      o.log(`import of run ${id}: ${error instanceof MonitorError ? error.line() : (error as Error).stack}`)
    } finally {
      job.done()
      o.changed()
    }
  }

  return {
    /** Lists the run at once and works on it in the background. Errors: SKID_FILE, EVENTS_FILE, USAGE for a start that is no time. */
    begin(job: UploadJob): RunId {
      const skid = o.skidOf(job.skidText, job.skidFile)
      const acts = job.events === null ? [] : readEvents(job.events.name, new TextEncoder().encode(job.events.text), skid.timeZone)
      const startMs = job.start === null ? null : instantOf(job.start, skid.timeZone, 'start')
      const pair = createPair(o.store, {
        kind: 'uploaded',
        about: `${job.logs.map((l) => l.name).join(', ')}, by ${job.person}`,
        skidId: skid.skid,
        title: job.title,
        skidFile: job.skidFile,
        skidText: job.skidText,
        startedMs: o.wallMs(),
        toolVersion: o.toolVersion,
        state: 'importing',
      })
      work.set(pair.run, { progress: 0, fault: null })
      queue = queue.then(() => (abort.signal.aborted ? undefined : run(pair.run, pair.stepsRun, acts, startMs, job)))
      o.changed()
      return pair.run
    },
    busy: (run: number): ReturnType<Busy['importing']> => work.get(run) ?? null,
    /** Resolves when everything asked for is done. */
    idle: (): Promise<void> => queue,
    async stop(): Promise<void> {
      abort.abort()
      await queue
    },
  }
}
export type Imports = ReturnType<typeof createImports>
