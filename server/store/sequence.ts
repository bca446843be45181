import { MonitorError } from '../core/errors.ts'
import type { RowBlock } from '../core/reading.ts'
import type { Entry } from '../core/sequence.ts'
import type { NumberedAct } from './acts.ts'
import { damaged } from './checksum.ts'
import type { Head } from './heads.ts'
import type { Json, RunId } from './keys.ts'
import { Columns, segmentRows } from './segment.ts'
import { type Tables, unfold } from './sequence-read.ts'
import type { Stage } from './staging.ts'

/** What one run adds in one commit. */
export interface Append {
  readonly run: RunId
  readonly entries: readonly Entry[]
  /** Words of text tags that these rows are the first to use, from that index on. */
  readonly words?: { readonly from: number; readonly words: readonly string[] }
  /** Where the source stands after these entries (a byte offset ...): kept in the same commit, so that a restart resumes exactly there. */
  readonly sourceState?: Json
}

/** An append of so many rows that fills a segment, staged rows included, is written as segments at once. */
const bulkRows = 1024
/** Staged records opened at a time. */
const few = 32

const bad = (message: string) => new MonitorError('STORE_DATA', message)

/** Checks what a codec could not keep, counts, and finds the span of the rows' times. */
function measure(run: RunId, entries: readonly Entry[], known: number | null) {
  let width = known
  let rows = 0
  let ticks = 0
  let tMin = Infinity
  let tMax = -Infinity
  for (const entry of entries) {
    if (entry.kind === 'tick') {
      if (!Number.isFinite(entry.tMs)) throw bad(`a tick of run ${run} has no finite time`)
      ticks++
    }
    if (entry.kind !== 'rows') continue
    const { block } = entry
    width ??= block.width
    if (block.width !== width) throw bad(`run ${run} has rows of ${width} tags, these have ${block.width}`)
    rows += block.rows
    for (let i = 0; i < block.rows; i++) {
      const t = block.tMs[i]!
      if (!Number.isFinite(t)) throw bad(`a row of run ${run} has no finite time`)
      if (t < tMin) tMin = t
      if (t > tMax) tMax = t
    }
    for (let i = 0, n = block.rows * width; i < n; i++)
      if (block.codes[i]! > 7) throw bad(`a row of run ${run} has the unknown cell code ${block.codes[i]}`)
  }
  return { width, rows, ticks, tMin, tMax }
}

/** Appends to runs' sequences and packs what was staged. Callers bring the transaction. */
export function sequenceWriter({ heads, acts, stages, segments }: Tables) {
  let spare = new Columns(0)
  const columnsFor = (width: number): Columns => {
    if (spare.width !== width) spare = new Columns(width)
    spare.clear()
    return spare
  }

  /** Takes staged records into the columns until `stop` says so after one of them; gives the number after the last taken. */
  function unstage(run: RunId, columns: Columns, start: number, stop: (seq: number) => boolean): number {
    for (let seq = start; ; ) {
      const some = stages.list(run, seq, few)
      if (some.length === 0) return seq
      for (const note of some) {
        addStage(columns, stages.open(run, note.seq, columns.width))
        seq = note.end
        if (stop(seq)) return seq
      }
    }
  }

  /** Straight into full segments, as an import brings them; only the rest is staged. Gives what is staged then. */
  function appendBulk(
    run: RunId,
    { next, packed }: Head,
    entries: readonly Entry[],
    width: number,
  ): Pick<Head, 'packed' | 'stagedRows' | 'stagedTicks'> {
    const columns = columnsFor(width)
    let start = packed
    const closeIfFull = (seq: number): false => {
      if (columns.full) {
        segments.add(run, start, seq, columns)
        columns.clear()
        start = seq
      }
      return false
    }
    unstage(run, columns, start, closeIfFull)
    stages.drop(run, next)
    let seq = next
    for (const entry of entries) {
      if (entry.kind === 'act') seq++
      else if (entry.kind === 'tick') {
        columns.addTick(entry.tMs)
        closeIfFull(++seq)
      } else {
        for (let row = 0; row < entry.block.rows; ) {
          const take = Math.min(entry.block.rows - row, segmentRows - columns.rows)
          columns.addRows(entry.block, row, row + take)
          row += take
          seq += take
          closeIfFull(seq)
        }
      }
    }
    const rest = { packed: start, stagedRows: columns.rows, stagedTicks: columns.ticks }
    if (columns.rows + columns.ticks > 0) {
      const left = entriesOf(columns)
      const { rows, tMin, tMax } = measure(run, left, width)
      stages.add(run, { seq: start, end: seq, rows, tMin, tMax }, left, width)
    }
    return rest
  }

  function appendOne({ run, entries, sourceState }: Append): number {
    const old = heads.get(run)
    const { width, rows, ticks, tMin, tMax } = measure(run, entries, old.width)
    let next = old.next
    for (const entry of entries) {
      if (entry.kind === 'act') acts.add(run, next, entry.act)
      next += entry.kind === 'rows' ? entry.block.rows : 1
    }
    let staged = { packed: old.packed, stagedRows: old.stagedRows + rows, stagedTicks: old.stagedTicks + ticks }
    if (rows >= bulkRows && staged.stagedRows >= segmentRows) staged = appendBulk(run, old, entries, width ?? 0)
    else if (rows + ticks > 0) stages.add(run, { seq: old.next, end: next, rows, tMin, tMax }, entries, width ?? 0)
    const head: Head = {
      next,
      rows: old.rows + rows,
      acts: old.acts + entries.filter(({ kind }) => kind === 'act').length,
      width,
      firstMs: rows === 0 ? old.firstMs : Math.min(old.firstMs ?? Infinity, tMin),
      lastMs: rows === 0 ? old.lastMs : Math.max(old.lastMs ?? -Infinity, tMax),
      ...staged,
    }
    heads.set(run, head, sourceState === undefined ? null : JSON.stringify(sourceState))
    return next
  }

  return {
    append: (batch: readonly Append[]): number[] => batch.map(appendOne),
    /** Packs one segment of some run that has enough staged; false when there is nothing to do. */
    packNext(): boolean {
      const run = heads.full()
      if (run === null) return false
      const head = heads.get(run)
      const columns = columnsFor(head.width ?? 0)
      const end = unstage(run, columns, head.packed, () => columns.full)
      if (columns.rows + columns.ticks === 0) throw damaged(`staged entries of run ${run}`)
      stages.drop(run, end)
      segments.add(run, head.packed, end, columns)
      heads.set(
        run,
        { ...head, packed: end, stagedRows: head.stagedRows - columns.rows, stagedTicks: head.stagedTicks - columns.ticks },
        null,
      )
      return true
    },
    /** Entries (rows, ticks and acts each count one) and rows of a run, and the tags of a row, null before the first. Errors: STORE_DATA. */
    count(run: RunId): { entries: number; rows: number; width: number | null } {
      const { next, rows, width } = heads.get(run)
      return { entries: next, rows, width }
    },
    /** Source time of the earliest and the latest row; null without a row. Errors: STORE_DATA. */
    span(run: RunId): { fromMs: number; toMs: number } | null {
      const { firstMs, lastMs } = heads.get(run)
      return firstMs === null || lastMs === null ? null : { fromMs: firstMs, toMs: lastMs }
    },
    /** As last appended; null before. */
    sourceState(run: RunId): Json {
      const text = heads.source(run)
      return text === null ? null : (JSON.parse(text) as Json)
    },
    /** Acts of people, in order. Errors: STORE_CORRUPT. */
    acts(run: RunId): NumberedAct[] {
      const found = acts.between(run, 0)
      if (found.length !== heads.get(run).acts) throw damaged(`acts of run ${run}`)
      return found
    },
  }
}

function addStage(columns: Columns, { block, tickAt, tickMs }: Stage): void {
  let row = 0
  for (let i = 0; i < tickAt.length; i++) {
    const upTo = tickAt[i]! - i
    columns.addRows(block, row, upTo)
    row = upTo
    columns.addTick(tickMs[i]!)
  }
  columns.addRows(block, row, block.rows)
}

/** The columns as entries again. */
function entriesOf(columns: Columns): Entry[] {
  const { rows, width } = columns
  const block: RowBlock = {
    rows,
    width,
    tMs: columns.tMs.slice(0, rows),
    values: new Float64Array(rows * width),
    codes: new Uint8Array(rows * width),
  }
  for (let c = 0; c < width; c++) {
    for (let i = 0; i < rows; i++) {
      block.values[i * width + c] = columns.values[c]![i]!
      block.codes[i * width + c] = columns.codes[c]![i]!
    }
  }
  const piece = {
    seq: 0,
    end: rows + columns.ticks,
    block,
    tickAt: Float64Array.from(columns.tickAt),
    tickMs: Float64Array.from(columns.tickMs),
  }
  return Array.from(unfold(piece, [], 0), ({ entry }) => entry)
}
