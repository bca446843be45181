/** One row as text, with where it ends. Used on the first lines only; the body is read from bytes (rows.ts). */
export interface SplitRow {
  readonly cells: string[]
  /** Offset behind the line break. */
  readonly next: number
  /** Physical lines the row spans. */
  readonly lines: number
  /** Number of the row's first physical line. */
  readonly line: number
}

/** Splits a row at `from`; a quote counts only where it opens a cell, `""` inside is a quote. */
export function splitRow(
  bytes: Uint8Array,
  from: number,
  to: number,
  delimiter: number,
  line: number,
  decode: (b: Uint8Array) => string,
): SplitRow {
  const cells: string[] = []
  let p = from
  let lines = 1
  for (;;) {
    let cell: string
    if (bytes[p] === 34 && p < to) {
      const start = ++p
      let end = -1
      for (; p < to; p++) {
        if (bytes[p] === 10) lines++
        if (bytes[p] !== 34) continue
        if (bytes[p + 1] === 34 && p + 1 < to) p++
        else {
          end = p++
          break
        }
      }
      cell = decode(bytes.subarray(start, end < 0 ? p : end)).replaceAll('""', '"')
      const tail = p
      while (p < to && bytes[p] !== delimiter && bytes[p] !== 10) p++
      cell += decode(bytes.subarray(tail, p)).trimEnd()
    } else {
      const start = p
      while (p < to && bytes[p] !== delimiter && bytes[p] !== 10) p++
      const end = p > start && bytes[p - 1] === 13 && (p === to || bytes[p] === 10) ? p - 1 : p
      cell = decode(bytes.subarray(start, end))
    }
    cells.push(cell)
    if (p < to && bytes[p] === delimiter) {
      p++
      continue
    }
    return { cells, next: Math.min(p + 1, to), lines, line }
  }
}

/** Rows from `from` on, blank lines left out, at most `most`. */
export function splitRows(
  bytes: Uint8Array,
  from: number,
  to: number,
  delimiter: number,
  firstLine: number,
  decode: (b: Uint8Array) => string,
  most: number,
): SplitRow[] {
  const rows: SplitRow[] = []
  let line = firstLine
  for (let p = from; p < to && rows.length < most; ) {
    const row = splitRow(bytes, p, to, delimiter, line, decode)
    if (row.cells.length > 1 || row.cells[0]!.trim() !== '') rows.push(row)
    p = row.next
    line += row.lines
  }
  return rows
}
