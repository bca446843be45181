import type { StartingKnowledge } from './core/baseline/starting-knowledge.ts'
import { MonitorError } from './core/errors.ts'
import { phases, type RowBlock, rowBlock } from './core/reading.ts'
import type { Act, Entry } from './core/sequence.ts'
import type { Skid } from './core/skid.ts'
import { type LogSource, type LogTally, readLogs } from './ingest/csv/read-log.ts'
import { createEngine } from './monitor/engine.ts'
import type { MonitorStore } from './monitor/needs.ts'
import type { RunId } from './store/keys.ts'
import { segmentRows } from './store/segment.ts'

/** An accepted step test that a run begins with, recorded as its first act. */
export interface Begins {
  readonly known: readonly StartingKnowledge[]
  readonly reason: string
  readonly person: string
}

export interface ImportOptions {
  readonly store: MonitorStore
  readonly run: RunId
  readonly stepsRun: RunId
  readonly skid: Skid
  readonly sources: readonly LogSource[]
  readonly startMs: number | null
  /** By time; each enters the sequence before the first row of its time or later. */
  readonly acts: readonly Act[]
  readonly commissioned?: Begins
  readonly onProgress?: (bytes: number) => void
  readonly signal?: AbortSignal
  /** Lets other work of the process in; called between commits. */
  readonly breathe?: () => Promise<void>
  /** Rows in one commit: of whole segments of the store none is written twice; few keep nobody else waiting. */
  readonly rowsPerCommit?: number
}

/**
 * Reads logs into a run: the recorded sequence as `analyse` would take it, then its journal and its final report, so that the stored run
 * tells what `analyse` tells. The run counts as imported only once all is on disk; an import cut short stays 'importing'.
 * Errors: those of the reader and of the store; USAGE when stopped.
 */
export async function importRun(o: ImportOptions): Promise<{ rows: number; tallies: readonly LogTally[] }> {
  const { store, run, skid } = o
  const rowsPerCommit = o.rowsPerCommit ?? 2 * segmentRows
  const words: string[] = [...phases]
  let wordsKnown = 0
  const engine = createEngine({ skid, store, run, stepsRun: o.stepsRun, journalOnly: true })
  const acts = [...o.acts].sort((a, b) => a.tMs - b.tMs)
  let nextAct = 0
  let rows = 0
  let waiting: Entry[] = []
  let room = rowsPerCommit
  const spare: RowBlock[] = []

  /** The reader fills its block anew, so what waits is a copy; its memory is used again after the commit. */
  function wait(block: RowBlock, from: number, to: number): void {
    const last = waiting.at(-1)
    const into = last?.kind === 'rows' ? last.block : (spare.pop() ?? rowBlock(rowsPerCommit, block.width))
    const { width, rows } = into
    if (last?.kind !== 'rows') waiting.push({ kind: 'rows', block: into })
    into.tMs.set(block.tMs.subarray(from, to), rows)
    into.values.set(block.values.subarray(from * width, to * width), rows * width)
    into.codes.set(block.codes.subarray(from * width, to * width), rows * width)
    into.rows = rows + to - from
    room -= to - from
  }

  /** Writes the rows that wait, and in the same transaction what those before them brought about; then takes these through the pipeline. */
  async function commit(): Promise<void> {
    if (o.signal?.aborted) throw new MonitorError('USAGE', 'stopped before the end')
    const fresh = words.slice(wordsKnown)
    store.together(() => {
      if (waiting.length > 0)
        store.sequence.append([
          { run, entries: waiting, ...(fresh.length > 0 ? { words: { from: wordsKnown, words: fresh } } : {}) },
        ])
      engine.journal()
    })
    engine.news()
    wordsKnown = words.length
    engine.push(waiting)
    for (const entry of waiting)
      if (entry.kind === 'rows') {
        entry.block.rows = 0
        spare.push(entry.block)
      }
    waiting = []
    room = rowsPerCommit
    await o.breathe?.()
  }

  const { blocks, tallies } = readLogs([...o.sources], {
    skid,
    words,
    startMs: o.startMs,
    ...(o.onProgress ? { onProgress: o.onProgress } : {}),
  })
  for await (const block of blocks) {
    if (rows === 0 && o.commissioned !== undefined)
      acts.unshift({ kind: 'commissioned', tMs: block.tMs[0] ?? 0, ...o.commissioned })
    for (let from = 0; from < block.rows; ) {
      while (nextAct < acts.length && acts[nextAct]!.tMs <= block.tMs[from]!) waiting.push({ kind: 'act', act: acts[nextAct++]! })
      let to = Math.min(block.rows, from + room)
      if (nextAct < acts.length)
        for (let i = from + 1; i < to; i++)
          if (acts[nextAct]!.tMs <= block.tMs[i]!) {
            to = i
            break
          }
      wait(block, from, to)
      from = to
      if (room === 0) await commit()
    }
    rows += block.rows
  }
  while (nextAct < acts.length) waiting.push({ kind: 'act', act: acts[nextAct++]! })
  await commit()
  store.together(() => engine.journal())
  engine.news()
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
