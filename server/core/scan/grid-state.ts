import { type JudgeMemory, type JudgeState, judgeMemory, judgeStart, judgeState } from '../quality/judge.ts'

/** One closed cell of the analysis grid. The object and its arrays are reused: copy what must outlive the call. */
export interface Scan {
  /** Begin of the cell, ms UTC; it ends at tMs + scanMs. */
  tMs: number
  /** Mean of the usable readings in SI, by tag; meaningless where `used` is 0. */
  readonly si: Float64Array
  /** Usable readings in the cell, by tag; a held value counts 1. */
  readonly used: Uint16Array
  /** 1 where the value is a slow tag's last one, held. */
  readonly held: Uint8Array
  /** Last reason a reading of the tag was not good in this cell; 0 where all were, or none came. */
  readonly flaw: Uint8Array
  /** Rows that fell into the cell. */
  rows: number
  /** Index of the last phase word in the cell; −1 where none. */
  phase: number
  /** Empty cells before this one that were stepped over without a scan of their own. */
  skipped: number
}

/** Plain-JSON state of the intake. Open cells are kept as arrays by slot; the slot of cell k is k modulo their number. */
export interface GridState {
  judge: JudgeState
  /** First cell not yet closed; −1 before the first row. */
  next: number
  /** Latest time the sequence has reached, ms. */
  nowMs: number
  firstMs: number
  lastRowMs: number
  rows: number
  repeated: number
  outOfOrder: number
  badTime: number
  lateRows: number
  /** Time of a row that jumped far ahead and waits for a second that confirms it; −1 when none. */
  farMs: number
  farRow: { values: number[]; codes: number[] } | null
  sum: number[][]
  used: number[][]
  flaw: number[][]
  cellRows: number[]
  phase: number[]
  previous: { tMs: number; values: number[]; codes: number[] }
  /** By tag: last closed cell with a value, that value in SI, typical spacing in cells. */
  lastCell: number[]
  lastSi: number[]
  spacing: number[]
  scans: number
}

export function freshGrid(tags: number, width: number, slots: number): GridState {
  const zeros = (n: number) => new Array<number>(n).fill(0)
  const table = () => Array.from({ length: slots }, () => zeros(tags))
  return {
    judge: judgeStart(tags),
    next: -1,
    nowMs: -1,
    firstMs: -1,
    lastRowMs: -1,
    rows: 0,
    repeated: 0,
    outOfOrder: 0,
    badTime: 0,
    lateRows: 0,
    farMs: -1,
    farRow: null,
    sum: table(),
    used: table(),
    flaw: table(),
    cellRows: zeros(slots),
    phase: zeros(slots).fill(-1),
    previous: { tMs: -1, values: zeros(width), codes: zeros(width) },
    lastCell: zeros(tags).fill(-1),
    lastSi: zeros(tags),
    spacing: zeros(tags),
    scans: 0,
  }
}

/** A `GridState` at work: numbers by tag packed, as every reading touches them. */
type Packed = 'sum' | 'used' | 'flaw' | 'lastCell' | 'lastSi' | 'spacing'
type Rest = Omit<GridState, 'judge' | Packed>
export type GridMemory = Rest & {
  readonly judge: JudgeMemory
  readonly sum: readonly Float64Array[]
  readonly used: readonly Float64Array[]
  readonly flaw: readonly Float64Array[]
  readonly lastCell: Float64Array
  readonly lastSi: Float64Array
  readonly spacing: Float64Array
}

const packed = (table: readonly number[][]) => table.map((row) => Float64Array.from(row))
const plain = (table: readonly Float64Array[]) => table.map((row) => Array.from(row))

export const gridMemory = (s: GridState): GridMemory => ({
  ...s,
  judge: judgeMemory(s.judge),
  sum: packed(s.sum),
  used: packed(s.used),
  flaw: packed(s.flaw),
  lastCell: Float64Array.from(s.lastCell),
  lastSi: Float64Array.from(s.lastSi),
  spacing: Float64Array.from(s.spacing),
})

/** Plain JSON again; a copy only of what is packed. */
export const gridState = (m: GridMemory): GridState => ({
  ...m,
  judge: judgeState(m.judge),
  sum: plain(m.sum),
  used: plain(m.used),
  flaw: plain(m.flaw),
  lastCell: Array.from(m.lastCell),
  lastSi: Array.from(m.lastSi),
  spacing: Array.from(m.spacing),
})

export function freshScan(tags: number): Scan {
  return {
    tMs: 0,
    si: new Float64Array(tags),
    used: new Uint16Array(tags),
    held: new Uint8Array(tags),
    flaw: new Uint8Array(tags),
    rows: 0,
    phase: -1,
    skipped: 0,
  }
}
