import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { limitBar } from '../../../server/core/sim/nominal.ts'
import { plantOf } from '../../../server/core/sim/plant.ts'
import { processOf } from '../../../server/core/sim/process.ts'
import { randomScenario, scenarioKinds } from '../../../server/core/sim/random-scenario.ts'
import { type Scenario, type SimEvent, scenarioOf } from '../../../server/core/sim/scenario.ts'
import { simulate } from '../../../server/core/sim/simulator.ts'
import { truthOf } from '../../../server/core/sim/truth-of.ts'
import { readTruth } from '../../../server/score/truth-file.ts'
import { heron } from './skids.ts'

const ms = (t: string) => Date.parse(t)
const fouling: SimEvent = {
  kind: 'fouling',
  segment: 'R1',
  law: 'autocatalytic',
  atHours: 0.5,
  hoursToLimit: 1.5,
  localFraction: 0.4,
  sloughs: 0,
}
/** ΔP of a segment by the noise-free plant, stepped to the second asked for. */
function dpAt(scenario: Scenario, segment: string, tMs: number): number {
  const plant = plantOf(heron, scenario)
  const p = processOf(plant, scenario, null)
  for (let t = scenario.fromMs + 1000; t <= tMs; t += 1000) p.step(t, 1)
  return p.dpPa[plant.segments.findIndex((s) => s.spec.id === segment)]! / 1e5
}

describe('the truth of a simulated run', () => {
  const scenario = scenarioOf({
    hours: 2.5,
    seed: 21,
    category: 'fouling',
    events: [fouling, { kind: 'flowStep', atHours: 1.2, factor: 1.08 }],
  })
  const truth = truthOf(heron, scenario)
  const [growth] = truth.fouling

  it('puts limitAt where the noise-free dP crosses dpHighBar: under it 20 s before, over it 20 s after, a flow step on the way', () => {
    expect(growth!.limitReached).toBe(true)
    expect(growth!.dpHighBar).toBe(6)
    expect(dpAt(scenario, 'R1', ms(growth!.limitAt) - 20_000)).toBeLessThan(6)
    expect(dpAt(scenario, 'R1', ms(growth!.limitAt) + 20_000)).toBeGreaterThan(6)
  })

  it('is what the readings show: the mean dP over a minute around limitAt is dpHighBar within 2 %', () => {
    const [up, down] = ['PT-111', 'PT-112'].map((t) => heron.tags.findIndex((x) => x.tag === t))
    const around = [...simulate(heron, scenario)]
      .filter((r) => Math.abs(r.tMs - ms(growth!.limitAt)) <= 30_000)
      .map((r) => r.values[up!]! - r.values[down!]!)
    const mean = around.reduce((a, b) => a + b, 0) / around.length
    expect(Math.abs(mean / 6 - 1)).toBeLessThan(0.02)
  })

  it('holds flow and temperature for limitAtHeld: the same as limitAt after the step, later before it (less flow, less dP)', () => {
    const [early, , late] = growth!.checkpoints
    expect(Math.abs(ms(late!.limitAtHeld!) - ms(growth!.limitAt))).toBeLessThanOrEqual(15_000)
    expect(ms(early!.at)).toBeLessThan(scenario.fromMs + 1.2 * 3_600_000)
    expect(ms(early!.limitAtHeld!)).toBeGreaterThan(ms(growth!.limitAt) + 30_000)
  })

  it('begins at ratio 1 at the onset and samples the same ratio every 10 min as its trajectory', () => {
    expect(growth!.trajectory[0]).toEqual([0, 1])
    const at = ms(growth!.onset) - ms(truth.from) + 3_600_000
    const sample = truth.ratio.segments['R1']![at / 600_000]
    const [, near] = growth!.trajectory.reduce((a, b) => (Math.abs(b[0] - 3600) < Math.abs(a[0] - 3600) ? b : a))
    expect(Math.abs(sample! / near - 1)).toBeLessThan(0.02)
    expect(truth.ratio.segments['R2']!.every((r) => r === 1)).toBe(true)
  })

  it('takes the growth out of the time in control, and a filter loading not', () => {
    expect(truth.inControl).toEqual([{ from: truth.from, to: growth!.onset }])
    expect(truth.inControlHours).toBe(0.5)
    const filters = { ...heron, segments: heron.segments.map((s) => (s.id === 'Q1' ? { ...s, kind: 'filter' as const } : s)) }
    const loaded = truthOf(filters, { ...scenario, events: [{ ...fouling, segment: 'Q1' } as SimEvent] })
    expect(loaded.fouling[0]!.cause).toBe('filter')
    expect(loaded.inControlHours).toBe(2.5)
  })

  it('marks a limit that the flush came before as not reached, later than the end of the growth', () => {
    const flushed = truthOf(heron, {
      ...scenario,
      events: [fouling, { kind: 'flush', atHours: 1.5, minutes: 20, recovery: 0.9, startupMinutes: 8 }],
    })
    const [first] = flushed.fouling
    expect(first).toMatchObject({ endedBy: 'flush', limitReached: false })
    expect(ms(first!.limitAt)).toBeGreaterThan(ms(first!.end))
    expect(first!.ratioAfterFlush).toBeCloseTo(1 + (first!.ratioMax - 1) * 0.1, 3)
    expect(flushed.phases.map((p) => p.phase)).toEqual(['production', 'flush', 'startup', 'production'])
  })

  it('hides nothing in the noise: the truth is the same whatever the noise of the readings, but for how ragged the growth is', () => {
    expect(truthOf(heron, { ...scenario, noise: 2 }).fouling).toEqual(truth.fouling)
  })

  it('is whole for any drawn scenario: readable, times in order, trajectories that fit, hours that add up', () => {
    fc.assert(
      fc.property(fc.constantFrom(...scenarioKinds), fc.integer({ min: 1, max: 1e6 }), (kind, seed) => {
        const drawn = randomScenario(heron, kind, seed)
        expect(randomScenario(heron, kind, seed)).toEqual(drawn)
        const t = truthOf(heron, drawn)
        expect(readTruth(JSON.stringify(t), 't.json')).toEqual(t)
        t.phases.forEach((p, i) => {
          expect(p.from).toBe(i === 0 ? t.from : t.phases[i - 1]!.to)
        })
        expect(t.phases.at(-1)!.to).toBe(t.to)
        expect(t.inControlHours).toBeLessThanOrEqual(t.productionHours)
        for (const f of t.fouling) {
          expect(f.ratioAtOnset).toBeCloseTo(f.trajectory[0]![1], 3)
          expect(f.limitReached).toBe(ms(f.limitAt) <= ms(f.end))
          const limit = limitBar(plantOf(heron, drawn), f.segment)
          expect(f.dpHighBar).toBeCloseTo(limit, 3)
          f.trajectory.forEach(([s], i) => {
            if (i > 0) expect(s).toBeGreaterThan(f.trajectory[i - 1]![0])
          })
          for (const c of f.checkpoints) if (c.limitAtHeld !== null) expect(ms(c.limitAtHeld)).toBeGreaterThanOrEqual(ms(c.at))
        }
        for (const e of t.exotherms) expect(ms(e.start)).toBeLessThan(ms(e.peakAt))
      }),
      { numRuns: 30 },
    )
  })
})
