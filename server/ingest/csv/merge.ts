import { type RowBlock, rowBlock } from '../../core/reading.ts'
import { blockRows } from './blocks.ts'

/** One stream of rows in arrival order; `key` is the latest time met so far, the best there is for when the row at hand arrived. */
interface Cursor {
  readonly stream: AsyncIterator<RowBlock>
  block: RowBlock
  row: number
  key: number
}

/**
 * Streams of rows made into one in arrival order: the row with the lowest running latest time goes first, the earlier stream where
 * they are equal; rows of a stream keep their order. Gives one block over and over, good until the next is asked for.
 */
export async function* mergeRows(streams: readonly AsyncIterable<RowBlock>[], width: number): AsyncGenerator<RowBlock> {
  const open = streams.map((s) => s[Symbol.asyncIterator]())
  try {
    const cursors: Cursor[] = []
    for (const stream of open) {
      const first = await filledBlock(stream)
      if (first !== null) cursors.push({ stream, block: first, row: 0, key: first.tMs[0]! })
    }
    const out = rowBlock(blockRows, width)
    while (cursors.length > 0) {
      const lead = cursors.reduce((a, b) => (b.key < a.key ? b : a))
      const at = cursors.indexOf(lead)
      // The lead goes on until another stream's row is due: later streams only once they are strictly earlier.
      let before = Number.POSITIVE_INFINITY
      let upTo = Number.POSITIVE_INFINITY
      cursors.forEach((c, i) => {
        if (i < at) before = Math.min(before, c.key)
        else if (i > at) upTo = Math.min(upTo, c.key)
      })
      const { block, row: from } = lead
      const most = Math.min(block.rows, from + blockRows - out.rows)
      let row = from
      let key = lead.key
      while (row < most) {
        const next = Math.max(key, block.tMs[row]!)
        if (next >= before || next > upTo) break
        key = next
        row++
      }
      append(out, block, from, row)
      lead.row = row
      lead.key = row < block.rows ? Math.max(key, block.tMs[row]!) : key
      if (row === block.rows) {
        const next = await filledBlock(lead.stream)
        if (next === null) cursors.splice(at, 1)
        else {
          lead.block = next
          lead.row = 0
          lead.key = Math.max(key, next.tMs[0]!)
        }
      }
      if (out.rows === blockRows) {
        yield out
        out.rows = 0
      }
    }
    if (out.rows > 0) yield out
  } finally {
    for (const stream of open) await stream.return?.()
  }
}

async function filledBlock(stream: AsyncIterator<RowBlock>): Promise<RowBlock | null> {
  for (;;) {
    const { done, value } = await stream.next()
    if (done) return null
    if (value.rows > 0) return value
  }
}

function append(out: RowBlock, block: RowBlock, from: number, to: number): void {
  const { width } = out
  out.tMs.set(block.tMs.subarray(from, to), out.rows)
  out.values.set(block.values.subarray(from * width, to * width), out.rows * width)
  out.codes.set(block.codes.subarray(from * width, to * width), out.rows * width)
  out.rows += to - from
}
