import type Database from 'better-sqlite3'
import { partsHash } from '../trail/chain.ts'
import { readingHash } from '../trail/reading-hash.ts'
import { checksum, damaged } from './checksum.ts'
import { keyOf, type RunId, seqOf } from './keys.ts'
import type { Ledger } from './ledger.ts'
import { type Columns, decodeOrder, encodeOrder, encodeStrips, type Order } from './segment.ts'
import { encodePage, openPage } from './tier-page.ts'
import { cells, fan, merge, type Page, summarise } from './tiers.ts'

export interface Node {
  readonly id: number
  readonly level: number
  readonly seq: number
  readonly endSeq: number
  readonly tMin: number
  readonly tMax: number
  readonly cellMs: number
  readonly sum: number
}

const node = 'id, level, seq, end_seq AS endSeq, t_min AS tMin, t_max AS tMax, cell_ms AS cellMs, sum'

/** Packed segments with their strips, and the tree of summary pages above them. Callers bring the transaction. */
export function segmentTable(db: Database.Database, ledger: Pick<Ledger, 'run'>) {
  const insert = db.prepare('INSERT INTO segment (id, body) VALUES (?, ?)')
  const insertStrip = db.prepare('INSERT INTO strip (segment, strip, body) VALUES (?, ?, ?)')
  const insertPage = db.prepare(
    'INSERT INTO tier (run, level, seq, end_seq, t_min, t_max, cell_ms, sum, body) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)',
  )
  const top = db.prepare<[RunId], number>('SELECT max(level) FROM tier WHERE run = ?').pluck()
  const covered = db
    .prepare<[RunId, number], number>('SELECT end_seq FROM tier WHERE run = ? AND level = ? ORDER BY seq DESC LIMIT 1')
    .pluck()
  const select = db.prepare<[RunId, number, number, number], Node>(
    `SELECT ${node} FROM tier WHERE run = ? AND level = ? AND seq >= ? AND seq < ? ORDER BY seq`,
  )
  const finest = db
    .prepare<[RunId], number | null>(
      'SELECT max(cell_ms) FROM (SELECT cell_ms FROM tier WHERE run = ? AND level = 0 ORDER BY seq LIMIT 8)',
    )
    .pluck()
  const between = (run: RunId, level: number, from: number, to: number): Node[] => {
    const nodes = select.all(run, level, from, to)
    for (const { level: l, seq, endSeq, tMin, tMax, cellMs, sum } of nodes)
      if (sum !== checksum([run, l, seq, endSeq, tMin, tMax, cellMs])) throw damaged(`summary page ${seq} of run ${run}`)
    return nodes
  }
  const body = db.prepare<[number], Buffer>('SELECT body FROM tier WHERE id = ?').pluck()
  const segment = db.prepare<[number], Buffer>('SELECT body FROM segment WHERE id = ?').pluck()
  const before = db
    .prepare<[number, number], number>('SELECT id FROM segment WHERE id <= ? AND id >= ? ORDER BY id DESC LIMIT 1')
    .pluck()
  const strip = db.prepare<[number, number], Buffer>('SELECT body FROM strip WHERE segment = ? AND strip = ?').pluck()

  const page = (id: number) => {
    const found = body.get(id)
    if (found === undefined) throw damaged(`summary page ${id}`)
    return openPage(found)
  }
  const addPage = (run: RunId, level: number, seq: number, endSeq: number, tMin: number, tMax: number, made: Page): void => {
    insertPage.run(
      run,
      level,
      seq,
      endSeq,
      tMin,
      tMax,
      made.cellMs,
      checksum([run, level, seq, endSeq, tMin, tMax, made.cellMs]),
      encodePage(made),
    )
  }
  /** From where the next level up stops, every page is a root of this level. */
  const rootsOf = (run: RunId, level: number): Node[] => between(run, level, covered.get(run, level + 1) ?? 0, Infinity)

  return {
    /** Writes the columns as the segment of numbers [seq, endSeq) with its pages, merging upwards where `fan` pages have come together. */
    add(run: RunId, seq: number, endSeq: number, columns: Columns): void {
      const key = keyOf(run, seq)
      const { strips, places } = encodeStrips(columns)
      const order = encodeOrder(columns, seq, endSeq)
      insert.run(key, order)
      strips.forEach((bytes, i) => {
        insertStrip.run(key, i, bytes)
      })
      const parts = [order, ...strips]
      const { rows, ticks } = columns
      const sha256 = partsHash(parts)
      ledger.run(run, {
        kind: 'readings', from: seq, to: endSeq, rows, ticks, parts: parts.length, sha256, content: readingHash(columns),
      }) // biome-ignore format: a list
      let tMin = Infinity
      let tMax = -Infinity
      for (let i = 0; i < columns.rows; i++) {
        const t = columns.tMs[i]!
        if (t < tMin) tMin = t
        if (t > tMax) tMax = t
      }
      addPage(run, 0, seq, endSeq, tMin, tMax, summarise(columns, places))
      for (let level = 0; ; level++) {
        const roots = rootsOf(run, level)
        if (roots.length < fan) break
        const pages = roots.map(({ id }): Page => {
          const open = page(id)
          return {
            cellMs: open.cellMs,
            at: open.at,
            tags: Array.from({ length: open.width }, (_, c) => open.tag(c, cells(open.at.length))),
          }
        })
        const low = Math.min(...roots.map((n) => n.tMin))
        const high = Math.max(...roots.map((n) => n.tMax))
        addPage(run, level + 1, roots[0]!.seq, roots.at(-1)!.endSeq, low, high, merge(pages, level + 1))
      }
    },
    /** Pages of a run that overlap [fromMs, toMs), from the top; `use` says whether a page will do or its parts are wanted. Segments come as level 0. */
    visit(run: RunId, packed: number, fromMs: number, toMs: number, use: (node: Node) => boolean): void {
      // Pages of one level follow each other without a hole; a missing one must not look like a gap in the readings.
      const inOrder = (nodes: readonly Node[], seq: number): number => {
        let at = seq
        for (const n of nodes) {
          if (n.seq !== at) throw damaged(`summary page ${at} of run ${run}`)
          at = n.endSeq
        }
        return at
      }
      const down = (n: Node): void => {
        if (n.tMax < fromMs || n.tMin >= toMs || use(n) || n.level === 0) return
        const children = between(run, n.level - 1, n.seq, n.endSeq)
        if (inOrder(children, n.seq) !== n.endSeq) throw damaged(`summary pages of ${n.seq} to ${n.endSeq} of run ${run}`)
        for (const child of children) down(child)
      }
      let seq = 0
      for (let level = top.get(run) ?? -1; level >= 0; level--) {
        const roots = rootsOf(run, level)
        seq = inOrder(roots, seq)
        for (const root of roots) down(root)
      }
      if (seq !== packed) throw damaged(`summary page ${seq} of run ${run}`)
    },
    /** Width of the cells of level 0, judged by the first segments; null when nothing is packed. */
    finestCells(run: RunId): number | null {
      return finest.get(run) ?? null
    },
    page,
    /** First number of the segment that holds number `seq`, which is below `end`. */
    at(run: RunId, seq: number): number {
      const found = before.get(keyOf(run, seq), keyOf(run, 0))
      if (found === undefined) throw damaged(`the segment of entry ${seq} of run ${run}`)
      return seqOf(found)
    },
    /** Errors: STORE_CORRUPT. */
    order(run: RunId, seq: number): Order {
      const found = segment.get(keyOf(run, seq))
      if (found === undefined) throw damaged(`segment ${seq} of run ${run}`)
      return decodeOrder(found)
    },
    strip(run: RunId, seq: number, index: number): Buffer {
      const found = strip.get(keyOf(run, seq), index)
      if (found === undefined) throw damaged(`strip ${index} of segment ${seq} of run ${run}`)
      return found
    },
  }
}

export type SegmentTable = ReturnType<typeof segmentTable>
