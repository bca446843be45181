import { describe, expect, it } from 'vitest'
import { why } from '../../../server/core/quality/judge.ts'
import { reasons } from '../../../server/core/quality/tag-rules.ts'
import { createGrid, type GridState } from '../../../server/core/scan/grid.ts'
import { block, type Row } from '../../helpers/rows.ts'
import { twoSegments } from '../../helpers/skids.ts'

const skid = twoSegments()
const width = skid.tags.length + 1
const t0 = Date.UTC(2031, 4, 5)
/** A row with a feed of `flow` kg/h, `s` seconds after the start. */
const row = (s: number, flow: number | null, phase = 'production'): Row => [t0 + 1000 * s, flow, 5, 3, 1, 20, 20, phase]

function run(rows: readonly Row[], ticksS: readonly number[] = [], finish = true) {
  const scans: { s: number; flow: number | null; rows: number; held: boolean; skipped: number }[] = []
  const grid = createGrid(skid, (x) =>
    scans.push({
      s: (x.tMs - t0) / 1000,
      flow: x.used[0]! > 0 ? x.si[0]! * 3600 : null,
      rows: x.rows,
      held: x.held[0] === 1,
      skipped: x.skipped,
    }),
  )
  grid.rows(block(rows, width))
  for (const s of ticksS) grid.tick(t0 + 1000 * s)
  if (finish) grid.finish()
  const count = (reason: keyof typeof why, tag = 0) => grid.state.judge.counts[tag * reasons.length + why[reason]]
  return { scans, grid, count }
}

describe('scan grid', () => {
  it('gives the mean of the good readings of a cell', () => {
    const { scans } = run([row(0, 6), row(0.25, 6.1), row(0.5, 6.2), row(1, 6)])
    expect(scans[0]).toMatchObject({ s: 0, rows: 3 })
    expect(scans[0]!.flow).toBeCloseTo(6.1, 12)
  })

  it('closes a scan two scans after its end, not before', () => {
    const early = run([row(0, 6), row(1, 6), row(2.999, 6)], [], false)
    expect(early.scans).toHaveLength(0)
    const due = run([row(0, 6), row(1, 6), row(3, 6)], [], false)
    expect(due.scans.map((x) => x.s)).toEqual([0])
  })

  it('closes by the clock alone when rows stop, and leaves the gap empty', () => {
    const { scans } = run([row(0, 6)], [6], false)
    expect(scans.map((x) => [x.s, x.flow])).toEqual([
      [0, expect.closeTo(6, 9)],
      [1, null],
      [2, null],
      [3, null],
    ])
  })

  it('uses a row out of order while its scan is open, keeps it and marks it late when it is not', () => {
    const { scans, grid, count } = run([row(0, 6), row(2, 6), row(1, 6.2), row(9, 6), row(3, 19)])
    expect(scans.find((x) => x.s === 1)!.flow).toBeCloseTo(6.2, 9)
    expect(scans.find((x) => x.s === 3)!.flow).toBeNull()
    expect(grid.state).toMatchObject({ outOfOrder: 2, lateRows: 1, rows: 5 })
    expect(count('late')).toBe(1)
  })

  it('counts a repeated row and uses it once', () => {
    const { scans, grid, count } = run([row(0, 6), row(0, 6), row(1, 6)])
    expect(grid.state.repeated).toBe(1)
    expect(count('duplicate')).toBe(1)
    expect(scans[0]!.rows).toBe(1)
  })

  it('does not follow one row that jumps a day ahead', () => {
    const { grid, scans, count } = run([row(0, 6), row(1, 6), row(86_400, 6), row(2, 6), row(3, 6)])
    expect(grid.state.badTime).toBe(1)
    expect(count('bad-time')).toBe(1)
    expect(scans.map((x) => x.s)).toEqual([0, 1, 2, 3])
  })

  it('follows a real gap of a day, stepping over most of its empty cells', () => {
    const { grid, scans } = run([row(0, 6), row(86_400, 6), row(86_401, 6)])
    expect(grid.state.badTime).toBe(0)
    expect(scans.length).toBeLessThan(1500)
    expect(grid.state.scans).toBe(86_402)
    expect(scans.at(-1)!.s).toBe(86_401)
  })

  it('holds a tag that reports every 5 s, marked so, and lets go after one and a half of its intervals', () => {
    const rows = Array.from({ length: 40 }, (_, s) => row(s, s % 5 === 0 && s < 30 ? 6 + s / 100 : undefined!)) as Row[]
    const { scans } = run(rows.map(([t, f, ...rest]) => [t, f ?? undefined, ...rest] as Row))
    expect(scans[22]).toMatchObject({ held: true })
    expect(scans[22]!.flow).toBeCloseTo(6.2, 9)
    expect(scans[25]!.held).toBe(false)
    expect(scans[25 + 8]!.flow).not.toBeNull()
    expect(scans[39]!.flow).toBeNull()
  })

  it('goes on from its state as plain JSON as if it had not stopped', () => {
    const rows = Array.from({ length: 30 }, (_, s) => row(s, 6 + 0.1 * (s % 3)))
    const whole = run(rows).scans
    const scans: number[] = []
    const first = createGrid(skid, (x) => scans.push(x.used[0]! > 0 ? x.si[0]! * 3600 : Number.NaN))
    first.rows(block(rows.slice(0, 17), width))
    const second = createGrid(
      skid,
      (x) => scans.push(x.used[0]! > 0 ? x.si[0]! * 3600 : Number.NaN),
      JSON.parse(JSON.stringify(first.save())) as GridState,
    )
    second.rows(block(rows.slice(17), width))
    second.finish()
    expect(scans).toEqual(whole.map((x) => x.flow))
  })
})
