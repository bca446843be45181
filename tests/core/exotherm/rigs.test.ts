import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { createExothermWatch } from '../../../server/core/exotherm/watch.ts'
import { gauss, random } from './world.ts'

/** Times of first over of each spell of a reactor without coolant reading, armed after `armS`; rows are [s, °C …]. */
function spells(rows: readonly (readonly number[])[], scanS: number, armS: number, kgS: number | null): number[] {
  const n = rows[0]!.length - 1
  const watch = createExothermWatch({
    scanS,
    reactors: [{ segment: 'X', thermocouples: n, coolant: null, streams: kgS === null ? 0 : 1 }],
  })
  const found: number[] = []
  let last = -1e9
  let i = 0
  for (let endS = scanS; endS <= rows.at(-1)![0]! + scanS; endS += scanS) {
    const cell: (readonly number[])[] = []
    while (i < rows.length && rows[i]![0]! < endS) cell.push(rows[i++]!)
    const tempsC = Array.from({ length: n }, (_, j) =>
      cell.length === 0 ? null : cell.reduce((a, r) => a + r[j + 1]!, 0) / cell.length,
    )
    const scan = { tempsC, coolantC: null, flowsKgS: kgS === null ? [] : [kgS], production: true, armed: endS > armS }
    if (watch.scan(endS * 1000, [scan])[0]!.over === true) {
      if (endS - last > 30) found.push(endS)
      last = endS
    }
  }
  return found
}

describe('a heated block without coolant reading, own course', () => {
  it('a heater that would bring 30 K with 100 s of lag is found within 20 s of being switched on, and not before', () => {
    for (const seed of [1, 2, 3]) {
      const u = random(seed)
      const rows = Array.from({ length: 900 }, (_, t) => [
        t,
        25 + 30 * (t < 600 ? 0 : 1 - Math.exp(-(t - 600) / 100)) + 0.1 * gauss(u),
      ])
      const [first] = spells(rows, 1, 300, null)
      expect(first! - 600).toBeGreaterThan(0)
      expect(first! - 600).toBeLessThanOrEqual(20)
    }
  })
  it('a hot front of 30 K that passes from inlet to outlet in 90 s and later leaves again raises nothing', () => {
    const rise = (t: number, at: number, s: number) => (t < at ? 0 : 1 - Math.exp(-(t - at) / s))
    const rows = Array.from({ length: 900 }, (_, k) => {
      const t = k * 4
      const inlet = 15 + 30 * (rise(t, 700, 20) - rise(t, 2000, 30))
      const outlet = 15 + 29.5 * (rise(t, 790, 40) - rise(t, 2090, 50))
      return [t, Math.round(inlet * 10) / 10, Math.round(outlet * 10) / 10]
    })
    expect(spells(rows, 5, 300, 0.5)).toEqual([])
  })
})

const shared = new URL('../../../../shared/datasets/', import.meta.url)
const lines = (path: string, header: boolean): number[][] =>
  readFileSync(new URL(path, shared), 'utf8')
    .trim()
    .split('\n')
    .slice(header ? 1 : 0)
    .map((l) => l.split(',').map((c) => Number(c.trim())))

describe.runIf(existsSync(shared))('measured rigs of the shared data sets, where the folder exists', () => {
  it('a heater switched on at 402.5 s in air is found within 30 s (its response shows after 10 to 20 s)', () => {
    const rows = lines('heater-temperature-steps/open/heater1_kelvin_noheader.csv', false).map((r) => [r[0]!, r[2]! - 273.15])
    const after = spells(rows, 1, 360, null).filter((t) => t > 402.5)
    expect(after[0]! - 402.5).toBeLessThanOrEqual(30)
  })
  it('two heaters logged every 3 s: the steps at 120 and 150 s are found within 20 s', () => {
    const rows = lines('heater-temperature-steps/open/two_heaters_3s_exponent.csv', true)
    const one = spells(
      rows.map((r) => [r[0]!, r[3]!]),
      3,
      100,
      null,
    )
    const two = spells(
      rows.map((r) => [r[0]!, r[4]!]),
      3,
      100,
      null,
    )
    expect(one[0]! - 120).toBeGreaterThan(0)
    expect(one[0]! - 120).toBeLessThanOrEqual(20)
    expect(two[0]! - 150).toBeGreaterThan(0)
    expect(two[0]! - 150).toBeLessThanOrEqual(20)
  })
  it('hot water fronts through 39 m of pipe raise nothing', () => {
    const folder = new URL('pipe-thermal-front/open/', shared)
    const files = existsSync(folder) ? readdirSync(folder).filter((f) => f.endsWith('.csv')) : []
    expect(files.length).toBeGreaterThan(0)
    for (const file of files) {
      const rows = lines(`pipe-thermal-front/open/${file}`, true)
      // time_s, mass_flow_kg_s, T_pipe_out_C, T_water_out_C, T_pipe_in_C, T_water_in_C
      expect(
        spells(
          rows.map((r) => [r[0]! - rows[0]![0]!, r[5]!, r[3]!]),
          5,
          300,
          rows[0]![1]!,
        ),
      ).toEqual([])
    }
  })
})
