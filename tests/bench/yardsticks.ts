import { closeSync, createReadStream, fsyncSync, openSync, readSync, writeSync } from 'node:fs'
import Database from 'better-sqlite3'
import { channels } from './input.ts'

/** Sum by channel in the order of rows, and rows: both sides of a pair must agree to the bit. */
export interface Sums {
  rows: number
  sums: Float64Array
}

const newline = 10
const comma = 44

/**
 * The bound for reading numbers from a log: bytes to doubles in one pass into one array a channel, times taken apart by place, no quotes, no
 * units, no check of anything. No reader that checks its input can be faster in this language; it is no reader.
 */
export function boundParse(file: string): Sums {
  const fd = openSync(file, 'r')
  const size = 1 << 20
  const bytes = new Uint8Array(2 * size)
  const powers = Float64Array.from({ length: 20 }, (_, i) => 10 ** i)
  const sums = new Float64Array(channels)
  const most = 8192
  const tMs = new Float64Array(most)
  const columns = Array.from({ length: channels }, () => new Float64Array(most))
  let n = 0
  const use = (): void => {
    for (let c = 0; c < channels; c++) {
      const column = columns[c]!
      let sum = sums[c]!
      for (let i = 0; i < n; i++) sum += column[i]!
      sums[c] = sum
    }
    n = 0
  }
  const digit = (p: number) => bytes[p]! - 48
  let rows = 0
  let kept = 0
  let isHead = true
  let day = -1
  let dayMs = 0
  for (;;) {
    const got = readSync(fd, bytes, kept, size, null)
    if (got === 0) break
    const have = kept + got
    const end = bytes.lastIndexOf(newline, have - 1) + 1
    let p = 0
    if (isHead) {
      p = bytes.indexOf(newline) + 1
      isHead = false
    }
    while (p < end) {
      const year = digit(p) * 1000 + digit(p + 1) * 100 + digit(p + 2) * 10 + digit(p + 3)
      const month = digit(p + 5) * 10 + digit(p + 6)
      const date = digit(p + 8) * 10 + digit(p + 9)
      const key = (year * 12 + month) * 31 + date
      if (key !== day) {
        day = key
        dayMs = Date.UTC(year, month - 1, date)
      }
      const seconds =
        (digit(p + 11) * 10 + digit(p + 12)) * 3600 + (digit(p + 14) * 10 + digit(p + 15)) * 60 + digit(p + 17) * 10 + digit(p + 18)
      tMs[n] = dayMs + seconds * 1000 + digit(p + 20) * 100 + digit(p + 21) * 10 + digit(p + 22)
      p += 25
      for (let c = 0; c < channels; c++) {
        let b = bytes[p]!
        const minus = b === 45
        if (minus) b = bytes[++p]!
        let whole = 0
        let after = 0
        let counts = 0
        while (b !== comma && b !== newline) {
          if (b === 46) counts = 1
          else {
            whole = whole * 10 + b - 48
            after += counts
          }
          b = bytes[++p]!
        }
        p++
        const x = whole / powers[after]!
        columns[c]![n] = minus ? -x : x
      }
      rows++
      if (++n === most) use()
    }
    bytes.copyWithin(0, end, have)
    kept = have - end
  }
  use()
  closeSync(fd)
  if (rows > 0 && !(tMs[0]! > 0)) throw new Error('no time read')
  return { rows, sums }
}

/** What a careful person writes in an afternoon: lines, split, Number. Cells that are no number are left out. */
export async function splitParse(file: string): Promise<Sums> {
  const sums = new Float64Array(channels)
  let rows = 0
  let tail = ''
  const line = (text: string): void => {
    const cells = text.split(',')
    if (Number.isNaN(Date.parse(cells[0]!)) || cells.length !== channels + 1) return
    for (let c = 0; c < channels; c++) {
      const cell = cells[c + 1]!.replaceAll('"', '')
      const x = cell === '' ? Number.NaN : Number(cell)
      if (!Number.isNaN(x)) sums[c]! += x
    }
    rows++
  }
  for await (const chunk of createReadStream(file, { encoding: 'latin1', highWaterMark: 1 << 20 })) {
    const lines = (tail + chunk).split('\n')
    tail = lines.pop()!
    for (const l of lines) line(l)
  }
  if (tail !== '') line(tail)
  return { rows, sums }
}

/** The plain way to store a log: a table with one row a scan. */
export function rowAScan(file: string) {
  const db = new Database(file)
  db.pragma('journal_mode = WAL')
  const columns = Array.from({ length: channels }, (_, c) => `v${c}`)
  db.exec(`CREATE TABLE IF NOT EXISTS log (t INTEGER PRIMARY KEY, ${columns.map((c) => `${c} REAL`).join(', ')})`)
  const insert = db.prepare(`INSERT INTO log VALUES (?, ${columns.map(() => '?').join(', ')})`)
  const select = db.prepare('SELECT * FROM log WHERE t >= ? AND t < ?').raw()
  return {
    add: db.transaction((tMs: Float64Array, values: Float64Array, rows: number) => {
      for (let r = 0; r < rows; r++) insert.run(tMs[r]!, ...values.subarray(r * channels, (r + 1) * channels))
    }),
    /** A window into one array a channel, as a chart wants it. */
    window(fromMs: number, toMs: number): Float64Array[] {
      const rows = select.all(fromMs, toMs) as number[][]
      return Array.from({ length: channels }, (_, c) => Float64Array.from(rows, (row) => row[c + 1]!))
    },
    close: () => db.close(),
  }
}

/** Times of one write of 4 kB and a flush, ms. */
export function bareFsync(file: string) {
  const fd = openSync(file, 'w')
  const page = new Uint8Array(4096).fill(120)
  return {
    once(): number {
      const from = performance.now()
      writeSync(fd, page)
      fsyncSync(fd)
      return performance.now() - from
    },
    close: () => closeSync(fd),
  }
}
