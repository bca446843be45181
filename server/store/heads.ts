import type Database from 'better-sqlite3'
import type { RunId } from './keys.ts'
import { noRun } from './runs.ts'
import { segmentRows, segmentTicks } from './segment.ts'

/** Where a run's sequence stands. */
export interface Head {
  /** Number of its next entry. */
  readonly next: number
  readonly rows: number
  readonly acts: number
  /** Tags a row; null before the first row. */
  readonly width: number | null
  /** Earliest and latest source time of its rows. */
  readonly firstMs: number | null
  readonly lastMs: number | null
  /** All numbers below this are packed in segments. */
  readonly packed: number
  readonly stagedRows: number
  readonly stagedTicks: number
}

/** One small row a run, written with every append. */
export function headTable(db: Database.Database) {
  const get = db.prepare<[RunId], Head>(
    `SELECT next_seq AS next, rows, acts, packed, width, first_ms AS firstMs, last_ms AS lastMs, staged_rows AS stagedRows,
     staged_ticks AS stagedTicks FROM head JOIN run ON run.id = head.run WHERE run = ? AND state <> 'deleted'`,
  )
  const set = db.prepare(
    `UPDATE head SET next_seq = @next, rows = @rows, acts = @acts, packed = @packed, width = @width, first_ms = @firstMs,
     last_ms = @lastMs, staged_rows = @stagedRows, staged_ticks = @stagedTicks, source_state = coalesce(@source, source_state) WHERE run = @run`,
  )
  const source = db.prepare<[RunId], string | null>('SELECT source_state FROM head WHERE run = ?').pluck()
  const full = db
    .prepare<[], RunId>(
      `SELECT run FROM head JOIN run ON run.id = head.run WHERE state <> 'deleted' AND (staged_rows >= ${segmentRows}
     OR staged_ticks >= ${segmentTicks} OR (state = 'ended' AND staged_rows + staged_ticks > 0)) LIMIT 1`,
    )
    .pluck()
  return {
    /** Errors: STORE_DATA when there is no such run. */
    get(run: RunId): Head {
      const found = get.get(run)
      if (found === undefined) throw noRun(run)
      return found
    },
    /** A source state of null leaves the one that is there. */
    set(run: RunId, head: Head, sourceState: string | null): void {
      set.run({ ...head, run, source: sourceState })
    },
    source: (run: RunId): string | null => source.get(run) ?? null,
    /** A run with enough staged for a segment, or ended with anything staged. */
    full: (): RunId | null => full.get() ?? null,
  }
}

export type HeadTable = ReturnType<typeof headTable>
