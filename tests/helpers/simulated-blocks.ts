import { cell, phases, type RowBlock, rowBlock } from '../../server/core/reading.ts'
import type { Scenario } from '../../server/core/sim/scenario.ts'
import { rowsOf, type SimRow, simulate } from '../../server/core/sim/simulator.ts'
import type { Skid } from '../../server/core/skid.ts'

/** Puts a simulated row behind those in a block; the phase follows the tags where the skid has a phase column. */
function putRow(block: RowBlock, skid: Skid, row: SimRow): void {
  const at = block.rows * block.width
  block.tMs[block.rows] = row.tMs
  for (let i = 0; i < skid.tags.length; i++) {
    const value = row.values[i] ?? null
    block.values[at + i] = value ?? 0
    block.codes[at + i] = value === null ? cell.missing : cell.value
  }
  if (block.width > skid.tags.length) {
    block.values[at + skid.tags.length] = phases.indexOf(row.phase)
    block.codes[at + skid.tags.length] = cell.value
  }
  block.rows++
}

/** The columns of a block of this skid. */
const blockWidth = (skid: Skid): number => skid.tags.length + (skid.phaseColumn === null ? 0 : 1)

/**
 * A whole run as blocks for the pipeline, without a file between: the same entries as reading the log that the run would write (dirt left
 * out; it is the file's). A block is good until the next one is asked for.
 */
export function* simulatedBlocks(skid: Skid, scenario: Scenario, rowsPerBlock = 1024): Generator<RowBlock, void> {
  const block = rowBlock(Math.min(rowsPerBlock, rowsOf(scenario)), blockWidth(skid))
  for (const row of simulate(skid, scenario)) {
    putRow(block, skid, row)
    if (block.rows < block.tMs.length) continue
    yield block
    block.rows = 0
  }
  if (block.rows > 0) yield block
}
