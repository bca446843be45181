import { cell, phases, type RowBlock, rowBlock } from '../../server/core/reading.ts'

/** A row by hand: null is an empty cell, undefined a tag the row says nothing of, a phase word in the last place where there is one. */
export type Row = readonly [tMs: number, ...cells: (number | null | undefined | string)[]]

export function block(rows: readonly Row[], width: number): RowBlock {
  const b = rowBlock(rows.length, width)
  for (const [tMs, ...cells] of rows) {
    const at = b.rows * width
    b.tMs[b.rows++] = tMs
    cells.forEach((c, i) => {
      b.codes[at + i] = c === undefined ? cell.absent : c === null ? cell.missing : cell.value
      b.values[at + i] = typeof c === 'number' ? c : typeof c === 'string' ? phases.indexOf(c as (typeof phases)[number]) : 0
    })
  }
  return b
}

/** The same rows cut into blocks at the given places. */
export function* cut(b: RowBlock, places: readonly number[]): Generator<RowBlock> {
  const ends = [...new Set([...places.map((p) => Math.min(b.rows, p)), b.rows])].sort((x, y) => x - y)
  let from = 0
  for (const to of ends) {
    if (to <= from) continue
    yield {
      rows: to - from,
      width: b.width,
      tMs: b.tMs.slice(from, to),
      values: b.values.slice(from * b.width, to * b.width),
      codes: b.codes.slice(from * b.width, to * b.width),
    }
    from = to
  }
}
