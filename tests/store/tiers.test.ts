import { describe, expect, it } from 'vitest'
import { cell, rowBlock } from '../../server/core/reading.ts'
import { Columns, segmentRows } from '../../server/store/segment.ts'
import { summarise } from '../../server/store/tiers.ts'

/** A full segment of a log with one reading a row, all tags in turn each second. */
function oneAReading(tags: number): Columns {
  const block = rowBlock(segmentRows, tags)
  block.rows = segmentRows
  for (let i = 0; i < segmentRows; i++) {
    const tag = i % tags
    block.tMs[i] = 1000 * Math.floor(i / tags)
    block.values[i * tags + tag] = i
    block.codes[i * tags + tag] = cell.value
  }
  const columns = new Columns(tags)
  columns.addRows(block, 0, segmentRows)
  return columns
}
const cellsOf = (tags: number): number =>
  summarise(
    oneAReading(tags),
    Array.from({ length: tags }, () => 0),
  ).at.length

describe('cells of a summary page', () => {
  it('a segment of 24 tags with one reading a row, 170 of each tag, has 9 to 16 cells, so that the trend of a day need not open it', () => {
    expect(cellsOf(24)).toBeGreaterThan(8)
    expect(cellsOf(24)).toBeLessThanOrEqual(16)
  })
  it('a segment of 400 tags, 10 readings of each, has one cell: a page is no larger than what it sums up', () => {
    expect(cellsOf(400)).toBe(1)
  })
  it('a segment of one tag has 22 to 42 cells, 96 readings each or more', () => {
    expect(cellsOf(1)).toBeGreaterThan(21)
    expect(cellsOf(1)).toBeLessThanOrEqual(42)
  })
})
