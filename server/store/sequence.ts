import type Database from 'better-sqlite3'
import { MonitorError } from '../core/errors.ts'
import type { RowBlock } from '../core/reading.ts'
import type { Act, Entry } from '../core/sequence.ts'
import { type Json, keyOf, type RunId, seqOf } from './keys.ts'
import { noRun } from './runs.ts'
import { Columns, decodeRows, segmentRows, segmentTicks, stripTags } from './segment.ts'
import { damaged, type SegmentTable } from './segments.ts'
import { decodeStage, encodeStage, type Stage } from './staging.ts'

/** What one run adds in one commit. */
export interface Append {
  readonly run: RunId
  readonly entries: readonly Entry[]
  /** Words of text tags that these rows are the first to use, from that index on. */
  readonly words?: { readonly from: number; readonly words: readonly string[] }
  /** Where the source stands after these entries (a byte offset ...): kept in the same commit, so that a restart resumes exactly there. */
  readonly sourceState?: Json
}

export interface Numbered {
  /** Number of the entry in its run, of a block's first row: rows, ticks and acts count one each, from 0. */
  readonly seq: number
  readonly entry: Entry
}

interface Head {
  readonly next: number
  readonly rows: number
  readonly width: number | null
  readonly first: number | null
  readonly last: number | null
  readonly stagedRows: number
  readonly stagedTicks: number
}

interface StageRow {
  readonly id: number
  readonly count: number
  readonly body: Buffer
}

interface ActRow {
  readonly id: number
  readonly json: string
}

/** One stretch of the sequence, however it is stored. */
interface Piece {
  readonly seq: number
  readonly end: number
  readonly block: RowBlock
  readonly tickAt: Float64Array
  readonly tickMs: Float64Array
}

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

/** The recorded sequence of each run: appended in arrival order, packed later, read back exactly. */
export function sequenceStore(db: Database.Database, segments: SegmentTable) {
  const head = db.prepare<[RunId], Head>(
    `SELECT next_seq AS next, rows, width, first_ms AS "first", last_ms AS "last", staged_rows AS stagedRows, staged_ticks AS stagedTicks
     FROM head JOIN run ON run.id = head.run WHERE run = ? AND state <> 'deleted'`,
  )
  const setHead = db.prepare(
    `UPDATE head SET next_seq = ?, rows = ?, width = ?, first_ms = ?, last_ms = ?, staged_rows = ?, staged_ticks = ?,
     source_state = coalesce(?, source_state) WHERE run = ?`,
  )
  const setStaged = db.prepare('UPDATE head SET staged_rows = ?, staged_ticks = ? WHERE run = ?')
  const sourceState = db.prepare<[RunId], string | null>('SELECT source_state FROM head WHERE run = ?').pluck()
  const insertStage = db.prepare('INSERT INTO stage (id, count, rows, ticks, t_min, t_max, body) VALUES (?, ?, ?, ?, ?, ?, ?)')
  const insertAct = db.prepare('INSERT INTO act (id, json) VALUES (?, ?)')
  const acts = db.prepare<[number, number], ActRow>('SELECT id, json FROM act WHERE id >= ? AND id < ? ORDER BY id')
  const staged = db.prepare<[number, number], StageRow>(
    'SELECT id, count, body FROM stage WHERE id >= ? AND id < ? ORDER BY id LIMIT 256',
  )
  const stageAt = db.prepare<[number, number], StageRow>(
    'SELECT id, count, body FROM stage WHERE id <= ? AND id >= ? ORDER BY id DESC LIMIT 1',
  )
  const segmentAt = db.prepare<[number, number], { id: number; count: number }>(
    'SELECT id, count FROM segment WHERE id <= ? AND id >= ? ORDER BY id DESC LIMIT 1',
  )
  const nextStage = db.prepare<[number, number], number>('SELECT id FROM stage WHERE id > ? AND id < ? ORDER BY id LIMIT 1').pluck()
  const nextSegment = db
    .prepare<[number, number], number>('SELECT id FROM segment WHERE id > ? AND id < ? ORDER BY id LIMIT 1')
    .pluck()
  const dropStage = db.prepare('DELETE FROM stage WHERE id >= ? AND id < ?')
  const pending = db.prepare<[], { run: RunId; width: number | null }>(
    `SELECT run, width FROM head JOIN run ON run.id = head.run WHERE state <> 'deleted'
     AND (staged_rows >= ${segmentRows} OR staged_ticks >= ${segmentTicks} OR (state = 'ended' AND staged_rows + staged_ticks > 0)) LIMIT 1`,
  )
  let spare = new Columns(0)
  const columnsFor = (width: number): Columns => {
    if (spare.width !== width) spare = new Columns(width)
    spare.clear()
    return spare
  }

  const need = (run: RunId): Head => {
    const found = head.get(run)
    if (found === undefined) throw noRun(run)
    return found
  }

  function stage(
    key: number,
    count: number,
    rows: number,
    ticks: number,
    tMin: number,
    tMax: number,
    entries: readonly Entry[],
    width: number,
  ): void {
    insertStage.run(key, count, rows, ticks, tMin, tMax, encodeStage(entries, width))
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

  /** Moves staged records into one segment, until it is full; all when fewer. Returns rows and ticks moved. */
  function packOne(run: RunId, width: number): { rows: number; ticks: number } {
    const columns = columnsFor(width)
    const limit = keyOf(run, 0) + 2 ** 36
    let from = keyOf(run, 0)
    const start = segments.end(run)
    while (!columns.full) {
      const some = staged.all(from, limit)
      if (some.length === 0) break
      for (const row of some) {
        if (columns.full) break
        addStage(columns, decodeStage(row.body, width))
        from = row.id + row.count
      }
    }
    if (columns.rows + columns.ticks > 0) {
      dropStage.run(keyOf(run, 0), from)
      segments.add(run, start, seqOf(from), columns)
    }
    return { rows: columns.rows, ticks: columns.ticks }
  }

  /** Many rows at once, as an import brings them: straight into full segments, only the rest is staged. */
  function appendBulk(
    run: RunId,
    old: Head,
    entries: readonly Entry[],
    width: number,
  ): { stagedRows: number; stagedTicks: number } {
    const columns = columnsFor(width)
    let start = segments.end(run)
    let seq = old.next
    const closeIfFull = (): void => {
      if (!columns.full) return
      segments.add(run, start, seq, columns)
      columns.clear()
      start = seq
    }
    const limit = keyOf(run, 0) + 2 ** 36
    for (let from = keyOf(run, 0); ; ) {
      const some = staged.all(from, limit)
      if (some.length === 0) break
      for (const row of some) {
        addStage(columns, decodeStage(row.body, width))
        from = row.id + row.count
        seq = seqOf(from)
        closeIfFull()
      }
    }
    dropStage.run(keyOf(run, 0), limit)
    seq = old.next
    for (const entry of entries) {
      if (entry.kind === 'act') seq++
      else if (entry.kind === 'tick') {
        columns.addTick(entry.tMs)
        seq++
        closeIfFull()
      } else {
        for (let row = 0; row < entry.block.rows; ) {
          const take = Math.min(entry.block.rows - row, Math.max(1, segmentRows - columns.rows))
          columns.addRows(entry.block, row, row + take)
          row += take
          seq += take
          closeIfFull()
        }
      }
    }
    const rest = { stagedRows: columns.rows, stagedTicks: columns.ticks }
    if (columns.rows + columns.ticks > 0) {
      const left = restOf(columns)
      const { tMin, tMax } = measure(run, left, width)
      stage(keyOf(run, start), seq - start, columns.rows, columns.ticks, tMin, tMax, left, width)
    }
    return rest
  }

  const appendOne = ({ run, entries, words: _, sourceState: source }: Append): number => {
    const old = need(run)
    const found = measure(run, entries, old.width)
    let seq = old.next
    for (const entry of entries) {
      if (entry.kind === 'act') insertAct.run(keyOf(run, seq), JSON.stringify(entry.act))
      seq += entry.kind === 'rows' ? entry.block.rows : 1
    }
    let stagedRows = old.stagedRows + found.rows
    let stagedTicks = old.stagedTicks + found.ticks
    if (found.rows >= segmentRows) {
      const rest = appendBulk(run, old, entries, found.width ?? 0)
      stagedRows = rest.stagedRows
      stagedTicks = rest.stagedTicks
    } else if (found.rows + found.ticks > 0) {
      stage(keyOf(run, old.next), seq - old.next, found.rows, found.ticks, found.tMin, found.tMax, entries, found.width ?? 0)
    }
    const first = found.rows === 0 ? old.first : Math.min(old.first ?? Infinity, found.tMin)
    const last = found.rows === 0 ? old.last : Math.max(old.last ?? -Infinity, found.tMax)
    setHead.run(
      seq,
      old.rows + found.rows,
      found.width,
      first,
      last,
      stagedRows,
      stagedTicks,
      source === undefined ? null : JSON.stringify(source),
      run,
    )
    return seq
  }

  function pieceAt(run: RunId, seq: number, width: number): Piece | null {
    const low = keyOf(run, 0)
    const key = keyOf(run, seq)
    const packed = segmentAt.get(key, low)
    if (packed !== undefined && key < packed.id + packed.count) {
      const { tMs, tickAt, tickMs } = segments.order(run, seqOf(packed.id))
      const strips = Array.from({ length: tMs.length === 0 ? 0 : Math.ceil(width / stripTags) }, (_, i) =>
        segments.strip(packed.id, i),
      )
      const block = decodeRows(tMs, strips, tMs.length === 0 ? 0 : width)
      return { seq: seqOf(packed.id), end: seqOf(packed.id) + packed.count, block, tickAt, tickMs }
    }
    const fresh = stageAt.get(key, low)
    if (fresh === undefined || key >= fresh.id + fresh.count) return null
    return { seq: seqOf(fresh.id), end: seqOf(fresh.id) + fresh.count, ...decodeStage(fresh.body, width) }
  }

  /** Where the next stretch after `seq` begins, or `end`. */
  function nextPiece(run: RunId, seq: number, end: number): number {
    const keys = [nextSegment.get(keyOf(run, seq), keyOf(run, end)), nextStage.get(keyOf(run, seq), keyOf(run, end))]
    return Math.min(end, ...keys.flatMap((key) => (key === undefined ? [] : [seqOf(key)])))
  }

  /** The stretch that holds number `seq`, or only acts up to the next stretch; null at the end. One view of the store, whoever packs beside us. */
  const stretch = db.transaction((run: RunId, seq: number): { piece: Piece | null; between: ActRow[]; end: number } | null => {
    const { next, width } = need(run)
    if (seq >= next) return null
    const piece = pieceAt(run, seq, width ?? 0)
    if (piece !== null) return { piece, between: acts.all(keyOf(run, piece.seq), keyOf(run, piece.end)), end: piece.end }
    const end = nextPiece(run, seq, next)
    const between = acts.all(keyOf(run, seq), keyOf(run, end))
    if (between.length !== end - seq) throw damaged(`entries ${seq} to ${end} of run ${run}`)
    return { piece, between, end }
  })

  function* read(run: RunId, fromSeq = 0): Generator<Numbered> {
    for (let seq = fromSeq; ; ) {
      const found = stretch(run, seq)
      if (found === null) return
      if (found.piece !== null) yield* unfold(found.piece, found.between, seq)
      else for (const { id, json } of found.between) yield { seq: seqOf(id), entry: { kind: 'act', act: JSON.parse(json) as Act } }
      seq = found.end
    }
  }

  return {
    /** The caller brings the transaction and adds the words. */
    append: (batch: readonly Append[]): number[] => batch.map(appendOne),
    read,
    /** Entries (rows, ticks and acts each count one) and rows of a run. */
    count(run: RunId): { entries: number; rows: number } {
      const { next, rows } = need(run)
      return { entries: next, rows }
    },
    /** As last appended; null before. */
    sourceState(run: RunId): Json {
      const text = sourceState.get(run) ?? null
      return text === null ? null : (JSON.parse(text) as Json)
    },
    /** Acts of people, in order. */
    acts: (run: RunId): { seq: number; act: Act }[] =>
      acts.all(keyOf(run, 0), keyOf(run, 0) + 2 ** 36).map(({ id, json }) => ({ seq: seqOf(id), act: JSON.parse(json) as Act })),
    /** Packs one segment of some run that has enough staged; false when there is nothing to do. */
    packNext(): boolean {
      const [first] = pending.all()
      if (first === undefined) return false
      const { run, width } = first
      const done = packOne(run, width ?? 0)
      const old = need(run)
      setStaged.run(Math.max(0, old.stagedRows - done.rows), Math.max(0, old.stagedTicks - done.ticks), run)
      return true
    },
  }
}

/** The columns as entries again. */
function restOf(columns: Columns): Entry[] {
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
  const seq = {
    seq: 0,
    end: rows + columns.ticks,
    block,
    tickAt: Float64Array.from(columns.tickAt),
    tickMs: Float64Array.from(columns.tickMs),
  }
  return Array.from(unfold(seq, [], 0), ({ entry }) => entry)
}

const rowsOf = (block: RowBlock, from: number, to: number): RowBlock => ({
  rows: to - from,
  width: block.width,
  tMs: block.tMs.subarray(from, to),
  values: block.values.subarray(from * block.width, to * block.width),
  codes: block.codes.subarray(from * block.width, to * block.width),
})

/** The entries of a piece from number `from` on, acts at their places between rows and ticks. */
function* unfold(piece: Piece, acts: readonly ActRow[], from: number): Generator<Numbered> {
  const { block, tickAt, tickMs } = piece
  let seq = piece.seq
  let row = 0
  let tick = 0
  let nextAct = 0
  while (seq < piece.end) {
    const act = acts[nextAct]
    const actSeq = act === undefined ? piece.end : seqOf(act.id)
    if (actSeq === seq && act !== undefined) {
      if (seq >= from) yield { seq, entry: { kind: 'act', act: JSON.parse(act.json) as Act } }
      nextAct++
      seq++
    } else if (tick < tickAt.length && tickAt[tick] === row + tick) {
      if (seq >= from) yield { seq, entry: { kind: 'tick', tMs: tickMs[tick]! } }
      tick++
      seq++
    } else {
      const upToTick = tick < tickAt.length ? tickAt[tick]! - tick - row : block.rows - row
      const count = Math.min(upToTick, actSeq - seq)
      if (count <= 0) throw damaged(`entry ${seq} of the sequence`)
      const skip = Math.min(count, Math.max(0, from - seq))
      if (skip < count) yield { seq: seq + skip, entry: { kind: 'rows', block: rowsOf(block, row + skip, row + count) } }
      row += count
      seq += count
    }
  }
  if (row !== block.rows || tick !== tickAt.length) throw damaged(`an act among entries ${piece.seq} to ${piece.end}`)
}
