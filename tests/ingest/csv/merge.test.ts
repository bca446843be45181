import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { MonitorError } from '../../../server/core/errors.ts'
import type { RowBlock } from '../../../server/core/reading.ts'
import { type LogSource, readLog, readLogs } from '../../../server/ingest/csv/read-log.ts'
import { at, bytesOf, collector, logFormat, skidOf } from './helpers.ts'

async function* pieces(text: string, size: number): AsyncGenerator<Uint8Array> {
  const bytes = bytesOf(text)
  for (let from = 0; from < bytes.length; from += size) yield bytes.subarray(from, from + size)
}
const source = (name: string, text: string, size = 1000): LogSource => ({ name, chunks: pieces(text, size) })
async function collect(blocks: AsyncIterable<RowBlock>, width: number): Promise<ReturnType<typeof collector>> {
  const out = collector(width)
  for await (const block of blocks) out.add([block])
  return out
}
const skid = skidOf(['PT-1', 'PT-2'])
const t0 = at('2031-05-04T00:00:00Z')
const file = (column: string, times: readonly number[], value = 1): string =>
  `time,${column}\n${times.map((s) => `${new Date(t0 + 1000 * s).toISOString()},${value}\n`).join('')}`

describe('several files as one run', () => {
  it('merges two loggers by time; each row speaks of its own tags alone', async () => {
    const { blocks, tallies } = readLogs([source('a.csv', file('PT-1', [0, 2, 4])), source('b.csv', file('PT-2', [1, 2, 3]))], {
      skid,
      words: [],
      startMs: null,
    })
    const got = await collect(blocks, 2)
    expect(got.t.map((t) => (t - t0) / 1000)).toEqual([0, 1, 2, 2, 3, 4])
    expect(got.codes).toEqual([[1, 0, 1, 0, 0, 1], [0, 1, 0, 1, 1, 0]]) // biome-ignore format: a table
    expect(tallies.map((t) => [t.name, t.used, t.tagsMissing])).toEqual([['a.csv', 3, ['PT-2']], ['b.csv', 3, ['PT-1']]]) // biome-ignore format: one line
  })
  it('puts rotated pieces in order of time whatever the order of the files', async () => {
    const cut = [file('PT-1', [0, 1, 2], 1), file('PT-1', [3, 4], 2), file('PT-1', [5], 3)]
    for (const order of [
      [0, 1, 2],
      [2, 0, 1],
    ]) {
      // biome-ignore format: one line
      const got = await collect(readLogs(order.map((i) => source(`${i}.csv`, cut[i]!)), { skid, words: [], startMs: null }).blocks, 2) // biome-ignore format: one line
      expect(got.values[0]).toEqual([1, 1, 1, 2, 2, 3])
    }
  })
  // SIG-10
  it('adds the clock offset of each logger by its file pattern before merging', async () => {
    const s = skidOf(['PT-1', 'PT-2'], { log: [logFormat({ files: 'slow_*.csv', clockOffsetSeconds: 10 }), logFormat()] })
    const { blocks } = readLogs([source('dir/slow_1.csv', file('PT-1', [0])), source('dir/other.csv', file('PT-2', [5]))], {
      skid: s,
      words: [],
      startMs: null,
    })
    expect((await collect(blocks, 2)).t.map((t) => (t - t0) / 1000)).toEqual([5, 10])
  })
  it('keeps a late row in its file behind the row it followed', async () => {
    const { blocks } = readLogs([source('a.csv', file('PT-1', [0, 5, 3, 6])), source('b.csv', file('PT-2', [4, 5]))], {
      skid,
      words: [],
      startMs: null,
    })
    expect((await collect(blocks, 2)).t.map((t) => (t - t0) / 1000)).toEqual([0, 4, 5, 3, 5, 6])
  })
  it('goes on with the next day where files of bare times of day are cut at midnight', async () => {
    const day = (cells: readonly string[]): string => `time,PT-1\n${cells.map((c) => `${c},1\n`).join('')}`
    const all = [day(['23:59:58', '23:59:59']), day(['00:00:00', '12:00:00', '23:59:59']), day(['00:00:00'])]
    const { blocks, tallies } = readLogs(all.map((text, i) => source(`${i}.csv`, text, 5)), { skid, words: [], startMs: t0 + 86_390_000 }) // biome-ignore format: one line
    const got = await collect(blocks, 2)
    expect(got.t.map((t) => (t - t0) / 1000 - 86_400)).toEqual([-2, -1, 0, 43_200, 86_399, 86_400])
    expect(tallies.map((t) => t.used)).toEqual([2, 3, 1])
  })
  it('stops at the first file that is wrong, naming it', async () => {
    const { blocks } = readLogs([source('a.csv', file('PT-1', [0])), source('b.csv', 'time,PT-7\n')], {
      skid,
      words: [],
      startMs: null,
    })
    const error: unknown = await collect(blocks, 2).catch((e: unknown) => e)
    expect(error).toBeInstanceOf(MonitorError)
    expect((error as MonitorError).place?.file).toBe('b.csv')
  })
  it('gives, for any files with rising times, all rows in order of time, equal times in order of the files', async () => {
    const rising = fc.array(fc.integer({ min: 0, max: 40 }), { minLength: 1, maxLength: 30 }).map((a) => a.sort((x, y) => x - y))
    await fc.assert(
      fc.asyncProperty(fc.array(rising, { minLength: 1, maxLength: 4 }), fc.integer({ min: 1, max: 500 }), async (files, size) => {
        const sources = files.map((t, i) => source(`${i}.csv`, file('PT-1', t, i), size))
        const got = await collect(readLogs(sources, { skid, words: [], startMs: null }).blocks, 2)
        const wanted = files.flatMap((times, i) => times.map((t) => ({ t, i }))).sort((a, b) => a.t - b.t || a.i - b.i)
        expect(got.t.map((t, k) => ({ t: (t - t0) / 1000, i: got.values[0]![k] }))).toEqual(wanted)
      }),
      { numRuns: 100, seed: 31 },
    )
  })
  it('reads 3000 rows of two interleaved files, more than a block holds, in order', async () => {
    const even = Array.from({ length: 1500 }, (_, i) => 2 * i)
    const { blocks } = readLogs([source('a.csv', file('PT-1', even), 70_000), source('b.csv', file('PT-2', even.map((t) => t + 1)), 333)], { skid, words: [], startMs: null }) // biome-ignore format: one line
    expect((await collect(blocks, 2)).t.map((t) => (t - t0) / 1000)).toEqual(Array.from({ length: 3000 }, (_, i) => i))
  })
  it('reports the bytes of all files as progress', async () => {
    const seen: number[] = []
    const texts = [file('PT-1', [0, 2]), file('PT-2', [1])]
    const { blocks } = readLogs(texts.map((t, i) => source(`${i}.csv`, t)), { skid, words: [], startMs: null, onProgress: (n) => seen.push(n) }) // biome-ignore format: one line
    await collect(blocks, 2)
    expect(seen.at(-1)).toBe(texts.join('').length)
  })
})

describe('one file', () => {
  it('streams: the first rows are there before the source has given its last piece', async () => {
    let given = 0
    async function* slow(): AsyncGenerator<Uint8Array> {
      for await (const piece of pieces(
        file(
          'PT-1',
          Array.from({ length: 20_000 }, (_, i) => i),
        ),
        65_536,
      )) {
        given++
        yield piece
      }
    }
    const { blocks, tally } = readLog({ name: 'run.csv', chunks: slow() }, { skid, words: [], startMs: null })
    const first = await blocks.next()
    expect([first.done, given]).toEqual([false, 1])
    for await (const block of blocks) expect(block.rows).toBeGreaterThan(0)
    expect([given, tally.used]).toEqual([9, 20_000])
  })
})
