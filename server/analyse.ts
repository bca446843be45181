import { open } from 'node:fs/promises'
import { basename } from 'node:path'
import { MonitorError } from './core/errors.ts'
import { createCollector } from './core/pipeline/collect.ts'
import { createPipeline, type PipelineOptions, type PipelineState } from './core/pipeline/pipeline.ts'
import { phases } from './core/reading.ts'
import type { Report } from './core/report.ts'
import type { Act } from './core/sequence.ts'
import type { Skid } from './core/skid.ts'
import { cannotRead } from './file-trouble.ts'
import { type LogSource, type LogTally, readLogs } from './ingest/csv/read-log.ts'

export interface AnalyseOptions {
  readonly skid: Skid
  readonly sources: readonly LogSource[]
  readonly startMs?: number | null
  readonly fromMs?: number | null
  readonly toMs?: number | null
  /** Acts and events, by time; each enters the sequence before the first row of its time or later. */
  readonly acts?: readonly Act[]
  readonly onProgress?: (bytes: number) => void
  readonly signal?: AbortSignal
  readonly resume?: PipelineState
  /** What the pipeline starts from; a step test's knowledge not with `resume`, whose state has it. */
  readonly pipeline?: PipelineOptions
}

export interface Analysis {
  readonly report: Report
  readonly tallies: readonly LogTally[]
}

/** One logged run through the very pipeline that runs live. Errors: those of the reader; nothing is written. */
export async function analyseLog(options: AnalyseOptions): Promise<Analysis> {
  const { skid } = options
  const pipeline = createPipeline(skid, options.resume, options.pipeline)
  const collector = createCollector(skid)
  const words: string[] = [...phases]
  const { blocks, tallies } = readLogs([...options.sources], {
    skid,
    words,
    startMs: options.startMs ?? null,
    fromMs: options.fromMs ?? null,
    toMs: options.toMs ?? null,
    ...(options.onProgress ? { onProgress: options.onProgress } : {}),
  })
  const acts = [...(options.acts ?? [])].sort((a, b) => a.tMs - b.tMs)
  let next = 0
  for await (const block of blocks) {
    if (options.signal?.aborted) throw new MonitorError('USAGE', 'stopped before the end')
    let from = 0
    for (let i = 0; i < block.rows && next < acts.length; i++)
      while (next < acts.length && acts[next]!.tMs <= block.tMs[i]!) {
        if (i > from) collector.take(pipeline.push({ kind: 'rows', block: slice(block, from, i) }))
        from = i
        collector.take(pipeline.push({ kind: 'act', act: acts[next++]! }))
      }
    collector.take(pipeline.push({ kind: 'rows', block: from === 0 ? block : slice(block, from, block.rows) }))
  }
  while (next < acts.length) collector.take(pipeline.push({ kind: 'act', act: acts[next++]! }))
  collector.take(pipeline.finish())
  return { report: collector.report(pipeline, notesOf(tallies)), tallies }
}

function slice(b: import('./core/reading.ts').RowBlock, from: number, to: number): import('./core/reading.ts').RowBlock {
  return {
    rows: to - from,
    width: b.width,
    tMs: b.tMs.subarray(from, to),
    values: b.values.subarray(from * b.width, to * b.width),
    codes: b.codes.subarray(from * b.width, to * b.width),
  }
}

/** What the reader saw that a user should know, in plain words. */
function notesOf(tallies: readonly LogTally[]): string[] {
  const notes: string[] = []
  for (const t of tallies) {
    if (t.broken > 0)
      notes.push(
        `${t.name}: ${t.broken} broken rows not used, first at line ${t.brokenLines[0]?.line ?? '?'} (${t.brokenLines[0]?.reason ?? ''})`,
      )
    if (t.columnsExtra.length > 0) notes.push(`${t.name}: columns not in the skid file, kept out: ${t.columnsExtra.join(', ')}`)
    if (t.tagsMissing.length > 0) notes.push(`${t.name}: tags without a column in this file: ${t.tagsMissing.join(', ')}`)
  }
  return notes
}

/** A file as a source of the reader; a chunk is good until the next is asked for. Errors: FILE_READ with the path. */
export function fileSource(path: string): LogSource {
  async function* chunks(): AsyncGenerator<Uint8Array> {
    try {
      const file = await open(path)
      try {
        const bytes = new Uint8Array(1 << 18)
        for (;;) {
          const { bytesRead } = await file.read(bytes, 0, bytes.length, null)
          if (bytesRead === 0) return
          yield bytes.subarray(0, bytesRead)
        }
      } finally {
        await file.close()
      }
    } catch (cause) {
      if (cause instanceof MonitorError) throw cause
      throw cannotRead(path, cause)
    }
  }
  return { name: basename(path), chunks: chunks() }
}
