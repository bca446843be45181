import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { decimalsOf, instrumentNoise, resolutionOf } from '../../../server/core/sim/instruments.ts'
import { logText } from '../../../server/core/sim/log-text.ts'
import { nominalClean } from '../../../server/core/sim/nominal.ts'
import { plantOf } from '../../../server/core/sim/plant.ts'
import { processOf } from '../../../server/core/sim/process.ts'
import { randomScenario, scenarioKinds } from '../../../server/core/sim/random-scenario.ts'
import { type Scenario, type SimEvent, scenarioOf } from '../../../server/core/sim/scenario.ts'
import { createSimulator, simulate } from '../../../server/core/sim/simulator.ts'
import { truthOf } from '../../../server/core/sim/truth-of.ts'
import type { Skid } from '../../../server/core/skid.ts'
import { bare, heron } from './skids.ts'

const bytes = (skid: Skid, scenario: Scenario) => [...logText(skid, scenario).lines()].join('')
const column = (skid: Skid, scenario: Scenario, tag: string) => {
  const i = skid.tags.findIndex((t) => t.tag === tag)
  return [...simulate(skid, scenario)].map((r) => r.values[i] ?? null)
}
const numbers = (x: readonly (number | null)[]) => x.filter((v) => v !== null)
const mean = (x: readonly number[]) => x.reduce((a, b) => a + b, 0) / x.length
/** sd of one reading from differences of neighbours, which slow movement leaves alone. */
const noiseOf = (x: readonly number[]) => Math.sqrt(mean(x.slice(1).map((v, i) => (v - x[i]!) ** 2)) / 2)
const sensor = (tag: string, fault: Extract<SimEvent, { kind: 'sensor' }>['fault'], size = 0, overS = 0): SimEvent => ({
  kind: 'sensor',
  atHours: 0.05,
  tag,
  fault,
  lastsHours: 0.05,
  size,
  overS,
})

describe('the simulated skid', () => {
  it('gives the same bytes for the same seed, and others for another', () => {
    const of = (seed: number) => bytes(heron, scenarioOf({ hours: 0.05, seed }))
    expect(of(11)).toBe(of(11))
    expect(of(11)).not.toBe(of(12))
  })

  it('resumes by skipping: row 100 is the same whoever asks for it, and the rows go on after the last hour', () => {
    const scenario = scenarioOf({ hours: 0.02, seed: 5 })
    const a = createSimulator(heron, scenario)
    const rows = Array.from({ length: 101 }, () => a.next())
    expect(rows.slice(0, 72)).toEqual([...simulate(heron, scenario)])
    const b = createSimulator(heron, scenario)
    for (let i = 0; i < 100; i++) b.next()
    expect(b.next()).toEqual(rows[100])
    expect(rows[100]!.tMs).toBe(scenario.fromMs + 100_000)
  })

  it('shows noise of the stated size: pressure 0.04 % of 25 bar, temperature 0.06 K, each with its rounding, within 15 %', () => {
    const scenario = scenarioOf({ hours: 1, seed: 6 })
    const rounding = (tag: string) => resolutionOf(heron.tags.find((t) => t.tag === tag)!) / Math.sqrt(12)
    // The last tap before the regulator: pulsation of the pumps hardly reaches it.
    const pressure = noiseOf(numbers(column(heron, scenario, 'PT-114')))
    expect(pressure / Math.hypot(instrumentNoise.pressureOfRange * 25, rounding('PT-114'))).toBeGreaterThan(0.85)
    expect(pressure / Math.hypot(instrumentNoise.pressureOfRange * 25, rounding('PT-114'))).toBeLessThan(1.15)
    const temperature = noiseOf(numbers(column(heron, scenario, 'TT-113')))
    expect(temperature / Math.hypot(instrumentNoise.temperatureK, rounding('TT-113'))).toBeGreaterThan(0.85)
    expect(temperature / Math.hypot(instrumentNoise.temperatureK, rounding('TT-113'))).toBeLessThan(1.15)
  })

  it('is still without noise: every reading of a quiet hour stays within one step of the logger', () => {
    const scenario = scenarioOf({ hours: 0.2, seed: 6, noise: 0 })
    for (const t of ['PT-111', 'FT-101', 'TT-112']) {
      const x = numbers(column(heron, scenario, t))
      expect(Math.max(...x) - Math.min(...x)).toBeLessThanOrEqual(1.0001 * 10 ** -decimalsOf(heron.tags.find((s) => s.tag === t)!))
    }
  })

  it('keeps clean dP of every segment under 0.43 of its limit at the flows it chooses, and feeds in the mol ratio asked for', () => {
    const plant = plantOf(heron, scenarioOf({ hours: 1, seed: 8 }))
    const shares = plant.segments.map((s) => nominalClean(plant, s) / s.dpHighPa!)
    expect(Math.max(...shares)).toBeCloseTo(0.42, 2)
    const [a, b] = [plant.streams[0]!, plant.streams[1]!]
    const molar = ((b.nominalKgS / b.fluid.rhoKgM3(293.15)) * 2.3) / ((a.nominalKgS / a.fluid.rhoKgM3(293.15)) * 1.0)
    expect(molar).toBeCloseTo(1.05, 9)
  })

  it('adds pressures up from the outlet: inlet tap minus outlet tap is the dP of the segment between them', () => {
    const scenario = scenarioOf({ hours: 1, seed: 8, noise: 0 })
    const plant = plantOf(heron, scenario)
    const p = processOf(plant, scenario, null)
    plant.segments.forEach((s, n) => {
      const dp = s.spec.dp
      if (dp.kind !== 'taps') return
      const found = p.tapPa.get(dp.pressureIn)! - p.tapPa.get(dp.pressureOut)!
      expect(found).toBeCloseTo(p.dpPa[n]!, 6)
    })
    expect(p.tapPa.get('PT-114')).toBe(p.outletPa)
  })

  it('runs a skid without geometry, phases or ranges: dP cell in psi at 38 % of its limit, held outlet, mA over its range', () => {
    const scenario = scenarioOf({ hours: 0.05, seed: 3, noise: 0 })
    const row = createSimulator(bare, scenario).next()
    const [flow, dp, inlet, level, loop] = row.values as number[]
    expect(flow).toBeGreaterThan(0)
    expect((dp! * 6894.757) / 1e5).toBeCloseTo(0.38 * 0.4, 1)
    expect(inlet).toBeGreaterThan(500)
    expect(level).toBe(50)
    expect(loop).toBeGreaterThanOrEqual(3.8)
    expect(loop).toBeLessThanOrEqual(20.5)
    expect(bytes(bare, scenario).split('\n')[0]).toBe('time,FT-1,PDT-1,PT-1,LT-1,PT-2')
  })

  it('answers a flow step of +20 % with +20 % flow and more than 20 % dP, a warmer coolant with less dP', () => {
    const quiet = scenarioOf({ hours: 0.5, seed: 9, noise: 0 })
    const dp = (event: SimEvent) => {
      const scenario = { ...quiet, events: [event] }
      const [up, down, flow] = ['PT-111', 'PT-112', 'FT-101'].map((t) => numbers(column(heron, scenario, t)))
      const at = (i: number) => up![i]! - down![i]!
      return { dp: at(1795) / at(100), flow: flow![1795]! / flow![100]! }
    }
    const flow = dp({ kind: 'flowStep', atHours: 0.1, factor: 1.2 })
    expect(flow.flow).toBeCloseTo(1.2, 2)
    expect(flow.dp).toBeGreaterThan(1.21)
    expect(flow.dp).toBeLessThan(1.44)
    const warm = dp({ kind: 'coolantStep', atHours: 0.1, degC: 6 })
    expect(warm.flow).toBeCloseTo(1, 3)
    expect(warm.dp).toBeLessThan(0.99)
  })

  it('breaks sensors as told: frozen repeats, open reads the top of its range, dead reads nothing, a drift ends at its size', () => {
    const on = (event: SimEvent, tag: string) =>
      column(heron, scenarioOf({ hours: 0.2, seed: 3, noise: 0.01, events: [event] }), tag).slice(190, 350)
    expect(
      new Set(column(heron, scenarioOf({ hours: 0.2, seed: 3, events: [sensor('PT-112', 'frozen')] }), 'PT-112').slice(190, 350))
        .size,
    ).toBe(1)
    expect(on(sensor('TT-112', 'open'), 'TT-112').every((v) => v === 200)).toBe(true)
    expect(on(sensor('PT-112', 'dead'), 'PT-112').every((v) => v === null)).toBe(true)
    const drift = numbers(on(sensor('PT-112', 'zeroDrift', 0.5, 100), 'PT-112'))
    const sound = numbers(column(heron, scenarioOf({ hours: 0.2, seed: 3, noise: 0.01 }), 'PT-112').slice(190, 350))
    expect(drift.at(-1)! - sound.at(-1)!).toBeCloseTo(0.5, 1)
  })

  it('lets a drifting flow meter keep its reading and the flow err: +5 % on the meter is −5 % in the pipe and in dP about as much', () => {
    const quiet = scenarioOf({ hours: 0.3, seed: 3, noise: 0 })
    const size = 0.05 * numbers(column(heron, quiet, 'FT-101'))[10]!
    const faulty = { ...quiet, events: [{ ...sensor('FT-101', 'zeroStep', size), lastsHours: null } as SimEvent] }
    const end = (s: Scenario, t: string) => numbers(column(heron, s, t)).at(-1)!
    expect(end(faulty, 'FT-101') / end(quiet, 'FT-101')).toBeCloseTo(1, 2)
    const dp = (s: Scenario) => end(s, 'PT-101') - end(s, 'PT-111')
    expect(dp(faulty) / dp(quiet)).toBeLessThan(0.96)
    expect(dp(faulty) / dp(quiet)).toBeGreaterThan(0.88)
  })

  it('heats a reactor by an ignition within seconds of its start and lets it go; the lagging reading shows 70 to 100 % of the truth', () => {
    const event: SimEvent = {
      kind: 'exotherm',
      segment: 'R1',
      what: 'ignition',
      atHours: 0.1,
      amplitudeC: 12,
      lastsS: 60,
      stream: null,
      factor: 1,
    }
    const scenario = scenarioOf({ hours: 0.4, seed: 3, noise: 0, events: [event] })
    const [truth] = truthOf(heron, scenario).exotherms
    const x = numbers(column(heron, scenario, truth!.hottest))
    const height = (Math.max(...x.slice(360, 480)) - x[350]!) / truth!.amplitudeC
    expect(height).toBeGreaterThan(0.7)
    expect(height).toBeLessThan(1 + 0.1 / truth!.amplitudeC)
    expect(Math.abs(x.at(-1)! - x[350]!)).toBeLessThan(0.15)
    expect(Math.abs(x[359]! - x[350]!)).toBeLessThan(0.11)
  })

  it('stops the flow in a hold, names its phases in the log, and ramps down at the end', () => {
    const scenario = scenarioOf({ hours: 0.6, seed: 3, startupMinutes: 8, shutdownMinutes: 5 })
    const rows = [...simulate(heron, scenario)]
    expect([...new Set(rows.map((r) => r.phase))]).toEqual(['hold', 'startup', 'production', 'shutdown'])
    expect(Math.abs(rows[60]!.values[0]!)).toBeLessThan(0.02)
    expect(rows.at(-1)!.values[0]).toBeLessThan(0.5)
    expect(bytes(heron, scenario).split('\n')[1]).toMatch(/,hold$/)
  })

  it('counts the dirt it writes: lines in the file are rows kept plus repeated ones', () => {
    const scenario = scenarioOf({
      hours: 1,
      seed: 3,
      dirt: { jitterMs: 30, missing: 0.01, duplicate: 0.01, outOfOrder: 0.01, broken: 0.01 },
    })
    const log = logText(heron, scenario)
    const lines = [...log.lines()].slice(1)
    const dirty = log.dirty()
    expect(lines).toHaveLength(dirty.rows)
    expect(dirty.rows).toBe(3600 - dirty.missingRows + dirty.duplicateRows)
    const ms = lines.map((l) => Date.parse(l.slice(0, l.indexOf(','))))
    expect(ms.filter((t, i) => i > 0 && t < ms[i - 1]!).length).toBeGreaterThanOrEqual(dirty.outOfOrderRows - dirty.brokenRows)
    expect(
      lines.filter((l) => l.split(',').length !== heron.tags.length + 2 || !/(production)\n$/.test(l)).length,
    ).toBeLessThanOrEqual(2 * dirty.brokenRows)
    expect(dirty.kinds).toEqual(['jitter', 'missing', 'duplicate', 'order', 'ragged'])
  })

  it('gives finite numbers or null in every row of any drawn scenario', () => {
    fc.assert(
      fc.property(fc.constantFrom(...scenarioKinds), fc.integer({ min: 1, max: 1e6 }), (kind, seed) => {
        const scenario = { ...randomScenario(heron, kind, seed), logSeconds: 30 }
        for (const row of simulate(heron, scenario)) for (const v of row.values) expect(v === null || Number.isFinite(v)).toBe(true)
      }),
      { numRuns: 12 },
    )
  })
})
