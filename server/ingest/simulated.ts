import { cell, phases, rowBlock } from '../core/reading.ts'
import { decimalsOf } from '../core/sim/instruments.ts'
import type { Order } from '../core/sim/operator.ts'
import type { Scenario } from '../core/sim/scenario.ts'
import { createSimulator, rowsOf } from '../core/sim/simulator.ts'
import type { Skid } from '../core/skid.ts'
import type { Json } from '../store/keys.ts'
import type { Source } from './source.ts'

export interface SimulatedOptions {
  readonly skid: Skid
  readonly scenario: Scenario
  /** Seconds of the run a second of the wall. */
  readonly speed: number
  readonly steadyMs: () => number
  /** As the store kept it; null for a run that begins. */
  readonly state: Json
}

/** `night` and whatever else the run was begun with stays as it is. */
interface State {
  readonly rows: number
  /** Steps of a flush that the simulated operator has been told, each from the row of its time on. */
  readonly orders?: Json
  readonly [kept: string]: Json
}

/** The clock runs at most so many rows ahead: after a pause of the process, or on a slow machine, the run goes on where it stood, it does not rush. */
const mostAhead = 7200
/** Most rows in one poll, so that requests of people get their turn in between. */
const mostRows = 512

/**
 * The simulated skid as a source, `speed` times faster than time. Its clock is the simulator's; it stands still while the process is
 * down. It has an operator who does the steps of a flush as people confirm them. A restart takes the rows up to where it stood again (the same scenario and orders give the same rows) and goes on.
 */
export function simulatedSource({ skid, scenario, speed, steadyMs, state }: SimulatedOptions): Source {
  const orders = [...(((state as State | null)?.orders ?? []) as unknown as readonly Order[])]
  const simulator = createSimulator(skid, scenario, orders)
  const total = rowsOf(scenario)
  const logMs = Math.round(scenario.logSeconds * 1000)
  const width = skid.tags.length + (skid.phaseColumn === null ? 0 : 1)
  const decimals = skid.tags.map(decimalsOf)
  let taken = (state as State | null)?.rows ?? 0
  /** Rows of before that the simulator has made again; a little at each poll, so that the server is up meanwhile. */
  let again = 0
  let lastMs = steadyMs()
  let nowMs = scenario.fromMs + taken * logMs

  const advance = (): void => {
    const now = steadyMs()
    if (again < taken) lastMs = now
    nowMs = Math.min(nowMs + (now - lastMs) * speed, scenario.fromMs + Math.min(total, taken + mostAhead) * logMs)
    lastMs = now
  }
  return {
    kind: 'simulated',
    about: `simulator, scenario '${scenario.name}' with seed ${scenario.seed}, ${speed} times faster than time`,
    async poll() {
      if (again < taken) {
        for (let i = 0; i < mostRows && again < taken; i++, again++) simulator.next()
        lastMs = steadyMs()
        return { entries: [], more: true, ended: false }
      }
      advance()
      const waiting = Math.min(total, Math.floor((nowMs - scenario.fromMs) / logMs)) - taken
      const due = Math.min(waiting, mostRows)
      const block = rowBlock(Math.max(0, due), width)
      for (; block.rows < due; block.rows++) {
        const r = block.rows
        const row = simulator.next()
        block.tMs[r] = row.tMs
        row.values.forEach((value, i) => {
          // As a logger would write it.
          block.values[r * width + i] = value === null ? 0 : Number(value.toFixed(decimals[i]))
          block.codes[r * width + i] = value === null ? cell.missing : cell.value
        })
        if (width > skid.tags.length) {
          block.values[r * width + width - 1] = phases.indexOf(row.phase)
          block.codes[r * width + width - 1] = cell.value
        }
      }
      // The row's phase is an index into the run's words.
      const words = taken === 0 && width > skid.tags.length ? { words: { from: 0, words: phases } } : {}
      taken += Math.max(0, due)
      again = taken
      return {
        ...words,
        entries: due > 0 ? [{ kind: 'rows', block }] : [],
        state: { ...(state as State | null), rows: taken, ...(orders.length === 0 ? {} : { orders: orders as unknown as Json }) },
        more: waiting > due,
        ended: taken >= total,
      }
    },
    status: () =>
      again < taken
        ? { state: 'waiting', message: 'the simulator returns to where it stood' }
        : { state: taken >= total ? 'ended' : 'running', message: null },
    clock() {
      advance()
      return { kind: 'simulated', nowMs: Math.round(nowMs), speed }
    },
    usualGapS: () => scenario.logSeconds,
    follow(told) {
      for (const order of told) {
        if (orders.some((o) => o.flush === order.flush && o.does === order.does && o.askedMs === order.askedMs)) continue
        // Rows that are out already stay as they are.
        const atMs = Math.max(order.askedMs, scenario.fromMs + taken * logMs, orders.at(-1)?.atMs ?? 0)
        orders.push({ ...order, atMs })
      }
    },
    async close() {},
  }
}
