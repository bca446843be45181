import type Database from 'better-sqlite3'
import { MonitorError } from '../core/errors.ts'
import { keyOf, type RunId } from './keys.ts'
import { type Columns, decodeOrder, encodeOrder, encodeStrips, type Order } from './segment.ts'
import { cells, encodePage, fan, merge, openPage, type Page, summarise } from './tiers.ts'

export interface Node {
  readonly id: number
  readonly level: number
  readonly seq: number
  readonly endSeq: number
  readonly tMin: number
  readonly tMax: number
  readonly cellMs: number
}

const node = 'id, level, seq, end_seq AS endSeq, t_min AS tMin, t_max AS tMax, cell_ms AS cellMs'

export const damaged = (what: string) =>
  new MonitorError('STORE_CORRUPT', `the store lacks ${what}`, { hint: 'restore the data folder from a backup' })

/** Packed segments with their strips, and the tree of summary pages above them. Callers bring the transaction. */
export function segmentTable(db: Database.Database) {
  const insert = db.prepare('INSERT INTO segment (id, count, rows, ticks, body) VALUES (?, ?, ?, ?, ?)')
  const insertStrip = db.prepare('INSERT INTO strip (segment, strip, body) VALUES (?, ?, ?)')
  const insertPage = db.prepare(
    'INSERT INTO tier (run, level, seq, end_seq, t_min, t_max, cell_ms, body) VALUES (?, ?, ?, ?, ?, ?, ?, ?)',
  )
  const top = db.prepare<[RunId], number>('SELECT max(level) FROM tier WHERE run = ?').pluck()
  const covered = db
    .prepare<[RunId, number], number>('SELECT end_seq FROM tier WHERE run = ? AND level = ? ORDER BY seq DESC LIMIT 1')
    .pluck()
  const between = db.prepare<[RunId, number, number, number], Node>(
    `SELECT ${node} FROM tier WHERE run = ? AND level = ? AND seq >= ? AND seq < ? ORDER BY seq`,
  )
  const body = db.prepare<[number], Buffer>('SELECT body FROM tier WHERE id = ?').pluck()
  const segment = db.prepare<[number], { rows: number; ticks: number; body: Buffer }>(
    'SELECT rows, ticks, body FROM segment WHERE id = ?',
  )
  const strip = db.prepare<[number, number], Buffer>('SELECT body FROM strip WHERE segment = ? AND strip = ?').pluck()

  const page = (id: number) => {
    const found = body.get(id)
    if (found === undefined) throw damaged(`summary page ${id}`)
    return openPage(found)
  }
  const addPage = (run: RunId, level: number, seq: number, endSeq: number, tMin: number, tMax: number, made: Page): void => {
    insertPage.run(run, level, seq, endSeq, tMin, tMax, made.cellMs, encodePage(made))
  }
  /** From where the next level up stops, every page is a root of this level. */
  const rootsOf = (run: RunId, level: number): Node[] => between.all(run, level, covered.get(run, level + 1) ?? 0, Infinity)

  return {
    /** Writes the columns as the segment of numbers [seq, endSeq) with its pages, merging upwards where `fan` pages have come together. */
    add(run: RunId, seq: number, endSeq: number, columns: Columns): void {
      const key = keyOf(run, seq)
      const { strips, places } = encodeStrips(columns)
      insert.run(key, endSeq - seq, columns.rows, columns.ticks, encodeOrder(columns))
      strips.forEach((bytes, i) => {
        insertStrip.run(key, i, bytes)
      })
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
    visit(run: RunId, fromMs: number, toMs: number, use: (node: Node) => boolean): void {
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
        const children = between.all(run, n.level - 1, n.seq, n.endSeq)
        if (inOrder(children, n.seq) !== n.endSeq) throw damaged(`summary pages of ${n.seq} to ${n.endSeq} of run ${run}`)
        for (const child of children) down(child)
      }
      let seq = 0
      for (let level = top.get(run) ?? -1; level >= 0; level--) {
        const roots = rootsOf(run, level)
        seq = inOrder(roots, seq)
        for (const root of roots) down(root)
      }
    },
    /** Number of the first entry that is not packed yet. */
    end: (run: RunId): number => covered.get(run, 0) ?? 0,
    page,
    order(run: RunId, seq: number): Order & { key: number } {
      const key = keyOf(run, seq)
      const found = segment.get(key)
      if (found === undefined) throw damaged(`segment ${seq} of run ${run}`)
      return { key, ...decodeOrder(found.body, found.rows, found.ticks) }
    },
    strip(key: number, index: number): Buffer {
      const found = strip.get(key, index)
      if (found === undefined) throw damaged(`strip ${index} of segment ${key}`)
      return found
    },
  }
}

export type SegmentTable = ReturnType<typeof segmentTable>
