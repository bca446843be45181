import { judgeRow, ruleColumns, why } from '../quality/judge.ts'
import { reasons, rulesOf, type TagRule } from '../quality/tag-rules.ts'
import { cell, type RowBlock } from '../reading.ts'
import type { Skid } from '../skid.ts'
import { units, valueUnit } from '../units.ts'
import { freshGrid, freshScan, type GridState, type Scan } from './grid-state.ts'

export type { GridState, Scan } from './grid-state.ts'

/** Reasons whose readings count into a cell's mean: good and uncertain ones, never bad, frozen or late ones. */
const usable = Uint8Array.from(reasons, (r) =>
  Number(r === 'good' || r === 'over-range' || r === 'source-uncertain' || r === 'loop-undefined'),
)
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
  const columns = ruleColumns(rules)
  const reasonOf = new Uint8Array(tags)
  const siUnit = skid.tags.map(valueUnit)
  const toSiFactor = siUnit.map((u) => (u === null ? 1 : units[u].factor))
  const toSiOffset = siUnit.map((u) => (u === null ? 0 : units[u].offset))
  const holdCells = Math.max(3, Math.floor(holdAtMostS / skid.scanSeconds))
  const s: GridState = saved ?? freshGrid(tags, width, slots)
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
    if (k < s.next) {
      s.lateRows++
      countAll(codes, at, why.late)
      return
    }
    const slot = k % slots
    const counts = s.judge.counts
    const sum = s.sum[slot]!
    const used = s.used[slot]!
    const flaw = s.flaw[slot]!
    judgeRow(s.judge, columns, codes, values, at, tMs, flowing, reasonOf)
    for (let t = 0; t < tags; t++) {
      if (codes[at + t] === cell.absent) continue
      const reason = reasonOf[t]!
      counts[t * reasons.length + reason]!++
      if (usable[reason] === 1) {
        sum[t]! += values[at + t]!
        used[t]!++
      }
      if (reason !== why.good) flaw[t] = reason
    }
    s.cellRows[slot]!++
    if (width > tags && codes[at + tags] === cell.value) s.phase[slot] = values[at + tags]!
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

  return {
    state: s,
    /** Whether pumps run; a tag that stands still is suspect only then. */
    setFlowing(value: boolean): void {
      flowing = value
    },
    /** Rows `from` to before `to` of a block, by default all; a block in pieces is taken in order, from its first row to its last. */
    rows(block: RowBlock, from = 0, to = block.rows): void {
      for (let i = from; i < to; i++) {
        const tMs = block.tMs[i]!
        const at = i * block.width
        s.rows++
        if (repeats(block, i)) {
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
      if (to === block.rows) keepLast(block)
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
