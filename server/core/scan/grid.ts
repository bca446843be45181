import { type JudgeState, judge, judgeStart, why } from '../quality/judge.ts'
import { reasons, rulesOf, type TagRule } from '../quality/tag-rules.ts'
import { cell, type RowBlock } from '../reading.ts'
import type { Skid } from '../skid.ts'
import { units, valueUnit } from '../units.ts'

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

/** A row this far ahead of all before it must be confirmed by the next one, or its time is bad, ms. */
const farAheadMs = 3_600_000
/** A slow tag is held at most so long, s, or three cells. */
const holdAtMostS = 60
/** Empty cells closed one by one; beyond, the grid steps over the rest of a gap. */
const emptyOneByOne = 1200

/**
 * From rows in arrival order to closed scans. A scan closes when the sequence's time (latest row or tick) passes its end by
 * `lateSeconds`; a reading that comes later is counted late and not used. Repeated rows (same time, same content as the row before)
 * are counted and not used. The mean of a cell takes good and uncertain readings, never bad, frozen or late ones.
 */
export function createGrid(skid: Skid, onScan: (scan: Scan) => void, saved?: GridState) {
  const tags = skid.tags.length
  const width = tags + (skid.phaseColumn === null ? 0 : 1)
  const scanMs = skid.scanSeconds * 1000
  const lateMs = skid.lateSeconds * 1000
  const slots = Math.ceil(lateMs / scanMs) + 2
  const rules: TagRule[] = rulesOf(skid)
  const siUnit = skid.tags.map(valueUnit)
  const toSiFactor = siUnit.map((u) => (u === null ? 1 : units[u].factor))
  const toSiOffset = siUnit.map((u) => (u === null ? 0 : units[u].offset))
  const holdCells = Math.max(3, Math.floor(holdAtMostS / skid.scanSeconds))
  const zeros = (n: number) => new Array<number>(n).fill(0)
  const table = () => Array.from({ length: slots }, () => zeros(tags))
  const s: GridState = saved ?? {
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
  const scan: Scan = {
    tMs: 0,
    si: new Float64Array(tags),
    used: new Uint16Array(tags),
    held: new Uint8Array(tags),
    flaw: new Uint8Array(tags),
    rows: 0,
    phase: -1,
    skipped: 0,
  }
  let flowing = false

  function close(k: number, skipped: number): void {
    const slot = k % slots
    const sum = s.sum[slot]!
    const used = s.used[slot]!
    const flaw = s.flaw[slot]!
    for (let t = 0; t < tags; t++) {
      const n = used[t]!
      scan.flaw[t] = flaw[t]!
      scan.held[t] = 0
      if (n > 0) {
        const rule = rules[t]!
        const si = toSiFactor[t]! * (rule.offset + (rule.factor * sum[t]!) / n) + toSiOffset[t]!
        scan.si[t] = si
        scan.used[t] = n
        const gap = s.lastCell[t]! < 0 ? 0 : k - s.lastCell[t]!
        if (gap > 0 && gap <= holdCells)
          s.spacing[t] = s.spacing[t] === 0 ? gap : s.spacing[t]! + (Math.min(gap, 4 * s.spacing[t]! + 1) - s.spacing[t]!) / 8
        s.lastCell[t] = k
        s.lastSi[t] = si
      } else {
        const age = k - s.lastCell[t]!
        const hold =
          s.lastCell[t]! >= 0 && s.spacing[t]! > 1.2 && age <= Math.min(holdCells, Math.ceil(1.5 * s.spacing[t]!)) && flaw[t] === 0
        scan.si[t] = hold ? s.lastSi[t]! : 0
        scan.used[t] = hold ? 1 : 0
        scan.held[t] = hold ? 1 : 0
      }
      sum[t] = 0
      used[t] = 0
      flaw[t] = 0
    }
    scan.tMs = k * scanMs
    scan.rows = s.cellRows[slot]!
    scan.phase = s.phase[slot]!
    scan.skipped = skipped
    s.cellRows[slot] = 0
    s.phase[slot] = -1
    s.scans += 1 + skipped
    onScan(scan)
  }

  /** Closes every cell whose end plus lateSeconds lies at or before the sequence's time. */
  function closeUpTo(nowMs: number): void {
    if (s.next < 0) return
    const last = Math.floor((nowMs - lateMs) / scanMs) - 1
    let empties = 0
    while (s.next <= last) {
      if (s.cellRows[s.next % slots] === 0) empties++
      else empties = 0
      const jump = empties > emptyOneByOne && last - s.next > slots ? last - slots - s.next : 0
      s.next += jump
      close(s.next, jump)
      s.next++
    }
  }

  function take(tMs: number, values: ArrayLike<number>, codes: ArrayLike<number>, at: number): void {
    if (s.next < 0) {
      s.next = Math.floor(tMs / scanMs)
      s.firstMs = tMs
    }
    if (tMs < s.nowMs) {
      if (tMs < s.lastRowMs) s.outOfOrder++
    } else {
      closeUpTo(tMs)
      s.nowMs = tMs
    }
    if (tMs > s.lastRowMs) s.lastRowMs = tMs
    const k = Math.floor(tMs / scanMs)
    const late = k < s.next
    if (late) s.lateRows++
    const slot = k % slots
    const counts = s.judge.counts
    const sum = late ? null : s.sum[slot]!
    const used = late ? null : s.used[slot]!
    const flaw = late ? null : s.flaw[slot]!
    for (let t = 0; t < tags; t++) {
      const code = codes[at + t]!
      if (code === cell.absent) continue
      if (late) {
        counts[t * reasons.length + why.late]!++
        continue
      }
      const value = values[at + t]!
      const reason = judge(s.judge, rules[t]!, t, code, value, tMs, flowing)
      counts[t * reasons.length + reason]!++
      if (
        reason === why.good ||
        reason === why['over-range'] ||
        reason === why['source-uncertain'] ||
        reason === why['loop-undefined']
      ) {
        sum![t]! += value
        used![t]!++
      }
      if (reason !== why.good) flaw![t] = reason
    }
    if (late) return
    s.cellRows[slot]!++
    if (width > tags && codes[at + tags] === cell.value) s.phase[slot] = values[at + tags]!
  }

  function repeats(tMs: number, block: RowBlock, at: number): boolean {
    const p = s.previous
    let same = tMs === p.tMs
    for (let t = 0; t < width; t++) {
      const v = block.values[at + t]!
      const c = block.codes[at + t]!
      if (same && (v !== p.values[t] || c !== p.codes[t])) same = false
      p.values[t] = v
      p.codes[t] = c
    }
    p.tMs = tMs
    return same
  }

  function countAll(codes: ArrayLike<number>, at: number, reason: number): void {
    for (let t = 0; t < tags; t++) if (codes[at + t] !== cell.absent) s.judge.counts[t * reasons.length + reason]!++
  }

  return {
    state: s,
    /** Whether pumps run; a tag that stands still is suspect only then. */
    setFlowing(value: boolean): void {
      flowing = value
    },
    rows(block: RowBlock): void {
      for (let i = 0; i < block.rows; i++) {
        const tMs = block.tMs[i]!
        const at = i * block.width
        s.rows++
        if (repeats(tMs, block, at)) {
          s.repeated++
          countAll(block.codes, at, why.duplicate)
          continue
        }
        if (s.farMs >= 0) {
          const far = s.farRow!
          if (Math.abs(tMs - s.farMs) < farAheadMs) take(s.farMs, far.values, far.codes, 0)
          else {
            s.badTime++
            countAll(far.codes, 0, why['bad-time'])
          }
          s.farMs = -1
          s.farRow = null
        }
        if (s.nowMs >= 0 && tMs > s.nowMs + farAheadMs) {
          s.farMs = tMs
          s.farRow = {
            values: Array.from(block.values.subarray(at, at + width)),
            codes: Array.from(block.codes.subarray(at, at + width)),
          }
          continue
        }
        take(tMs, block.values, block.codes, at)
      }
    },
    /** The monitor's clock: scans close even when no rows come. */
    tick(tMs: number): void {
      if (s.next < 0 || tMs <= s.nowMs) return
      closeUpTo(tMs)
      s.nowMs = tMs
    },
    /** End of a finished log: closes every cell that holds rows. An unconfirmed far row stays out. */
    finish(): void {
      if (s.farMs >= 0) {
        s.badTime++
        countAll(s.farRow!.codes, 0, why['bad-time'])
        s.farMs = -1
        s.farRow = null
      }
      if (s.lastRowMs >= 0) closeUpTo((Math.floor(s.lastRowMs / scanMs) + 1) * scanMs + lateMs)
    },
  }
}
