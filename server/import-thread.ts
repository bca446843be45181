import { parentPort, Worker, workerData } from 'node:worker_threads'
import { type ErrorCode, MonitorError, type Place } from './core/errors.ts'
import { type Imported, type ImportTask, type ImportWork, importInto } from './import-task.ts'
import { openStore } from './store/open.ts'

interface Order {
  readonly data: string
  readonly toolVersion: string
  readonly task: ImportTask
}

type Told =
  | { readonly kind: 'progress'; readonly bytes: number }
  | { readonly kind: 'done'; readonly imported: Imported }
  | {
      readonly kind: 'refused'
      readonly code: ErrorCode
      readonly message: string
      readonly hint: string | null
      readonly place: Place | null
    }
  | { readonly kind: 'failed'; readonly message: string; readonly stack: string }

/** Little room for what is new, and a bound (an import lives on some 20 MB) that makes garbage go early: memory stays flat, whatever the length. */
export const threadLimits = { maxYoungGenerationSizeMb: 4, maxOldGenerationSizeMb: 512 }
/** Bytes between two tellings of progress. */
const tellBytes = 1 << 20

/**
 * Imports, each in a thread of its own with a connection of its own, so that live scans and pages never wait for more than one short commit.
 * `entry` is the program that calls `importThread` when it is started as a thread.
 */
export function importInThread({ entry, data, toolVersion }: { entry: URL; data: string; toolVersion: string }): ImportWork {
  return (task, { progress, signal }) =>
    new Promise((done, fail) => {
      const worker = new Worker(entry, {
        workerData: { data, toolVersion, task } satisfies Order,
        argv: [],
        resourceLimits: threadLimits,
      })
      const stop = (): void => worker.postMessage('stop')
      signal.addEventListener('abort', stop)
      if (signal.aborted) stop()
      let outcome: Error | Imported = new Error('the thread of the import ended before it was done')
      worker.on('message', (told: Told) => {
        if (told.kind === 'progress') progress(told.bytes)
        else if (told.kind === 'done') outcome = told.imported
        else if (told.kind === 'refused') {
          const { code, message, hint, place } = told
          outcome = new MonitorError(code, message, { ...(hint === null ? {} : { hint }), ...(place === null ? {} : { place }) })
        } else outcome = Object.assign(new Error(told.message), { stack: told.stack })
      })
      worker.on('error', (error) => {
        outcome = error instanceof Error ? error : new Error(String(error))
      })
      worker.on('exit', () => {
        signal.removeEventListener('abort', stop)
        if (outcome instanceof Error) fail(outcome)
        else done(outcome)
      })
    })
}

/** What the thread does: one import, told to whoever started it. */
export async function importThread(): Promise<void> {
  const port = parentPort!
  const { data, toolVersion, task } = workerData as Order
  const tell = (told: Told): void => port.postMessage(told)
  const abort = new AbortController()
  port.on('message', () => abort.abort())
  let told = 0
  try {
    const store = openStore(data, { joined: true, toolVersion })
    let imported: Imported
    try {
      imported = await importInto(store)(task, {
        signal: abort.signal,
        progress: (bytes) => {
          if (bytes - told < tellBytes) return
          told = bytes
          tell({ kind: 'progress', bytes })
        },
      })
    } finally {
      store.close()
    }
    tell({ kind: 'done', imported })
  } catch (error) {
    if (error instanceof MonitorError) {
      const { code, message, hint, place } = error
      tell({ kind: 'refused', code, message, hint, place })
    } else {
      const e = error instanceof Error ? error : new Error(String(error))
      tell({ kind: 'failed', message: e.message, stack: e.stack ?? e.message })
    }
  } finally {
    port.close()
  }
}
