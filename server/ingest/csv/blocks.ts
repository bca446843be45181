import { type RowBlock, rowBlock } from '../../core/reading.ts'

export const blockRows = 1024

/** Blocks of one reader, used again after `take`: what `take` gave is good until the next row is written. */
export class Blocks {
  current: RowBlock
  private readonly all: RowBlock[]
  private used = 1
  private readonly width: number

  constructor(width: number) {
    this.width = width
    this.current = rowBlock(blockRows, width)
    this.all = [this.current]
  }

  /** A block with room for a row. Rows beyond `rows` hold leftovers, always in the columns that the next row writes again. */
  room(): RowBlock {
    if (this.current.rows < blockRows) return this.current
    const next = this.all[this.used] ?? rowBlock(blockRows, this.width)
    this.all[this.used] = next
    this.used++
    next.rows = 0
    this.current = next
    return next
  }

  /** All rows written since the last call. */
  take(): RowBlock[] {
    const filled = this.all.slice(0, this.used).filter((b) => b.rows > 0)
    if (filled.length === 0) return filled
    // The blocks handed out are written again only after the caller is back for more.
    this.pending = true
    return filled
  }

  private pending = false

  /** Starts over, giving up the blocks last taken. */
  reuse(): void {
    if (!this.pending) return
    this.pending = false
    this.used = 1
    this.current = this.all[0]!
    this.current.rows = 0
  }
}
