import type { RowBlock } from '../../core/reading.ts'
import type { Dialect } from './dialect.ts'
import { logFormatOf } from './log-format.ts'
import { mergeRows } from './merge.ts'
import { type LogOptions, PushReader } from './reader.ts'
import { freshTally, type LogTally } from './tally.ts'
import { timeParser } from './time-parse.ts'

export type { LogOptions } from './reader.ts'
export type { LogTally } from './tally.ts'

export interface LogSource {
  readonly name: string
  readonly chunks: AsyncIterable<Uint8Array>
}

/** A source may hand over a whole file at once; it is read in pieces all the same. */
const piece = 1 << 18

/** Reads one log. A block is good until the next one is asked for. The tally fills as the blocks come. */
export function readLog(source: LogSource, options: LogOptions): { blocks: AsyncGenerator<RowBlock>; tally: LogTally } {
  const reader = new PushReader(source.name, options)
  return { blocks: pushed(source, reader), tally: reader.tally }
}

async function* pushed(source: LogSource, reader: PushReader): AsyncGenerator<RowBlock> {
  for await (const chunk of source.chunks) {
    for (let from = 0; from < chunk.length; from += piece) yield* reader.feed(chunk.subarray(from, from + piece))
  }
  yield* reader.end()
}

/**
 * Reads several files as one run: pieces of one logger, different loggers, or both. Rows are merged by each file's latest time so
 * far (see `mergeRows`). Files of one logger that carry bare times of day are read one after the other in the order given, each
 * starting where the one before it ended, so that a file cut at midnight goes on with the next day. Tallies are in the order of the sources; `onProgress` counts
 * the bytes of all.
 */
export function readLogs(
  sources: readonly LogSource[],
  options: LogOptions,
): { blocks: AsyncGenerator<RowBlock>; tallies: LogTally[] } {
  const tallies = sources.map((s) => freshTally(s.name))
  const bytes = sources.map(() => 0)
  const own = (i: number): LogOptions => ({
    ...options,
    onProgress: (n) => {
      bytes[i] = n
      options.onProgress?.(bytes.reduce((a, b) => a + b, 0))
    },
  })
  const readerOf = (i: number, startMs: number | null): PushReader =>
    new PushReader(sources[i]!.name, { ...own(i), startMs }, null, tallies[i]!)

  async function* chain(members: readonly { index: number; source: LogSource }[]): AsyncGenerator<RowBlock> {
    let startMs = options.startMs
    for (const { index, source } of members) {
      const reader = readerOf(index, startMs)
      yield* pushed(source, reader)
      startMs = reader.clockMs() ?? startMs
    }
  }

  async function* blocks(): AsyncGenerator<RowBlock> {
    const chains: { key: string | null; members: { index: number; source: LogSource }[] }[] = []
    for (const [index, source] of sources.entries()) {
      const peeked = options.startMs === null || sources.length === 1 ? { source, dialect: null } : await peek(source, options)
      const key = chainKey(peeked.dialect, logFormatOf(options.skid, source.name).files)
      const same = key === null ? undefined : chains.find((c) => c.key === key)
      if (same === undefined) chains.push({ key, members: [{ index, source: peeked.source }] })
      else same.members.push({ index, source: peeked.source })
    }
    const only = chains[0]
    if (only !== undefined && chains.length === 1) yield* chain(only.members)
    else yield* mergeRows(chains.map((c) => chain(c.members)), options.skid.tags.length + (options.skid.phaseColumn === null ? 0 : 1)) // biome-ignore format: one line
  }
  return { blocks: blocks(), tallies }
}

/** Files with the same header, written by the same logger, as bare times of day; null where each file's times stand for themselves. */
function chainKey(dialect: Dialect | null, files: string | null): string | null {
  if (dialect === null || !dialect.formats.some((f) => timeParser(f).basis === 'day')) return null
  return JSON.stringify([files, dialect.header])
}

/** The dialect of a source, and the source again with the bytes read for it in front; the dialect null where the file is too short to tell. */
async function peek(source: LogSource, options: LogOptions): Promise<{ source: LogSource; dialect: Dialect | null }> {
  const chunks = source.chunks[Symbol.asyncIterator]()
  const held: Uint8Array[] = []
  const probe = new PushReader(source.name, { skid: options.skid, words: [], startMs: options.startMs })
  let done = false
  while (!done && probe.point() === null) {
    const next = await chunks.next()
    if (next.done) done = true
    else {
      // The producer may use its buffer again.
      held.push(next.value.slice())
      for (let from = 0; from < next.value.length && probe.point() === null; from += piece)
        probe.feed(next.value.subarray(from, from + piece))
    }
  }
  if (done && held.length > 0) probe.settle()
  async function* again(): AsyncGenerator<Uint8Array> {
    try {
      yield* held
      held.length = 0
      for (let next = await chunks.next(); !next.done; next = await chunks.next()) yield next.value
    } finally {
      await chunks.return?.()
    }
  }
  return { source: { name: source.name, chunks: again() }, dialect: probe.point()?.dialect ?? null }
}
