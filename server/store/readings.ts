import type Database from 'better-sqlite3'
import { MonitorError } from '../core/errors.ts'
import { cell } from '../core/reading.ts'
import { readChannel } from './channel.ts'
import { keyOf, type RunId } from './keys.ts'
import { noRun } from './runs.ts'
import { openStrip, stripTags } from './segment.ts'
import type { SegmentTable } from './segments.ts'
import { decodeStage } from './staging.ts'
import { cellWidthsMs, isDrawn } from './tiers.ts'

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

/** Every sample of one tag in a window by source time, equal times in order of arrival; codes as in a RowBlock, never absent. */
export interface SamplesOfTag {
  readonly tag: number
  readonly tMs: Float64Array
  readonly values: Float64Array
  readonly codes: Uint8Array
}

interface Chunk {
  readonly values: Float64Array
  readonly codes: Uint8Array
  /** Every row has a plain value. */
  readonly plain: boolean
}
/** Rows of a segment or of a staged record: their times and a way to one tag; what it gives is good until asked again. */
type Rows = { readonly tMs: Float64Array; readonly tag: (index: number) => Chunk }

/**
 * Width of the buckets on their fixed grid. A span of n − 1 widths touches at most n buckets, wherever it begins. From 10 s on the
 * width is a multiple of a tier's cells, which are a third of it or less once the finest tier is left behind.
 */
export function bucketWidth(fromMs: number, toMs: number, most: number): number {
  const wanted = (toMs - fromMs) / (most - 1)
  let unit = 1
  for (const width of cellWidthsMs) if (width * (width === cellWidthsMs[0] ? 1 : 3) <= wanted) unit = width
  return Math.max(1, Math.ceil(wanted / unit)) * unit
}

/** Reads readings by time, packed and staged alike. The cost follows what is drawn, not the run's length. */
export function readingStore(db: Database.Database, segments: SegmentTable) {
  const head = db.prepare<[RunId], { width: number | null; first: number | null; last: number | null }>(
    `SELECT width, first_ms AS "first", last_ms AS "last" FROM head JOIN run ON run.id = head.run WHERE run = ? AND state <> 'deleted'`,
  )
  const staged = db
    .prepare<[number, number, number, number], number>(
      'SELECT id FROM stage WHERE id >= ? AND id < ? AND t_min < ? AND t_max >= ? ORDER BY id',
    )
    .pluck()
  const stageBody = db.prepare<[number], Buffer>('SELECT body FROM stage WHERE id = ?').pluck()

  const check = (run: RunId, tags: readonly number[]) => {
    const found = head.get(run)
    if (found === undefined) throw noRun(run)
    const wrong = tags.find((tag) => !(Number.isInteger(tag) && tag >= 0 && (found.width === null || tag < found.width)))
    if (wrong !== undefined)
      throw new MonitorError('TAG_UNKNOWN', `run ${run} has ${found.width ?? 0} tags, there is no tag ${wrong}`)
    return found
  }

  function segmentRows(run: RunId, seq: number, width: number): Rows {
    const { key, tMs } = segments.order(run, seq)
    const values = new Float64Array(tMs.length)
    const codes = new Uint8Array(tMs.length)
    const opened = new Map<number, ReturnType<typeof openStrip>>()
    return {
      tMs,
      tag(index) {
        const strip = Math.floor(index / stripTags)
        let readers = opened.get(strip)
        if (readers === undefined) {
          readers = openStrip(segments.strip(key, strip), Math.min(stripTags, width - strip * stripTags))
          opened.set(strip, readers)
        }
        return { values, codes, plain: readChannel(readers[index % stripTags]!, values, codes, tMs.length) }
      },
    }
  }

  /** Staged rows in a span as if one segment. */
  function stagedRows(run: RunId, width: number, fromMs: number, toMs: number): Rows | null {
    const blocks = staged
      .all(keyOf(run, 0), keyOf(run, 0) + 2 ** 36, toMs, fromMs)
      .map((id) => decodeStage(stageBody.get(id)!, width).block)
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
          for (let i = 0, from = index; i < block.rows; i++, from += width) {
            values[row] = block.values[from]!
            codes[row++] = block.codes[from]!
          }
        }
        return { values, codes, plain: false }
      },
    }
  }

  const envelope = (run: RunId, tags: readonly number[], fromMs: number, toMs: number, buckets = mostBuckets): Envelope => {
    if (!(toMs > fromMs) || !(buckets >= 2 && buckets <= mostBuckets))
      throw new MonitorError(
        'STORE_DATA',
        `an envelope needs from < to and 2 to ${mostBuckets} buckets, got ${fromMs}, ${toMs}, ${buckets}`,
      )
    const { width } = check(run, tags)
    const bucketMs = bucketWidth(fromMs, toMs, Math.floor(buckets))
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
    const addRows = ({ tMs, tag }: Rows): void => {
      const slots = Int32Array.from(tMs, (t) => (t >= low && t < high ? Math.floor(t / bucketMs) - first : -1))
      for (const own of out) {
        const { values, codes, plain } = tag(own.tag)
        addReadings(own, slots, values, codes, plain)
      }
    }
    const usePage = (id: number): void => {
      const page = segments.page(id)
      const slots = Int32Array.from(page.at, (cellNumber) => {
        const t = cellNumber * page.cellMs
        return t >= low && t < high ? Math.floor(t / bucketMs) - first : -1
      })
      for (const own of out) addCells(own, slots, page.tag(own.tag))
    }
    segments.visit(run, low, high, (node) => {
      if (bucketMs % node.cellMs === 0) {
        usePage(node.id)
        return true
      }
      if (node.level === 0) addRows(segmentRows(run, node.seq, width ?? 0))
      return false
    })
    const fresh = stagedRows(run, width ?? 0, low, high)
    if (fresh !== null) addRows(fresh)
    for (const own of out) for (let b = 0; b < n; b++) if (own.count[b]! > 0) own.mean[b] = own.mean[b]! / own.count[b]!
    return { fromMs: low, bucketMs, buckets: n, tags: out }
  }

  const samples = (run: RunId, tags: readonly number[], fromMs: number, toMs: number): SamplesOfTag[] => {
    const { width } = check(run, tags)
    const gathered = tags.map((tag) => ({
      tag,
      tMs: [] as Float64Array[],
      values: [] as Float64Array[],
      codes: [] as Uint8Array[],
    }))
    const addRows = ({ tMs, tag }: Rows): void => {
      const { from, to, whole } = window(tMs, fromMs, toMs)
      const times = whole ? tMs.subarray(from, to) : null
      for (const own of gathered) {
        const { values, codes, plain } = tag(own.tag)
        if (
          times !== null &&
          (plain || codes.indexOf(cell.absent, from) === -1 || codes.subarray(from, to).indexOf(cell.absent) === -1)
        ) {
          own.tMs.push(times)
          own.values.push(values.slice(from, to))
          own.codes.push(codes.slice(from, to))
          continue
        }
        const picked: number[] = []
        for (let i = from; i < to; i++) if (codes[i] !== cell.absent && tMs[i]! >= fromMs && tMs[i]! < toMs) picked.push(i)
        own.tMs.push(Float64Array.from(picked, (i) => tMs[i]!))
        own.values.push(Float64Array.from(picked, (i) => values[i]!))
        own.codes.push(Uint8Array.from(picked, (i) => codes[i]!))
      }
    }
    segments.visit(run, fromMs, toMs, (node) => {
      if (node.level === 0) addRows(segmentRows(run, node.seq, width ?? 0))
      return false
    })
    const fresh = stagedRows(run, width ?? 0, fromMs, toMs)
    if (fresh !== null) addRows(fresh)
    return gathered.map((own) =>
      sorted({ tag: own.tag, tMs: joined(own.tMs), values: joined(own.values), codes: joinedBytes(own.codes) }),
    )
  }

  return {
    /**
     * Least, greatest, mean and number of the plain and uncertain readings of each tag in at most `buckets` (2 to 2,000) buckets
     * over [fromMs, toMs), whole buckets at both ends. Every raw extreme is in it. Errors: STORE_DATA, TAG_UNKNOWN, STORE_CORRUPT.
     */
    envelope,
    /** Every sample of each tag with fromMs ≤ time < toMs, with its code. Errors: STORE_DATA, TAG_UNKNOWN, STORE_CORRUPT. */
    samples,
    /** Earliest and latest source time of a run's rows; null before the first. */
    span(run: RunId): { fromMs: number; toMs: number } | null {
      const { first, last } = check(run, [])
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

function addReadings(
  { min, max, mean, count }: Sums,
  slots: Int32Array,
  values: Float64Array,
  codes: Uint8Array,
  plain: boolean,
): void {
  for (let i = 0; i < slots.length; i++) {
    const s = slots[i]!
    if (s < 0) continue
    const v = values[i]!
    if (plain ? !Number.isFinite(v) : !isDrawn(codes[i]!, v)) continue
    if (count[s] === 0) {
      min[s] = v
      max[s] = v
    } else if (v < min[s]!) min[s] = v
    else if (v > max[s]!) max[s] = v
    count[s] = count[s]! + 1
    mean[s] = mean[s]! + v
  }
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

/** The stretch of rows from the first to the last in [fromMs, toMs), and whether all between are. */
function window(tMs: Float64Array, fromMs: number, toMs: number): { from: number; to: number; whole: boolean } {
  let from = tMs.length
  let to = 0
  let inside = 0
  for (let i = 0; i < tMs.length; i++) {
    const t = tMs[i]!
    if (t < fromMs || t >= toMs) continue
    if (from > i) from = i
    to = i + 1
    inside++
  }
  return { from: Math.min(from, to), to, whole: inside > 0 && inside === to - from }
}

function joined(parts: readonly Float64Array[]): Float64Array {
  if (parts.length === 1) return parts[0]!
  const all = new Float64Array(parts.reduce((n, part) => n + part.length, 0))
  let at = 0
  for (const part of parts) {
    all.set(part, at)
    at += part.length
  }
  return all
}

function joinedBytes(parts: readonly Uint8Array[]): Uint8Array {
  const all = new Uint8Array(parts.reduce((n, part) => n + part.length, 0))
  let at = 0
  for (const part of parts) {
    all.set(part, at)
    at += part.length
  }
  return all
}

/** By time where it is not already; equal times stay in order of arrival. */
function sorted(samples: SamplesOfTag): SamplesOfTag {
  const { tag, tMs, values, codes } = samples
  let i = 1
  while (i < tMs.length && tMs[i]! >= tMs[i - 1]!) i++
  if (i >= tMs.length) return samples
  const order = Array.from(tMs, (_, j) => j).sort((a, b) => tMs[a]! - tMs[b]! || a - b)
  return {
    tag,
    tMs: Float64Array.from(order, (j) => tMs[j]!),
    values: Float64Array.from(order, (j) => values[j]!),
    codes: Uint8Array.from(order, (j) => codes[j]!),
  }
}
