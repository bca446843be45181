import { MonitorError } from './core/errors.ts'
import { phases, type RowBlock, rowBlock } from './core/reading.ts'
import type { Act, Entry } from './core/sequence.ts'
import type { Skid } from './core/skid.ts'
import { type LogSource, type LogTally, readLogs } from './ingest/csv/read-log.ts'
import { createEngine } from './monitor/engine.ts'
import type { MonitorStore } from './monitor/needs.ts'
import type { RunId } from './store/keys.ts'

export interface ImportOptions {
  readonly store: MonitorStore
  readonly run: RunId
  readonly stepsRun: RunId
  readonly skid: Skid
  readonly sources: readonly LogSource[]
  readonly startMs: number | null
  /** By time; each enters the sequence before the first row of its time or later. */
  readonly acts: readonly Act[]
  readonly onProgress?: (bytes: number) => void
  readonly signal?: AbortSignal
  /** Lets other work of the process in; called between commits. */
  readonly breathe?: () => Promise<void>
  /** Rows in one commit; whole segments of the store are written once instead of twice, small ones keep nobody else waiting. */
  readonly rowsPerCommit?: number
}

/**
 * Reads logs into a run: the recorded sequence as `analyse` would take it, then its journal and its final report, so that the stored run
 * tells what `analyse` tells. The run counts as imported only once all is on disk; an import cut short stays 'importing'.
 * Errors: those of the reader and of the store; USAGE when stopped.
 */
export async function importRun(o: ImportOptions): Promise<{ rows: number; tallies: readonly LogTally[] }> {
  const { store, run, skid } = o
  const words: string[] = [...phases]
  let wordsKnown = 0
  const engine = createEngine({ skid, store, run, stepsRun: o.stepsRun })
  const acts = [...o.acts].sort((a, b) => a.tMs - b.tMs)
  let nextAct = 0
  let rows = 0
  let waiting: Entry[] = []
  let waitingRows = 0
  const rowsPerCommit = o.rowsPerCommit ?? 8192
  const spare: RowBlock[] = []

  /** The reader fills its block anew, so what waits is a copy; its memory is used again after the commit. */
  function wait(block: RowBlock, from: number, to: number): void {
    const { width } = block
    const rows = to - from
    const kept = spare.pop() ?? rowBlock(Math.max(rows, 1024), width)
    const into = kept.tMs.length < rows ? rowBlock(rows, width) : kept
    into.rows = rows
    into.tMs.set(block.tMs.subarray(from, to))
    into.values.set(block.values.subarray(from * width, to * width))
    into.codes.set(block.codes.subarray(from * width, to * width))
    waiting.push({ kind: 'rows', block: into })
    waitingRows += rows
  }

  async function commit(): Promise<void> {
    if (o.signal?.aborted) throw new MonitorError('USAGE', 'stopped before the end')
    if (waiting.length > 0) {
      const fresh = words.slice(wordsKnown)
      store.sequence.append([{ run, entries: waiting, ...(fresh.length > 0 ? { words: { from: wordsKnown, words: fresh } } : {}) }])
      wordsKnown = words.length
      engine.push(waiting)
      store.together(() => engine.journal())
      engine.news()
    }
    for (const entry of waiting) if (entry.kind === 'rows') spare.push(entry.block)
    waiting = []
    waitingRows = 0
    await o.breathe?.()
  }

  const { blocks, tallies } = readLogs([...o.sources], {
    skid,
    words,
    startMs: o.startMs,
    ...(o.onProgress ? { onProgress: o.onProgress } : {}),
  })
  for await (const block of blocks) {
    let from = 0
    for (let i = 0; i < block.rows && nextAct < acts.length; i++)
      while (nextAct < acts.length && acts[nextAct]!.tMs <= block.tMs[i]!) {
        if (i > from) wait(block, from, i)
        from = i
        waiting.push({ kind: 'act', act: acts[nextAct++]! })
      }
    wait(block, from, block.rows)
    rows += block.rows
    if (waitingRows >= rowsPerCommit) await commit()
  }
  while (nextAct < acts.length) waiting.push({ kind: 'act', act: acts[nextAct++]! })
  await commit()
  engine.finish()
  store.together(() => engine.journal())
  engine.news()
  engine.save()
  store.together(() => {
    store.runs.setState(run, 'ended')
    store.runs.setState(o.stepsRun, 'ended')
  })
  return { rows, tallies }
}
