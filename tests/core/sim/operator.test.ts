import { describe, expect, it } from 'vitest'
import { demoScenario } from '../../../server/core/sim/demo.ts'
import type { Order } from '../../../server/core/sim/operator.ts'
import { createSimulator, type SimRow } from '../../../server/core/sim/simulator.ts'
import { heron } from '../flush/heron.ts'

const scenario = demoScenario(heron)
const minute = (n: number): number => scenario.fromMs + n * 60_000
const path = ['PA', 'PB', 'R1', 'PC', 'R2']
const order = (does: string, at: number, flowMlMin: number | null = null, volumeMl: number | null = null): Order => ({
  flush: 1, askedMs: minute(at), atMs: minute(at), does, path, solvent: 'tetrahydrofuran', flowMlMin, volumeMl,
}) // biome-ignore format: a list
const orders = [
  order('F0', 60),
  order('F1', 62, 140, 360),
  order('quench-off', 66),
  order('F2', 68, 0, 0),
  order('F3', 95, 100, 700),
  order('F4', 115, 150, 420),
  order('F5', 120, 150, 1350),
  order('F6', 142, 150, 320),
  order('production', 150),
]
const rowsAMinute = 60 / scenario.logSeconds
const run = (told: readonly Order[], minutes: number): SimRow[] => {
  const simulator = createSimulator(heron, scenario, [...told])
  return Array.from({ length: minutes * rowsAMinute }, () => simulator.next())
}
const rows = run(orders, 200)
const at = (n: number): SimRow => rows[n * rowsAMinute]!
const of = (row: SimRow, tag: string): number => row.values[heron.tags.findIndex((t) => t.tag === tag)]!
const dpR1 = (row: SimRow): number => of(row, 'PT-111') - of(row, 'PT-112')

describe('the simulated operator', () => {
  it('stops the feeds in F0, and the quench only once it is told', () => {
    expect(of(at(59), 'FT-101')).toBeGreaterThan(4)
    for (const tag of ['FT-101', 'FT-102', 'FT-103']) expect(Math.abs(of(at(61), tag))).toBeLessThan(0.05)
    expect(of(at(65), 'FT-104')).toBeGreaterThan(5)
    expect(Math.abs(of(at(67), 'FT-104'))).toBeLessThan(0.05)
  })

  it('pumps 140 mL/min of tetrahydrofuran in F1, warms every reading above +5 °C in F2 within 27 min, and is cold again by the end of F5', () => {
    const kgH = of(at(66), 'FT-101') + of(at(66), 'FT-102') + of(at(66), 'FT-103')
    // 140 mL/min of 0.888 kg/L at the 20 °C of the drum.
    expect(Math.abs(kgH / (140e-6 * 60 * 888) - 1)).toBeLessThan(0.02)
    const warm = ['TT-101', 'TT-102', 'TT-103', 'TT-111', 'TT-112', 'TT-113', 'TT-121', 'TT-122']
    for (const tag of warm) {
      expect(of(at(67), tag)).toBeLessThan(0)
      expect(of(at(95), tag)).toBeGreaterThan(5)
      expect(of(at(142), tag)).toBeLessThan(0)
    }
  })

  it('dissolves 97 % of the deposit in water: ΔP of R1 in production after the flush is that of before the deposit within 3 %', () => {
    expect(dpR1(at(59)) / dpR1(at(20))).toBeGreaterThan(1.06)
    const after = [155, 158, 161, 164].map((n) => dpR1(at(n)) / dpR1(at(20)))
    for (const r of after) expect(Math.abs(r - 1)).toBeLessThan(0.03)
    // The feed is as wet as before: it grows again 25 min later.
    expect(dpR1(at(199)) / dpR1(at(160))).toBeGreaterThan(1.02)
  })

  it('names the phases as a log would: production, flush from F0 to F5, start-up in F6, production', () => {
    expect([59, 61, 100, 141, 145, 151].map((n) => at(n).phase)).toEqual([
      'production', 'flush', 'flush', 'flush', 'startup', 'production',
    ]) // biome-ignore format: a list
  })

  it('makes the same rows whether orders are there from the start or come while it runs, and changes nothing before the first', () => {
    const growing: Order[] = []
    const simulator = createSimulator(heron, scenario, growing)
    for (let i = 0; i < 130 * rowsAMinute; i++) {
      for (const o of orders)
        if (!growing.includes(o) && o.atMs <= scenario.fromMs + i * scenario.logSeconds * 1000) growing.push(o)
      expect(simulator.next()).toEqual(rows[i])
    }
    expect(run([], 60)).toEqual(rows.slice(0, 60 * rowsAMinute))
  })
})
