import { describe, expect, it } from 'vitest'
import { commissioningOf, createCommissioning } from '../../../server/core/baseline/commission.ts'
import { type CommissionedSegment, type CriterionId, knowledgeOf } from '../../../server/core/baseline/record.ts'
import { layoutOf } from '../../../server/core/derive/layout.ts'
import { scenarioOf } from '../../../server/core/sim/scenario.ts'
import { simulatedBlocks } from '../../helpers/simulated-blocks.ts'
import { heron } from '../../helpers/skids.ts'
import { duo, duoSkid, type StepTest, startMs, stepMs, stepsOf, thf } from './world.ts'

const good: StepTest = { plan: [[20, 0], [20, 3], [20, 4.5], [20, 6], [20, 3]] } // biome-ignore format: a table
const judged = (test: StepTest, i = 0): CommissionedSegment => commissioningOf(duo, stepsOf(test)).segments[i]!
const of = (s: CommissionedSegment, id: CriterionId) => s.criteria.find((c) => c.id === id)!

describe('a good step test', () => {
  // FOU-02
  it('gives the exponent it was made with, 1.0 to 1.9, within its 95 % interval in at least 54 of 60, narrower than ± 0.05', () => {
    let inside = 0
    let of60 = 0
    for (const n of [1, 1.15, 1.3, 1.5, 1.75, 1.9])
      for (let seed = 1; seed <= 10; seed++) {
        const s = judged({ ...good, n, seed })
        of60++
        expect(of(s, 'exponent').verdict, `${n}: ${of(s, 'exponent').reason}`).toBe('accepted')
        expect(s.exponent!.high - s.exponent!.low).toBeLessThan(0.1)
        if (s.exponent!.low <= n && n <= s.exponent!.high) inside++
      }
    expect(of60).toBe(60)
    expect(inside).toBeGreaterThanOrEqual(54)
  })

  // SIG-08
  it('finds a zero of 40 mbar within 1 mbar and takes it off: the exponent stays 1.3 within 0.03, where without a standstill it would be 1.23', () => {
    const s = judged({ ...good, zeroPa: 4000 })
    expect(s.zero!.mbar).toBeCloseTo(40, 0)
    expect(s.zero!.sdMbar).toBeLessThan(1)
    expect(of(s, 'zero').verdict).toBe('accepted')
    expect(s.exponent!.n).toBeGreaterThan(1.27)
    expect(s.exponent!.n).toBeLessThan(1.33)
    const blind = judged({ ...good, plan: good.plan.slice(1), zeroPa: 4000 })
    expect(of(blind, 'zero')).toMatchObject({ verdict: 'not enough data' })
    expect(blind.exponent!.n).toBeLessThan(1.29)
    // And it says so: the doubt about the zero is in the interval.
    expect(blind.exponent!.high).toBeGreaterThan(1.3)
    expect(of(blind, 'exponent').verdict).not.toBe('accepted')
  })

  it('finds its stretches: four levels of 17 steps each from the fourth step on, at the flows held', () => {
    const s = judged(good)
    expect(s.levels.map((l) => l.steps)).toEqual([17, 17, 17, 17])
    expect(s.levels.map((l) => Math.round((l.flowMlMin / s.levels[0]!.flowMlMin) * 100) / 100)).toEqual([1, 1.5, 2, 1])
    expect(s.levels[0]!.from).toBe(new Date(startMs + 23 * stepMs).toISOString())
    expect(s.levels[0]!.to).toBe(new Date(startMs + 40 * stepMs).toISOString())
    expect(s.zero!.steps).toBe(17)
    expect(s.criteria.map((c) => c.verdict)).toEqual(['accepted', 'accepted', 'accepted', 'accepted', 'accepted'])
    expect(s.verdict).toBe('accepted')
  })

  it('compares levels at different temperatures: −60 to −48 °C between them, n still 1.3 within 0.03', () => {
    const s = judged({ ...good, tempC: (k) => [-60, -60, -56, -52, -48][Math.floor(k / 20)]! })
    expect(s.levels).toHaveLength(4)
    expect(Math.abs(s.exponent!.n - 1.3)).toBeLessThan(0.03)
  })

  it('splits ΔP into its two terms: n = 1 is all of the first, n = 2 all of the second, 1.3 is 60 to 80 % of the first', () => {
    expect(judged({ ...good, n: 1 }).twoTerms!.linearShare).toBeGreaterThan(0.97)
    expect(judged({ ...good, n: 1.99 }).twoTerms!.linearShare).toBeLessThan(0.03)
    const { linearShare, a, b } = judged(good).twoTerms!
    expect(linearShare).toBeGreaterThan(0.6)
    expect(linearShare).toBeLessThan(0.8)
    expect(Math.min(a, b)).toBeGreaterThan(0)
  })

  it('takes the head of a standing column for what it is: 1 m of THF at −60 °C, 95 mbar, is no zero', () => {
    const up = layoutOf({
      ...duoSkid,
      segments: duoSkid.segments.map((g, i) => (i === 0 ? { ...g, channel: { ...g.channel!, heightM: 1 } } : g)),
    })
    const headPa = thf.rhoKgM3(213.15) * 9.80665
    expect(headPa).toBeGreaterThan(9000)
    const s = commissioningOf(up, stepsOf({ ...good, headPa: headPa }, up)).segments[0]!
    expect(Math.abs(s.zero!.mbar)).toBeLessThan(1)
    expect(Math.abs(s.exponent!.n - 1.3)).toBeLessThan(0.03)
  })

  it('flags flow between laminar and turbulent, and says when no flow was visited twice', () => {
    const s = judged({ ...good, plan: good.plan.slice(0, 4), tempC: () => 20 }, 1)
    expect(of(s, 'exponent').reason).toMatch(/between laminar and turbulent/)
    expect(of(s, 'exponent').verdict).toBe('not enough data')
    expect(s.reynolds!.transitional).toBe(true)
    expect(s.cautions.join()).toMatch(/2000 to 4000/)
    expect(s.cautions.join()).toMatch(/visited twice/)
    expect(judged(good).reynolds!.transitional).toBe(false)
    expect(judged(good).cautions.join()).not.toMatch(/visited twice/)
  })

  it('hands on only what was accepted: zero in Pa and how far n lies above the hydraulics, that and the hydraulics being n', () => {
    const record = commissioningOf(duo, stepsOf({ ...good, n: 1.6, zeroPa: 4000 }))
    const [s1] = knowledgeOf(record, duoSkid)
    expect(s1!.zeroPa! / 4000).toBeCloseTo(1, 1)
    expect(s1!.flowExponent!.sd).toBeLessThan(0.03)
    const drifting = commissioningOf(duo, stepsOf({ ...good, zeroPa: 40_000, driftPerHour: 0.2 }))
    expect(knowledgeOf(drifting, duoSkid)[0]).toEqual({ segment: 'S1', zeroPa: null, flowExponent: null })
    expect(knowledgeOf({ ...record, segments: [{ ...record.segments[0]!, segment: 'S9' }] }, duoSkid)).toEqual([])
  })
})

describe('a bad step test is not accepted, and says why', () => {
  it('too short: levels of 8 steps are none', () => {
    const s = judged({ plan: [[20, 0], [11, 3], [11, 4.5], [11, 6]] }) // biome-ignore format: a table
    expect(s.levels).toEqual([])
    expect(of(s, 'levels')).toMatchObject({ verdict: 'not enough data' })
    expect(of(s, 'levels').reason).toMatch(/0 steady flows.*had 8/)
    expect(s.verdict).toBe('not enough data')
    expect(s.exponent).toBeNull()
  })

  it('one flow only, or three within 20 %', () => {
    const one = judged({ plan: [[20, 0], [60, 6]] }) // biome-ignore format: a table
    expect(of(one, 'levels').reason).toMatch(/1 steady flow of/)
    expect(one.verdict).toBe('not enough data')
    const near = judged({ plan: [[20, 0], [20, 5], [20, 5.5], [20, 6]] }) // biome-ignore format: a table
    expect(of(near, 'levels')).toMatchObject({ verdict: 'not enough data' })
    expect(of(near, 'levels').reason).toMatch(/1\.20 times/)
  })

  it('drifting by 10 % an hour: not steady, whatever the exponent says; its neighbour is', () => {
    const test = { ...good, driftPerHour: 0.1 }
    expect(of(judged(test), 'steady')).toMatchObject({ verdict: 'not accepted' })
    expect(judged(test).verdict).toBe('not accepted')
    expect(of(judged(test, 1), 'steady').verdict).toBe('accepted')
  })

  it('a slower drift shows where the first flow is visited again: 3 % an hour apart', () => {
    const s = judged({ ...good, plan: [[20, 0], [30, 3], [30, 4.5], [30, 6], [30, 3]], driftPerHour: 0.03 }) // biome-ignore format: a table
    expect(of(s, 'steady').verdict).toBe('not accepted')
  })

  it('a zero of 0.5 bar on two 0.25 % gauges of 25 bar: beyond 3 u, 265 mbar', () => {
    const s = judged({ ...good, zeroPa: 50_000 })
    expect(of(s, 'zero')).toMatchObject({ verdict: 'not accepted' })
    expect(of(s, 'zero').reason).toMatch(/500\.\d mbar.*265 mbar/)
  })

  it('an exponent of 2.4, or of 0.6, is no flow: the value is held to its bounds and refused', () => {
    const high = judged({ ...good, n: 2.4 })
    expect(of(high, 'exponent')).toMatchObject({ verdict: 'not accepted' })
    expect(high.exponent!.n).toBe(2)
    const low = judged({ ...good, n: 0.6 })
    expect(of(low, 'exponent')).toMatchObject({ verdict: 'not accepted' })
    expect(low.exponent!.n).toBe(1)
  })

  it('so noisy that the hydraulics know better: not enough data', () => {
    const s = judged({ ...good, noisePa: 15_000, seed: 3 })
    expect(of(s, 'exponent').verdict).not.toBe('accepted')
  })

  it('nothing at all: every criterion says so', () => {
    const s = commissioningOf(duo, []).segments[0]!
    expect(s.criteria.every((c) => c.verdict === 'not enough data')).toBe(true)
    expect(s).toMatchObject({
      verdict: 'not enough data',
      zero: null,
      exponent: null,
      twoTerms: null,
      hydraulics: null,
      ratio: null,
    })
  })
})

describe('on the simulated skid, readings at 1 s with all their disturbances', () => {
  const scenario = scenarioOf({
    hours: 2.2,
    seed: 7,
    shutdownMinutes: 36,
    events: [
      { kind: 'flowStep', atHours: 0.4, factor: 0.8 },
      { kind: 'flowStep', atHours: 0.8, factor: 0.75 },
      { kind: 'flowStep', atHours: 1.2, factor: 1 / 0.6 },
    ],
  })
  const skid = heron()
  const commissioning = createCommissioning(skid)
  for (const block of simulatedBlocks(skid, scenario)) commissioning.rows(block)
  const record = commissioning.finish()

  it('finds three flows, one of them twice, a standstill of 9 min and no growth in both reactors; exponents of coils, 1.2 to 1.8, with an sd below 0.05', () => {
    for (const id of ['R1', 'R2']) {
      const s = record.segments.find((x) => x.segment === id)!
      expect(of(s, 'levels').verdict, of(s, 'levels').reason).toBe('accepted')
      expect(of(s, 'steady').verdict, of(s, 'steady').reason).toBe('accepted')
      expect(of(s, 'exponent').verdict, of(s, 'exponent').reason).toBe('accepted')
      expect(s.exponent!.n).toBeGreaterThan(1.2)
      expect(s.exponent!.n).toBeLessThan(1.8)
      expect(of(s, 'hydraulics').verdict).toBe('accepted')
      expect(s.verdict).toBe('accepted')
      expect(s.zero!.steps).toBeGreaterThanOrEqual(16)
    }
  })

  it('is the same record however the rows are cut, and survives JSON', () => {
    const again = createCommissioning(skid)
    for (const block of simulatedBlocks(skid, scenario, 77)) again.rows(block)
    expect(again.finish()).toEqual(record)
    expect(JSON.parse(JSON.stringify(record))).toEqual(record)
  })
})
