import type Database from 'better-sqlite3'
import type { RowBlock } from '../core/reading.ts'
import type { Entry } from '../core/sequence.ts'
import type { ActTable, NumberedAct } from './acts.ts'
import { damaged } from './checksum.ts'
import type { HeadTable } from './heads.ts'
import type { RunId } from './keys.ts'
import { decodeRows, stripTags } from './segment.ts'
import type { SegmentTable } from './segments.ts'
import type { StageTable } from './stage-table.ts'

export interface Numbered {
  /** Number of the entry in its run, of a block's first row: rows, ticks and acts count one each, from 0. */
  readonly seq: number
  readonly entry: Entry
}

/** One stretch of the sequence, however it is stored: rows and ticks; the numbers that are left over belong to acts. */
export interface Piece {
  readonly seq: number
  readonly end: number
  readonly block: RowBlock
  readonly tickAt: Float64Array
  readonly tickMs: Float64Array
}

export interface Tables {
  readonly heads: HeadTable
  readonly acts: ActTable
  readonly stages: StageTable
  readonly segments: SegmentTable
}

/** A reader of runs' sequences in the exact recorded order. */
export function sequenceReader(db: Database.Database, { heads, acts, stages, segments }: Tables) {
  function pieceAt(run: RunId, seq: number, packed: number, width: number): Piece | null {
    if (seq >= packed) {
      const staged = stages.at(run, seq)
      return staged === null ? null : { seq: staged.seq, end: staged.end, ...stages.open(run, staged.seq, width) }
    }
    const { start, end, tMs, tickAt, tickMs } = segments.order(run, segments.at(run, seq))
    // The segment before a lost one; going on at its end would never come to one.
    if (seq < start || seq >= end) throw damaged(`the segment of entry ${seq} of run ${run}`)
    const strips = Array.from({ length: tMs.length === 0 ? 0 : Math.ceil(width / stripTags) }, (_, i) =>
      segments.strip(run, start, i),
    )
    return { seq: start, end, block: decodeRows(tMs, strips, tMs.length === 0 ? 0 : width), tickAt, tickMs }
  }

  /** The stretch that holds number `seq`, or only acts up to the next one; null at the end. One view of the store, whoever packs beside us. */
  const stretch = db.transaction((run: RunId, seq: number): { piece: Piece | null; between: NumberedAct[]; end: number } | null => {
    const { next, packed, width } = heads.get(run)
    if (seq >= next) return null
    const piece = pieceAt(run, seq, packed, width ?? 0)
    if (piece !== null) return { piece, between: acts.between(run, piece.seq, piece.end), end: piece.end }
    const end = Math.min(next, stages.list(run, seq, 1)[0]?.seq ?? next)
    const between = acts.between(run, seq, end)
    if (between.length !== end - seq) throw damaged(`entries ${seq} to ${end} of run ${run}`)
    return { piece, between, end }
  })

  return function* read(run: RunId, fromSeq = 0): Generator<Numbered> {
    for (let seq = fromSeq; ; ) {
      const found = stretch(run, seq)
      if (found === null) return
      if (found.piece !== null) yield* unfold(found.piece, found.between, seq)
      else for (const { seq: at, act } of found.between) yield { seq: at, entry: { kind: 'act', act } }
      seq = found.end
    }
  }
}

const rowsOf = (block: RowBlock, from: number, to: number): RowBlock => ({
  rows: to - from,
  width: block.width,
  tMs: block.tMs.subarray(from, to),
  values: block.values.subarray(from * block.width, to * block.width),
  codes: block.codes.subarray(from * block.width, to * block.width),
})

/** The entries of a piece from number `from` on, acts at their places between rows and ticks. */
export function* unfold(piece: Piece, acts: readonly NumberedAct[], from: number): Generator<Numbered> {
  const { block, tickAt, tickMs } = piece
  let seq = piece.seq
  let row = 0
  let tick = 0
  let nextAct = 0
  while (seq < piece.end) {
    const act = acts[nextAct]
    const actSeq = act?.seq ?? piece.end
    if (actSeq === seq && act !== undefined) {
      if (seq >= from) yield { seq, entry: { kind: 'act', act: act.act } }
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
