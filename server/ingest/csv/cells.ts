import { cell, type RowBlock } from '../../core/reading.ts'
import type { Wanted } from './header.ts'
import { decimalNumber } from './number.ts'
import { missingTexts, missingWords, wordList } from './words.ts'

interface LastText {
  readonly bytes: Uint8Array
  readonly length: number
  readonly index: number
  readonly code: number
}

/** Writes cells into a block: numbers that the fast path left, and words. `decimal` turns from 0 once a cell shows which it is. */
export class CellWriter {
  decimal: number
  private readonly wanted: readonly Wanted[]
  private readonly missing: readonly number[]
  private readonly decode: (bytes: Uint8Array) => string
  private readonly words: ReturnType<typeof wordList>
  private readonly last: (LastText | undefined)[] = []

  constructor(
    wanted: readonly Wanted[],
    missing: readonly number[],
    decimal: number,
    words: string[],
    decode: (bytes: Uint8Array) => string,
  ) {
    this.wanted = wanted
    this.missing = missing
    this.decimal = decimal
    this.decode = decode
    this.words = wordList(words)
  }

  write(block: RowBlock, at: number, slot: number, bytes: Uint8Array, from: number, to: number): void {
    if (this.wanted[slot]!.isText) this.text(block, at, slot, bytes, from, to)
    else this.number(block, at, bytes, from, to)
  }

  /** Turns a number just written into a missing value where it is one of the logger's codes for that. */
  judge(block: RowBlock, at: number): void {
    if (!this.missing.includes(block.values[at]!)) return
    block.values[at] = 0
    block.codes[at] = cell.missing
  }

  private number(block: RowBlock, at: number, bytes: Uint8Array, from: number, to: number): void {
    while (from < to && bytes[from]! <= 32) from++
    block.values[at] = 0
    if (from === to) {
      block.codes[at] = cell.missing
      return
    }
    let value = decimalNumber(bytes, from, to, this.decimal === 44 ? 44 : 46)
    if (value === null && this.decimal === 0) value = decimalNumber(bytes, from, to, 44)
    if (value === null) {
      block.codes[at] = missingWords.has(this.decode(bytes.subarray(from, to)).trim().toLowerCase())
        ? cell.missing
        : cell.unreadable
      return
    }
    if (this.decimal === 0) {
      const mark = bytes.subarray(from, to).find((b) => b === 44 || b === 46)
      if (mark !== undefined) this.decimal = mark
    }
    if (!Number.isFinite(value)) block.codes[at] = cell.unreadable
    else if (this.missing.includes(value)) block.codes[at] = cell.missing
    else {
      block.codes[at] = cell.value
      block.values[at] = value
    }
  }

  private text(block: RowBlock, at: number, slot: number, bytes: Uint8Array, from: number, to: number): void {
    while (from < to && bytes[from]! <= 32) from++
    while (to > from && bytes[to - 1]! <= 32) to--
    let last = this.last[slot]
    if (last === undefined || !same(last, bytes, from, to)) {
      const text = this.decode(bytes.subarray(from, to))
      const index = missingTexts.has(text.toLowerCase()) ? -2 : this.words.index(text, this.wanted[slot]!.isPhase)
      const code = index >= 0 ? cell.value : index === -2 ? cell.missing : cell.unreadable
      last = { bytes: bytes.slice(from, to), length: to - from, index: Math.max(index, 0), code }
      this.last[slot] = last
    }
    block.values[at] = last.index
    block.codes[at] = last.code
  }
}

function same(last: LastText, bytes: Uint8Array, from: number, to: number): boolean {
  if (last.length !== to - from) return false
  for (let i = 0; i < last.length; i++) if (last.bytes[i] !== bytes[from + i]) return false
  return true
}
