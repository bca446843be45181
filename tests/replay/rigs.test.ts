import { existsSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { randomOf } from '../../server/core/sim/random.ts'
import type { Skid } from '../../server/core/skid.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { fixture } from '../helpers/skids.ts'
import { reportOf, startMs } from './measured.ts'

/** Other rigs than the skids the detectors were made for, through the whole pipeline. */
const shared = join(import.meta.dirname, '../../../shared/datasets')
const skidOf = (name: string, more: (text: string) => string = (t) => t): Skid =>
  loadSkid(more(readFileSync(fixture(`skids/${name}.yaml`), 'utf8')), `${name}.yaml`)
const loop = skidOf('water-loop')
const pipe = skidOf('thermal-pipe')
const heater = skidOf('heater')
const kelvin = skidOf('heater', (t) =>
  t.replaceAll('unit: degC, range: [0, 150]', 'unit: K, range: [250, 450]').replace('scanSeconds: 3', 'scanSeconds: 1'),
)
const since = (iso: string, from: string) => (Date.parse(iso) - Date.parse(from)) / 1000

describe('a valve that closes in a loop at constant pump speed, data made anew', () => {
  const log = (seed: number, shut: number) => {
    const r = randomOf(seed, 'loop')
    const rows = Array.from({ length: 1100 }, (_, i) => {
      const t = new Date(startMs + 1000 * i).toISOString().slice(0, 19).replace('T', ' ')
      const flow = Math.round(32 * (1 - shut * Math.min(1, Math.max(0, (i - 600) / 60))) + 0.4 * r.normal())
      return `${t};${(0.33 * Math.round(0.8 * r.normal())).toFixed(3)};${(25.8 + 0.01 * r.normal()).toFixed(3)};${60 * flow}`
    })
    return `datetime;Pressure;Thermocouple;Volume Flow RateRMS\n${rows.join('\n')}\n`
  }
  it.each([0.08, 0.25])(
    'flow down by the share %d within a minute is a flow alarm within 70 s of its begin, and the useless pressure is neither fouling nor a fault',
    async (shut) => {
      const { alarms } = await reportOf(loop, { text: log(1, shut) })
      expect(alarms.map((a) => a.kind)).toEqual(['flow'])
      expect((Date.parse(alarms[0]!.raised) - startMs) / 1000 - 600).toBeGreaterThan(0)
      expect((Date.parse(alarms[0]!.raised) - startMs) / 1000 - 600).toBeLessThan(70)
    },
  )
  it('a loop left alone raises nothing in 18 min', async () => {
    expect((await reportOf(loop, { text: log(2, 0) })).alarms).toEqual([])
  })
})

if (!existsSync(shared))
  it('../shared is not here: the measured rigs are not replayed in this run', () => expect(existsSync(shared)).toBe(false))

describe.runIf(existsSync(shared))('measured rigs of ../shared', () => {
  const read = (file: string): string => (existsSync(shared) ? readFileSync(join(shared, file), 'utf8').replaceAll('\r', '') : '')
  /** A column multiplied: the logs give L/min and kg/s, the skid files the nearest unit there is. */
  const scaled = (text: string, by: string, column: number, factor: number) =>
    text.trim().split('\n').map((l, i) => l.split(by).map((c, j) => (i > 0 && j === column ? String(Number(c) * factor) : c)).join(by)).join('\n') // biome-ignore format: one line
  const valve = (name: string) => ({ text: scaled(read(`water-loop-valve/open/${name}.csv`), ';', 8, 60) })

  it.each(['valve1_1', 'valve1_9', 'valve1_13', 'valve2_1'])(
    '%s: the flow loss from 600 s on is a flow alarm after the valve begins to move and within 75 s',
    async (name) => {
      const report = await reportOf(loop, valve(name))
      const flow = report.alarms.filter((a) => a.kind === 'flow')
      const at = since(flow[0]!.raised, report.run.from!) - 600
      console.log(`${name}: flow alarm ${at.toFixed(0)} s after the valve begins to close`)
      expect(at).toBeGreaterThan(0)
      expect(at).toBeLessThan(75)
      expect(report.alarms.filter((a) => a.kind === 'fouling' || a.kind === 'sensor')).toEqual([])
    },
  )

  it('other_5, a rotor out of balance, shows in no reading used here: no alarm at all', async () => {
    const wide = skidOf('water-loop', (t) => t.replace('flowLow: 1872', 'flowLow: 7380'))
    expect((await reportOf(wide, valve('other_5'))).alarms).toEqual([])
  })

  it.each(['pipe_150801', 'pipe_151204_2'])(
    '%s: a front of hot water is no exotherm and no fault of its thermocouples',
    async (name) => {
      const { alarms } = await reportOf(pipe, { text: scaled(read(`pipe-thermal-front/open/${name}.csv`), ',', 1, 3600) })
      expect(alarms.filter((a) => a.kind === 'exotherm' || (a.tag ?? '').startsWith('TT'))).toEqual([])
    },
  )

  it('the heaters’ steps at 300 s (two heaters, a row every 3 s) and at 402.5 s (one, every second) are exotherms within 40 s', async () => {
    const two = read('heater-temperature-steps/open/two_heaters_3s_exponent.csv').trim().split('\n').map((l, i) => `${l},${i === 0 ? 'phase' : 'production'}`).join('\n') // biome-ignore format: one line
    const one = `Time,Q1,TC1,phase\n${read('heater-temperature-steps/open/heater1_kelvin_noheader.csv').trim().split('\n').map((l) => `${l},production`).join('\n')}` // biome-ignore format: one line
    for (const [skid, text, step] of [
      [heater, two, 300],
      [kelvin, one, 402.5],
    ] as const) {
      // biome-ignore format: a table
      const report = await reportOf(skid, { text })
      const found = report.alarms
        .filter((a) => a.kind === 'exotherm')
        .map((a) => since(a.raised, new Date(startMs).toISOString()) - step)
      console.log(`heater step at ${step} s: exotherm alarm after ${found.map((s) => s.toFixed(1)).join(', ')} s`)
      expect(found.some((s) => s > 0 && s < 40)).toBe(true)
    }
  })
})
