import { judgeRows, ruleColumns, why } from '../quality/judge.ts'
import { reasons, rulesOf, type TagRule } from '../quality/tag-rules.ts'
import { cell, type RowBlock } from '../reading.ts'
import type { Skid } from '../skid.ts'
import { units, valueUnit } from '../units.ts'
import { freshGrid, freshScan, type GridMemory, type GridState, gridMemory, gridState, type Scan } from './grid-state.ts'

export type { GridState, Scan } from './grid-state.ts'

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
  const hasPhase = width > tags
  const scanMs = skid.scanSeconds * 1000
  const lateMs = skid.lateSeconds * 1000
  const slots = Math.ceil(lateMs / scanMs) + 2
  const rules: TagRule[] = rulesOf(skid)
  const columns = ruleColumns(rules)
  const siUnit = skid.tags.map(valueUnit)
  const toSiFactor = siUnit.map((u) => (u === null ? 1 : units[u].factor))
  const toSiOffset = siUnit.map((u) => (u === null ? 0 : units[u].offset))
  const holdCells = Math.max(3, Math.floor(holdAtMostS / skid.scanSeconds))
  const s: GridMemory = gridMemory(saved ?? freshGrid(tags, width, slots))
  const slotted = s.sum.map((sum, i) => ({ sum, used: s.used[i]!, flaw: s.flaw[i]! }))
  const scan: Scan = freshScan(tags)
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

  /**
   * Takes in row `i` and those after it, before `to`, that fall into the same open cell in order and close none; gives the row after the last
   * taken. A row that closes cells is not taken in yet: what that brings about belongs to it alone.
   */
  function take(block: Pick<RowBlock, 'width' | 'tMs' | 'values' | 'codes'>, i: number, to: number): number {
    const tMs = block.tMs[i]!
    if (s.next < 0) {
      s.next = Math.floor(tMs / scanMs)
      s.firstMs = tMs
    }
    const inOrder = tMs >= s.nowMs
    if (inOrder) {
      s.nowMs = tMs
      const before = s.next
      closeUpTo(tMs)
      if (s.next !== before) return i
    } else if (tMs < s.lastRowMs) s.outOfOrder++
    if (tMs > s.lastRowMs) s.lastRowMs = tMs
    const k = Math.floor(tMs / scanMs)
    if (k < s.next) {
      s.lateRows++
      countAll(block.codes, i * block.width, why.late)
      return i + 1
    }
    let end = i + 1
    if (inOrder) {
      while (end < to && joins(block.tMs[end]!, s.nowMs, k)) s.nowMs = block.tMs[end++]!
      if (s.nowMs > s.lastRowMs) s.lastRowMs = s.nowMs
    }
    addUp(block, i, end, k % slots)
    return end
  }

  /** Whether a row at `tMs` after one at `beforeMs` goes into cell `k` without closing another, no repeat, none far ahead. */
  const joins = (tMs: number, beforeMs: number, k: number): boolean =>
    tMs > beforeMs &&
    tMs <= beforeMs + farAheadMs &&
    Math.floor(tMs / scanMs) === k &&
    Math.floor((tMs - lateMs) / scanMs) - 1 < s.next

  /** Judges rows and adds them to the cell of a slot. */
  function addUp(block: Pick<RowBlock, 'width' | 'tMs' | 'values' | 'codes'>, from: number, to: number, slot: number): void {
    judgeRows(s.judge, columns, block, from, to, flowing, slotted[slot]!)
    const { width, values, codes } = block
    s.cellRows[slot]! += to - from
    if (hasPhase)
      for (let i = from; i < to; i++) if (codes[i * width + tags] === cell.value) s.phase[slot] = values[i * width + tags]!
  }

  /** Whether the row at `at` says what the row before it in the sequence said, at the same time. */
  function repeats(block: RowBlock, i: number): boolean {
    const tMs = block.tMs[i]!
    if (i === 0 ? tMs !== s.previous.tMs : tMs !== block.tMs[i - 1]) return false
    const at = i * block.width
    const values = i === 0 ? s.previous.values : block.values
    const codes = i === 0 ? s.previous.codes : block.codes
    const before = i === 0 ? 0 : at - block.width
    for (let t = 0; t < width; t++)
      if (block.values[at + t] !== values[before + t] || block.codes[at + t] !== codes[before + t]) return false
    return true
  }

  function keepLast(block: RowBlock): void {
    if (block.rows === 0) return
    const at = (block.rows - 1) * block.width
    const p = s.previous
    p.tMs = block.tMs[block.rows - 1]!
    for (let t = 0; t < width; t++) {
      p.values[t] = block.values[at + t]!
      p.codes[t] = block.codes[at + t]!
    }
  }

  function countAll(codes: ArrayLike<number>, at: number, reason: number): void {
    for (let t = 0; t < tags; t++) if (codes[at + t] !== cell.absent) s.judge.counts[t * reasons.length + reason]!++
  }

  function some(block: RowBlock, i: number): number {
    const tMs = block.tMs[i]!
    const at = i * block.width
    let next = i + 1
    if (repeats(block, i)) {
      s.repeated++
      countAll(block.codes, at, why.duplicate)
    } else {
      if (s.farMs >= 0) {
        const far = s.farRow!
        if (Math.abs(tMs - s.farMs) < farAheadMs) {
          const row = farBlock(s.farMs, far)
          while (take(row, 0, 1) === 0);
        } else {
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
      } else next = take(block, i, block.rows)
    }
    s.rows += next - i
    if (next === block.rows) keepLast(block)
    return next
  }

  const farBlock = (tMs: number, { values, codes }: { values: number[]; codes: number[] }) => ({
    width,
    tMs: Float64Array.of(tMs),
    values: Float64Array.from(values),
    codes: Uint8Array.from(codes),
  })

  return {
    /** Read only. */
    state: s,
    save: (): GridState => gridState(s),
    /** Whether pumps run; a tag that stands still is suspect only then. */
    setFlowing(value: boolean): void {
      flowing = value
    },
    /** All rows of a block. */
    rows(block: RowBlock): void {
      for (let i = 0; i < block.rows; ) i = some(block, i)
    },
    /** The rows of a block from `i` on that bring nothing about, or what row `i` brings about. Gives the first row not taken in; a block is gone through to its last row. */
    some,
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
