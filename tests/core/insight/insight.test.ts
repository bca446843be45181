import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { Occurrence } from '../../../server/core/alarms/occurrence.ts'
import { filmVolumeM3 } from '../../../server/core/deposit/run-length.ts'
import { ratioOfThickness } from '../../../server/core/deposit/thickness.ts'
import { type Given, operationOf } from '../../../server/core/figures/operation.ts'
import { cleanDp } from '../../../server/core/hydraulics/clean-dp.ts'
import { cleanLevel, profileAlong } from '../../../server/core/insight/clean-level.ts'
import { depositInsight } from '../../../server/core/insight/deposit.ts'
import { insightOf } from '../../../server/core/insight/insight.ts'
import { createOutletFlow } from '../../../server/core/insight/outlet-flow.ts'
import { outletOf, outletPath } from '../../../server/core/insight/outlet-path.ts'
import { checkSkid } from '../../../server/skid/check.ts'

const file = 'fixtures/skids/heron.yaml'
const skid = checkSkid(readFileSync(new URL(`../../../${file}`, import.meta.url), 'utf8'), file).skid!
/** The usual rates of the file, precoolers and reactors at −20 °C. */
const given: Given = {
  flows: { A: 6, B: 2.04, C: 0.6, D: 12 },
  temperatures: Object.fromEntries(
    skid.tags.filter((t) => t.quantity === 'temperature').map((t) => [t.tag, /TT-13|TT-191/.test(t.tag) ? 20 : -20]),
  ),
}
const operation = operationOf(skid, given)
const r1 = skid.segments.findIndex((s) => s.id === 'R1')
const op = operation.segments[r1]!
const state = op.fluid!.at(op.tempK)
const clean = cleanDp(op.channel!, op.massFlowKgS!, state.rhoKgM3, state.viscPaS)

describe('the clean level', () => {
  it('of a ΔP 20 % above what the solvents show is ln 1.2 within 0.5 %, shared by the mass of the streams', () => {
    const level = cleanLevel(skid, operation, r1, { dpPa: 1.2 * clean.frictionPa, sigma: 0.005 })!
    expect(level.lnLevel).toBeCloseTo(Math.log(1.2), 2)
    const [a = 0, b = 0, c, d] = level.exponents
    expect(a / b).toBeCloseTo(6 / 2.04, 6)
    expect([c, d]).toEqual([0, 0])
    expect(a + b).toBeGreaterThan(0.5)
    expect(a + b).toBeLessThan(1)
    // Two taps of 0.25 % of 25 bar on this ΔP, and the ratio's own spread.
    expect(level.sd).toBeCloseTo(Math.hypot(0.005, (Math.SQRT2 * 0.0625e5) / (1.2 * clean.frictionPa)), 9)
  })
  it('takes the course along a precooler from its feed at 20 °C: at −19 °C out of a −20 °C bath it is mostly cold', () => {
    const pa = operationOf(skid, { ...given, temperatures: { ...given.temperatures, 'TT-101': -19 } }).segments[0]!
    const course = profileAlong(pa)!.map((k) => k - 273.15)
    expect(course[0]).toBeCloseTo(20, 9)
    expect(course[4]).toBeCloseTo(-19, 9)
    expect(course[2]).toBeCloseTo(-20 + 40 * Math.sqrt(1 / 40), 6)
  })
  it('is null without flow, liquid, channel or temperature', () => {
    const bare = { ...skid, segments: skid.segments.map((s) => ({ ...s, channel: null })) }
    expect(cleanLevel(bare, operationOf(bare, given), r1, { dpPa: 1e5, sigma: 0.005 })).toBeNull()
    expect(cleanLevel(skid, operationOf(skid, { flows: given.flows! }), r1, { dpPa: 1e5, sigma: 0.005 })).toBeNull()
  })
})

describe('a deposit', () => {
  const input = {
    skid,
    op,
    baseline: { dpPa: clean.frictionPa, sigma: 0.005 },
    onset: { atMs: 0, lowMs: -600_000, highMs: 600_000, level: 0.9 },
    nowMs: 36_000_000,
    solidM3S: 1e-10,
  }
  const at = { massFlowKgS: op.massFlowKgS!, rhoKgM3: state.rhoKgM3, viscPaS: state.viscPaS }
  it('of 0.1 mm is found again from its ratio, with the share of the solid that must have stayed by hand', () => {
    const d = depositInsight({ ...input, ratio: ratioOfThickness(op.channel!, at, 1e-4) })!
    const film = d.readings.find((r) => r.kind === 'uniform')!
    expect(film.thicknessMm).toBeCloseTo(0.1, 9)
    expect(film.depositMl).toBeCloseTo(filmVolumeM3(op.channel!, 1e-4) * 1e6, 6)
    expect(d.capture!.share).toBeCloseTo(filmVolumeM3(op.channel!, 1e-4) / (36_000 * 1e-10), 6)
    expect(d.capture!.low).toBeLessThan(d.capture!.share)
    expect(d.capture!.high).toBeGreaterThan(d.capture!.share)
  })
  // SIG-08
  it('carries u of the taps into the interval of the ratio, on what was added only', () => {
    const u = Math.SQRT2 * 0.0025 * 25e5
    for (const ratio of [1.05, 1.5, 3]) {
      const d = depositInsight({ ...input, ratio })!
      expect(d.high - ratio).toBeCloseTo(2 * Math.hypot(0.005, ((ratio - 1) * u) / clean.frictionPa), 9)
    }
  })
  it('names a plugged branch of two where the interval holds it, and nothing at a ratio of 1', () => {
    const kinds = (ratio: number) => depositInsight({ ...input, ratio })!.readings.map((r) => r.kind)
    // In the coil of R1 one of two branches at the same flow shows more than 2: curvature grows with Re.
    const plugged = cleanDp({ ...op.channel!, parallel: 1 }, at.massFlowKgS, at.rhoKgM3, at.viscPaS).frictionPa / clean.frictionPa
    expect(plugged).toBeGreaterThan(2)
    expect(kinds(plugged)).toContain('plugged-branch')
    expect(kinds(1.2)).not.toContain('plugged-branch')
    expect(depositInsight({ ...input, ratio: 1 })).toBeNull()
    expect(depositInsight({ ...input, ratio: 1.2, solidM3S: null })!.capture).toBeNull()
  })
})

describe('the way out', () => {
  it('of R1 is R2 and the quench, counted in flow of the outlet; of the quench nothing follows', () => {
    expect(skid.segments[outletOf(skid, r1)]!.id).toBe('Q1')
    const q1 = skid.segments.length - 1
    expect(outletOf(skid, q1)).toBe(q1)
    const way = outletPath(skid, operation, r1)!
    const out = operation.segments[q1]!.volumeFlowM3S!
    expect(way.through.volume).toBeCloseTo((63.6e-6 * out) / op.volumeFlowM3S!, 12)
    expect(way.path).toHaveLength(2)
    expect(way.path[1]!.volume).toBeCloseTo(147e-6, 12)
    expect(outletPath(skid, operation, q1)!.path).toEqual([])
  })
  it('keeps the volume that left, whatever the flows and gaps, and a stretch without steps is unknown', () => {
    fc.assert(
      fc.property(fc.array(fc.option(fc.integer({ min: 0, max: 9 }), { nil: null }), { minLength: 1, maxLength: 60 }), (flows) => {
        const f = createOutletFlow()
        flows.forEach((q, i) => {
          f.take((i + 1) * 30_000, 30_000, q)
        })
        const s = f.samples()
        const volume = s.slice(0, -1).reduce((v, x, i) => v + ((x.flowM3S ?? 0) * (s[i + 1]!.tMs - x.tMs)) / 1000, 0)
        expect(volume).toBeCloseTo(30 * flows.reduce<number>((a, q) => a + (q ?? 0), 0), 6)
        expect(createOutletFlow(JSON.parse(JSON.stringify(f.state))).samples()).toEqual(s)
      }),
    )
    const gap = createOutletFlow()
    gap.take(30_000, 30_000, 1)
    gap.take(120_000, 30_000, 1)
    expect(gap.samples()).toEqual([
      { tMs: 0, flowM3S: 1 },
      { tMs: 30_000, flowM3S: null },
      { tMs: 90_000, flowM3S: 1 },
      { tMs: 120_000, flowM3S: null },
    ])
  })
  it('stays bounded over a year of 30-s steps and keeps the volume to 1e-9', () => {
    const f = createOutletFlow()
    let volume = 0
    for (let i = 1; i <= 1_051_200; i++) {
      const q = 1 + (i % 7)
      volume += 30 * q
      f.take(i * 30_000, 30_000, q)
    }
    const s = f.samples()
    expect(s.length).toBeLessThan(20_200)
    const kept = s.slice(0, -1).reduce((v, x, i) => v + (x.flowM3S! * (s[i + 1]!.tMs - x.tMs)) / 1000, 0)
    expect(Math.abs(kept / volume - 1)).toBeLessThan(1e-9)
  })
})

describe('the whole picture', () => {
  const known = { baseline: null, ratio: null, growth: null, atBaseline: null }
  const flow = createOutletFlow()
  for (let i = 1; i <= 240; i++) flow.take(i * 30_000, 30_000, 6e-6)
  const alarm: Occurrence = {
    id: 7,
    key: 'exotherm:R1',
    kind: 'exotherm',
    priority: 'high',
    segment: 'R1',
    tag: null,
    raisedMs: 1_800_000,
    clearedMs: 1_920_000,
    value: 3,
    limit: 2,
    unit: 'K',
    message: '',
    cause: null,
    onset: null,
    detector: '',
    evidence: { for: [], against: [], notExcluded: [] },
    configuration: 0,
    annunciated: true,
  }
  const draw = (over: Partial<Parameters<typeof insightOf>[0]> = {}) =>
    insightOf({
      skid,
      nowMs: 7_200_000,
      now: given,
      segments: skid.segments.map(() => known),
      disturbances: [alarm],
      outletFlow: () => flow.samples(),
      ...over,
    })
  // REC-14
  it('dates what an exotherm of two minutes touched at the outlet by volume, and leaves the end open while it stands', () => {
    const [o] = draw().outlet
    expect(Date.parse(o!.from!)).toBeCloseTo(1_800_000 + (o!.firstMl / 6) * 1000, -1)
    expect(Date.parse(o!.to!)).toBeCloseTo(1_920_000 + (o!.lastMl / 6) * 1000, -1)
    expect(o!.divertedMl).toBeCloseTo(720 + o!.lastMl - o!.firstMl, 3)
    expect(o).toMatchObject({ alarm: 7, outlet: 'Q1', epsilon: 0.005, unknownSeconds: 0 })
    expect(draw({ disturbances: [{ ...alarm, clearedMs: null }] }).outlet[0]).toMatchObject({ to: null, divertedMl: null })
  })
  it('draws nothing that is not known: no baseline, no present reading, a liquid out of its range', () => {
    const none = draw({ now: null })
    expect(none.outlet).toEqual([])
    expect(none.streams.every((s) => s.viscosityFactor === null)).toBe(true)
    expect(none.deposits.concat([]).every((d) => d === null)).toBe(true)
    const frozen = { ...given, temperatures: Object.fromEntries(Object.keys(given.temperatures!).map((t) => [t, -190])) }
    expect(draw({ now: frozen }).outlet).toEqual([])
  })
  it('U falls from its clean baseline as a film of 1/U − 1/U0 grows: a precooler 4 K less cold', () => {
    const warm = (t: number): Given => ({ ...given, temperatures: { ...given.temperatures, 'TT-101': t } })
    const pa = { ...known, baseline: { dpPa: 1e5, sigma: 0.005 }, atBaseline: warm(-14) }
    const [heat] = draw({ now: warm(-10), segments: skid.segments.map((_, i) => (i === 0 ? pa : known)) }).heat
    // Heat capacity of the feed rises by 0.7 % between the two.
    expect(Math.abs(heat!.uWM2K / heat!.cleanUWM2K! / (Math.log(40 / 10) / Math.log(40 / 6)) - 1)).toBeLessThan(0.008)
    expect(heat!.foulingM2KW).toBeCloseTo(1 / heat!.uWM2K - 1 / heat!.cleanUWM2K!, 12)
    expect(heat!.low).toBeLessThan(heat!.uWM2K)
    // A quench gives heat of its own that the file does not state: no U from its readings.
    expect(draw({ now: { ...given, temperatures: { ...given.temperatures, 'TT-131': 40, 'TT-132': 30 } } }).heat.at(-1)).toBeNull()
  })
})
