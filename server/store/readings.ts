import type Database from 'better-sqlite3'
import { MonitorError } from '../core/errors.ts'
import { readChannel } from './channel.ts'
import { damaged } from './checksum.ts'
import type { Head } from './heads.ts'
import type { RunId } from './keys.ts'
import { openStrip, stripTags } from './segment.ts'
import type { Tables } from './sequence-read.ts'
import { addToCells, cells } from './tiers.ts'
import { gather, inOrder, isRising, type Piece, type Rows, type SamplesOfTag, sharedTimes, windowed } from './window.ts'

export const mostBuckets = 2000

/** Buckets of one width on the grid n · bucketMs since 1970; the first holds the start of the span asked for, the last its end. */
export interface Envelope {
  readonly fromMs: number
  readonly bucketMs: number
  readonly buckets: number
  readonly tags: readonly EnvelopeOfTag[]
}
/** One number a bucket; where `count` is 0 the bucket is a gap and the other numbers mean nothing. */
export interface EnvelopeOfTag {
  readonly tag: number
  readonly min: Float64Array
  readonly max: Float64Array
  readonly mean: Float64Array
  readonly count: Float64Array
}

/**
 * Width of the buckets on their fixed grid. A span of n − 1 widths touches at most n buckets, wherever it begins. `cellMs` is the width
 * of the run's finest summary cells, null without any. Where buckets of half that or more are wanted, they are made of whole cells, two or
 * more of them where they can be, and at most twice as wide as wanted; below that readings are drawn one by one, some 100 a bucket at most.
 */
export function bucketWidth(fromMs: number, toMs: number, most: number, cellMs: number | null): number {
  const wanted = (toMs - fromMs) / (most - 1)
  if (cellMs === null || wanted * 2 < cellMs) return Math.max(1, Math.ceil(wanted))
  let unit = cellMs
  while (unit * 4 <= wanted) unit *= 2
  return Math.ceil(wanted / unit) * unit
}

/** Reads readings by time, packed and staged alike. The cost follows what is drawn, not the run's length. */
export function readingStore(db: Database.Database, { heads, stages, segments }: Tables) {
  const check = (run: RunId, tags: readonly number[]): Head => {
    const head = heads.get(run)
    const wrong = tags.find((tag) => !(Number.isInteger(tag) && tag >= 0 && (head.width === null || tag < head.width)))
    if (wrong === undefined) return head
    throw new MonitorError('TAG_UNKNOWN', `run ${run} has ${head.width ?? 0} tags, there is no tag ${wrong}`)
  }

  function segmentRows(run: RunId, seq: number, width: number): Rows {
    const { tMs } = segments.order(run, seq)
    const values = new Float64Array(tMs.length)
    const codes = new Uint8Array(tMs.length)
    const opened = new Map<number, ReturnType<typeof openStrip>>()
    return {
      tMs,
      tag(index) {
        const strip = Math.floor(index / stripTags)
        let readers = opened.get(strip)
        if (readers === undefined) {
          readers = openStrip(segments.strip(run, seq, strip), Math.min(stripTags, width - strip * stripTags))
          opened.set(strip, readers)
        }
        return { values, codes, plain: readChannel(readers[index % stripTags]!, values, codes, tMs.length) }
      },
    }
  }

  /** Staged rows in a span as if one segment. */
  function stagedRows(run: RunId, { width, stagedRows: expected }: Head, fromMs: number, toMs: number): Rows | null {
    const all = stages.list(run)
    if (all.reduce((sum, { rows }) => sum + rows, 0) !== expected) throw damaged(`some of the latest rows of run ${run}`)
    const blocks = all
      .filter(({ tMin, tMax }) => tMin < toMs && tMax >= fromMs)
      .map(({ seq }) => stages.open(run, seq, width ?? 0).block)
    const rows = blocks.reduce((sum, block) => sum + block.rows, 0)
    if (rows === 0) return null
    const tMs = new Float64Array(rows)
    let at = 0
    for (const block of blocks) {
      tMs.set(block.tMs, at)
      at += block.rows
    }
    const values = new Float64Array(rows)
    const codes = new Uint8Array(rows)
    return {
      tMs,
      tag(index) {
        let row = 0
        for (const block of blocks) {
          for (let i = 0, from = index; i < block.rows; i++, from += block.width) {
            values[row] = block.values[from]!
            codes[row++] = block.codes[from]!
          }
        }
        return { values, codes, plain: false }
      },
    }
  }

  const envelope = (run: RunId, tags: readonly number[], fromMs: number, toMs: number, buckets = mostBuckets): Envelope => {
    if (!(toMs > fromMs && Number.isFinite(toMs - fromMs)) || !(buckets >= 2 && buckets <= mostBuckets))
      throw new MonitorError(
        'STORE_DATA',
        `an envelope needs from < to and 2 to ${mostBuckets} buckets, got ${fromMs}, ${toMs}, ${buckets}`,
      )
    const known = check(run, tags)
    const bucketMs = bucketWidth(fromMs, toMs, Math.floor(buckets), segments.finestCells(run))
    const first = Math.floor(fromMs / bucketMs)
    const n = Math.ceil(toMs / bucketMs) - first
    const low = first * bucketMs
    const high = low + n * bucketMs
    const out = tags.map((tag) => ({
      tag,
      min: new Float64Array(n),
      max: new Float64Array(n),
      mean: new Float64Array(n),
      count: new Float64Array(n),
    }))
    const slotOf = (t: number): number => (t >= low && t < high ? Math.floor(t / bucketMs) - first : -1)
    const addRows = ({ tMs, tag }: Rows): void => {
      const slots = new Int32Array(tMs.length)
      for (let i = 0; i < slots.length; i++) slots[i] = slotOf(tMs[i]!)
      for (const own of out) {
        const { values, codes, plain } = tag(own.tag)
        addToCells({ ...own, sum: own.mean, places: 0 }, slots, values, codes, plain)
      }
    }
    let room = cells(512)
    const usePage = (id: number): void => {
      const page = segments.page(id)
      const slots = new Int32Array(page.at.length)
      for (let i = 0; i < slots.length; i++) slots[i] = slotOf(page.at[i]! * page.cellMs)
      if (room.count.length < page.at.length) room = cells(page.at.length * 2)
      for (const own of out) addCells(own, slots, page.tag(own.tag, room))
    }
    segments.visit(run, known.packed, low, high, (node) => {
      if (bucketMs % node.cellMs === 0) {
        usePage(node.id)
        return true
      }
      if (node.level === 0) addRows(segmentRows(run, node.seq, known.width ?? 0))
      return false
    })
    const fresh = stagedRows(run, known, low, high)
    if (fresh !== null) addRows(fresh)
    for (const own of out) for (let b = 0; b < n; b++) if (own.count[b]! > 0) own.mean[b] = own.mean[b]! / own.count[b]!
    return { fromMs: low, bucketMs, buckets: n, tags: out }
  }

  const samples = (run: RunId, tags: readonly number[], fromMs: number, toMs: number): SamplesOfTag[] => {
    const known = check(run, tags)
    const pieces: Piece[] = []
    segments.visit(run, known.packed, fromMs, toMs, (node) => {
      if (node.level === 0) pieces.push(windowed(segmentRows(run, node.seq, known.width ?? 0), fromMs, toMs))
      return false
    })
    const fresh = stagedRows(run, known, fromMs, toMs)
    if (fresh !== null) pieces.push(windowed(fresh, fromMs, toMs))
    const shared = sharedTimes(pieces)
    const rising = isRising(shared)
    return tags.map((tag) => {
      const own = gather(tag, pieces, shared, fromMs, toMs)
      return own.tMs === shared ? (rising ? own : inOrder(own)) : isRising(own.tMs) ? own : inOrder(own)
    })
  }

  return {
    /**
     * Least, greatest, mean and number of the plain and uncertain readings of each tag in at most `buckets` (2 to 2,000) buckets
     * over [fromMs, toMs), whole buckets at both ends. Every raw extreme is in it. Errors: STORE_DATA, TAG_UNKNOWN, STORE_CORRUPT.
     */
    envelope: db.transaction(envelope),
    /** Every sample of each tag with fromMs ≤ time < toMs, with its code. Errors: STORE_DATA, TAG_UNKNOWN, STORE_CORRUPT. */
    samples: db.transaction(samples),
    /** Earliest and latest source time of a run's rows; null before the first. */
    span(run: RunId): { fromMs: number; toMs: number } | null {
      const { firstMs: first, lastMs: last } = check(run, [])
      return first === null || last === null ? null : { fromMs: first, toMs: last }
    },
  }
}

interface Sums {
  readonly min: Float64Array
  readonly max: Float64Array
  readonly mean: Float64Array
  readonly count: Float64Array
}

function addCells(
  { min, max, mean, count }: Sums,
  slots: Int32Array,
  cells: { count: Float64Array; min: Float64Array; max: Float64Array; sum: Float64Array },
): void {
  for (let i = 0; i < slots.length; i++) {
    const s = slots[i]!
    if (s < 0 || cells.count[i] === 0) continue
    if (count[s] === 0 || cells.min[i]! < min[s]!) min[s] = cells.min[i]!
    if (count[s] === 0 || cells.max[i]! > max[s]!) max[s] = cells.max[i]!
    count[s] = count[s]! + cells.count[i]!
    mean[s] = mean[s]! + cells.sum[i]!
  }
}
