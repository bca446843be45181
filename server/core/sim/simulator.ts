import type { Phase } from '../reading.ts'
import type { Skid } from '../skid.ts'
import { checkScenario } from './check.ts'
import { disturbancesOf } from './disturbances.ts'
import { instrumentOf } from './instruments.ts'
import { createOperator, type Order } from './operator.ts'
import { plantOf } from './plant.ts'
import { processOf } from './process.ts'
import { endOf, type Scenario } from './scenario.ts'

/** One row of the log; values in the order and units of the skid's tags. */
export interface SimRow {
  readonly tMs: number
  readonly values: readonly (number | null)[]
  readonly phase: Phase
}

export interface Simulator {
  /** The next row; never ends, the last phase goes on after the scenario's hours. */
  next(): SimRow
}

/** The plant moves in steps of at most this, s. */
const LONGEST_STEP_S = 5

/**
 * A simulated skid, row by row. The same skid and scenario give the same rows, so a stopped one resumes by skipping the rows already taken.
 * `orders`: the steps of a flush that the simulated operator does, each from its time on, in their order; the list may grow while rows are taken.
 * Errors: SIM_OPTION for a scenario that does not fit the skid, FLUID_UNKNOWN, FLUID_RANGE.
 */
export function createSimulator(skid: Skid, scenario: Scenario, orders: readonly Order[] | null = null): Simulator {
  checkScenario(skid, scenario)
  const plant = plantOf(skid, scenario)
  const noise = scenario.noise === 0 ? null : disturbancesOf(plant, scenario.seed, scenario.noise)
  const process = processOf(plant, scenario, noise, orders === null ? null : createOperator(plant, orders))
  const instruments = skid.tags.map((tag) => instrumentOf(plant, process, noise, scenario, tag))
  const logMs = Math.round(scenario.logSeconds * 1000)
  const steps = Math.max(1, Math.ceil(scenario.logSeconds / LONGEST_STEP_S))
  let rows = 0
  return {
    next() {
      const tMs = scenario.fromMs + rows * logMs
      if (rows > 0)
        for (let i = 1; i <= steps; i++) process.step(tMs - logMs + Math.round((i * logMs) / steps), scenario.logSeconds / steps)
      rows++
      return { tMs, values: instruments.map((read) => read(tMs, scenario.logSeconds)), phase: process.phase }
    },
  }
}

/** The rows of a whole run, one at a time. */
export function* simulate(skid: Skid, scenario: Scenario): Generator<SimRow, void> {
  const simulator = createSimulator(skid, scenario)
  const rows = rowsOf(scenario)
  for (let i = 0; i < rows; i++) yield simulator.next()
}

export const rowsOf = (scenario: Scenario): number =>
  Math.ceil((endOf(scenario) - scenario.fromMs) / Math.round(scenario.logSeconds * 1000))
