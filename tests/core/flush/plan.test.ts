import fc from 'fast-check'
import { expect, it } from 'vitest'
import { MonitorError } from '../../../server/core/errors.ts'
import { fluidOf } from '../../../server/core/fluids/fluid.ts'
import { type FlushInput, flushDefaults } from '../../../server/core/flush/input.ts'
import { waterShareLeft } from '../../../server/core/flush/liquids.ts'
import { planFlush } from '../../../server/core/flush/plan.ts'
import { planText } from '../../../server/core/flush/plan-text.ts'
import type { FlushPlan } from '../../../server/core/report.ts'
import { type Rtd, residual } from '../../../server/core/rtd/rtd.ts'
import { changed, heron, usual } from './heron.ts'

const num = (min: number, max: number) => fc.double({ min, max, noNaN: true })
const r1 = (more: Partial<FlushInput> = {}): FlushPlan =>
  planFlush({ skid: heron, segments: ['R1'], ratios: { R1: 1.5 }, given: usual, ...more })
const step = (plan: FlushPlan, id: string) => {
  const found = plan.steps.find((s) => s.id === id)
  if (found === undefined) throw new Error(`no step ${id}`)
  return found
}

it('takes about an hour for the demo skid at ratio 1.5 (common practice: 45 to 90 min), and it is computed: faster warming, smaller volumes, less time', () => {
  const whole = r1().totalMinutes ?? Number.NaN
  expect(whole).toBeGreaterThan(45)
  expect(whole).toBeLessThan(90)
  const faster = r1({ skid: changed(() => ({ warmUpKPerMin: 4 })) }).totalMinutes ?? Number.NaN
  // warm-up from the coolant's -24 °C and cooling back to R1's -18 °C: 29/2 - 29/4 and 24/2 - 24/4 (PA at -19 °C)
  expect(whole - faster).toBeCloseTo(29 / 4 + 24 / 4, 6)
  expect(r1({ skid: changed((s) => ({ volumeMl: (s.volumeMl ?? 0) / 2 })) }).totalMinutes).toBeLessThan(whole)
})

it('asks seven steps, F0 to F6 in order, each with hold points, an end, criteria and hazards; figures are sums of their parts', () => {
  const plan = r1()
  expect(plan.steps.map((s) => s.id)).toEqual(['F0', 'F1', 'F2', 'F3', 'F4', 'F5', 'F6'])
  for (const s of plan.steps)
    expect([
      s.holdPoints.length > 0,
      s.endsWhen.length > 0,
      s.criteria.length > 0,
      s.hazards.length > 0,
      s.basis.length > 0,
    ]).toEqual([true, true, true, true, true])
  expect(plan.steps.reduce((a, s) => a + (s.minutes ?? Number.NaN), 0)).toBeCloseTo(plan.totalMinutes ?? 0, 9)
  expect(plan.missing).toEqual([])
  const f4 = step(plan, 'F4')
  expect(f4.minutes).toBeCloseTo(
    (f4.volumeMl ?? 0) / (f4.flowMlMin ?? 0) + 2 * flushDefaults.karlFischerMinutes + flushDefaults.confirmMinutes,
    9,
  )
})

it('keeps every predicted pressure drop of water within 60 % of dpHigh, tight or at normal flow, for any ratios 1 to 30', () => {
  const normal =
    planFlush({ skid: heron, segments: ['R1'], given: usual, settings: { dpShare: 0.999 } }).waterReference.find(
      (r) => r.segment === 'R2',
    )?.flowMlMin ?? 0
  fc.assert(
    fc.property(num(1, 30), num(1, 5), num(1, 3), (a, b, c) => {
      const plan = r1({ ratios: { R1: a, R2: b, PA: c } })
      let tightest = 0
      for (const w of plan.waterReference) {
        const share = w.predictedDpBar / (w.dpHighBar ?? 0)
        expect(share).toBeLessThanOrEqual(0.6 + 1e-9)
        tightest = Math.max(tightest, share)
        expect(w.predictedDpBar).toBeCloseTo(w.cleanDpBar * w.ratio, 9)
      }
      const flow = step(plan, 'F3').flowMlMin ?? 0
      expect(Math.abs(tightest - 0.6) < 1e-9 || Math.abs(flow - normal) < 1e-6 * normal).toBe(true)
      expect(flow).toBeLessThanOrEqual(normal * (1 + 1e-9))
    }),
    { numRuns: 40 },
  )
})

it('slows the water as the ratio rises, never speeds it up, and asks more of it', () => {
  const plans = [1, 1.3, 2, 4, 8].map((r) => r1({ ratios: { R1: r } }))
  const flows = plans.map((p) => step(p, 'F3').flowMlMin ?? 0)
  const volumes = plans.map((p) => step(p, 'F3').volumeMl ?? 0)
  expect([...flows].sort((a, b) => b - a)).toEqual(flows)
  expect(flows[4]).toBeLessThan((flows[0] ?? 0) / 2)
  expect([...volumes].sort((a, b) => a - b)).toEqual(volumes)
})

/** Residual of vessels in series after a volume, by direct numerical convolution on a fine grid (independent of the plan's own). */
function leftAfter(vessels: readonly { readonly rtd: Rtd; readonly volume: number }[], after: number): number {
  const n = 1500
  const h = after / n
  let density: number[] | null = null
  for (const v of vessels) {
    const own = Array.from({ length: n }, (_, i) => residual(v.rtd, (i * h) / v.volume) - residual(v.rtd, ((i + 1) * h) / v.volume))
    const before: number[] | null = density
    density =
      before === null
        ? own
        : own.map((_, k) =>
            own
              .slice(0, k + 1)
              .reduce((a, m, j) => a + m * ((before[k - j] ?? 0) + (j < k ? (before[k - j - 1] ?? 0) : 0)) * 0.5, 0),
          )
  }
  return 1 - (density ?? []).reduce((a, m) => a + m, 0)
}

it.each(['tanks', 'coils with diffusion'])(
  'F1, F4 and F6 volumes leave the stated share by direct convolution of the path, within 0.02 (drying 0.04) of it, for %s',
  (models) => {
    const tanks = (n: number): Rtd => (models === 'tanks' ? { kind: 'tanks', n } : { kind: 'coil', beta: 0.01 * n })
    const rtd: Record<string, Rtd> = { PA: tanks(3), PB: tanks(3), PC: tanks(3), R1: tanks(4), R2: tanks(2) }
    const plan = r1({ settings: { rtd } })
    const litre = (solvent: string) => fluidOf({ kind: 'solvent', solvent }).at(293.15).rhoKgM3 / 1000
    const flows = { A: 6 / litre('tetrahydrofuran'), B: 2.04 / litre('hexane'), C: 0.6 / litre('dimethylformamide') }
    const total = flows.A + flows.B + flows.C
    const way = (first: 'PA' | 'PB', volumeMl: number, flow: number) => [
      { rtd: rtd[first] as Rtd, volume: (volumeMl * total) / flow },
      { rtd: rtd['R1'] as Rtd, volume: (63.6 * total) / (flows.A + flows.B) },
      { rtd: rtd['R2'] as Rtd, volume: 35.3 },
    ]
    // the slower of the two feeds decides
    const worst = (volumeMl: number) =>
      Math.max(leftAfter(way('PA', 3.9, flows.A), volumeMl), leftAfter(way('PB', 2, flows.B), volumeMl))
    for (const [id, share] of [
      ['F1', 1e-3],
      ['F6', 0.005],
    ] as const)
      expect(Math.abs(worst(step(plan, id).volumeMl ?? 0) / share - 1)).toBeLessThan(0.02)
    // drying: what is left by volume, as mass fraction, makes up the 50 ppm between solvent and limit
    const left = worst(step(plan, 'F4').volumeMl ?? 0)
    const ppm = (1e6 * left * 1000) / (left * 1000 + (1 - left) * 904)
    expect(Math.abs(ppm / 50 - 1)).toBeLessThan(0.04)
  },
)

it('turns a ppm limit into a volume share that mixes back to it exactly, and refuses a solvent as wet as the limit', () => {
  fc.assert(
    fc.property(num(51, 5000), num(700, 1100), (limit, rho) => {
      const x = waterShareLeft(limit, 50, 998, rho)
      expect((1e6 * x * 998) / (x * 998 + (1 - x) * rho)).toBeCloseTo(limit - 50, 6)
    }),
  )
  expect(() => waterShareLeft(50, 50, 998, 889)).toThrow(MonitorError)
})

it('enforces miscibility: hexane, toluene and 2-methyltetrahydrofuran are refused, acetonitrile only for F1, dioxane would freeze', () => {
  const asked = (solvent: string, where: 'displacementSolvent' | 'dryingSolvent') => () => r1({ settings: { [where]: solvent } })
  for (const solvent of ['hexane', 'toluene', '2-MeTHF', 'MTBE', 'DCM', 'brine']) {
    expect(asked(solvent, 'displacementSolvent')).toThrow(MonitorError)
    expect(asked(solvent, 'dryingSolvent')).toThrow(MonitorError)
  }
  expect(asked('acetonitrile', 'displacementSolvent')).toThrow(/reacts/)
  expect(asked('1,4-dioxane', 'dryingSolvent')).toThrow(/freezes at 12 °C/)
  expect(step(r1({ settings: { dryingSolvent: 'DME' } }), 'F4').liquid).toBe('dry dimethoxyethane')
  expect(step(r1(), 'F1').liquid).toBe('dry tetrahydrofuran')
})

// PRO-12
it('counts the inventory by hand: 63.6 mL of R1 hold 45.7 mmol hexyllithium, 11 kJ against water, 7.0 kJ of its own reaction', () => {
  // 6 kg/h / 0.887 + 2.04 kg/h / 0.660 = 6.764 + 3.091 L/h; 0.0636 L · 2.3 mol/L · 3.091/9.855
  const inventory = r1().inventory.find((i) => i.segment === 'R1')
  expect(inventory?.reagents.find((r) => r.stream === 'B')?.mol).toBeCloseTo(0.0459, 3)
  expect(inventory?.hydrolysisKJ).toBeCloseTo(0.0459 * 240, 0)
  expect(inventory?.reactionKJ).toBeCloseTo(0.0636 * (6.764 / 9.855) * 160, 1)
  expect(r1().inventory.map((i) => i.segment)).toEqual(['PA', 'PB', 'R1', 'PC', 'R2'])
  // a thousandth of 4.6 + 45.9 + 23.9 mmol
  expect(step(r1(), 'F1').basis.join(' ')).toMatch(/leaves at most 0\.07\d mmol of 74\.\d mmol organolithium/)
})

it('names parallel branches in F1 and F3, back-flow and the quench order in F1, blocked-in liquid in F2, ice in F5', () => {
  const plan = r1()
  for (const id of ['F1', 'F3'])
    expect(step(plan, id).hazards.join(' ')).toMatch(/Parallel branches in PA \(2\), R1 \(2\), R2 \(2\).*plugged branch/)
  expect(step(plan, 'F1').hazards.join(' ')).toMatch(/Back-flow/)
  expect(step(plan, 'F1').criteria.map((c) => c.id)).toContain('quench-isolated')
  expect(step(plan, 'F2').hazards.join(' ')).toMatch(/Never close both ends/)
  expect(step(plan, 'F5').hazards.join(' ')).toMatch(/ice/)
  const single = r1({ skid: changed((s) => ({ channel: s.channel === null ? null : { ...s.channel, parallel: 1 } })) })
  expect(step(single, 'F1').hazards.join(' ')).not.toMatch(/Parallel/)
})

it('warms from the coldest place, the coolant at -24 °C: 29 K at 2 K/min, 5 min hold; 2 K/min is said to be assumed when the file is silent', () => {
  expect(step(r1(), 'F2').minutes).toBeCloseTo(29 / 2 + 5 + 1, 9)
  const silent = step(r1({ skid: changed(() => ({ warmUpKPerMin: null }), 'R1') }), 'F2')
  expect(silent.basis.join(' ')).toMatch(/R1: warm-up rate not given, 2 K\/min assumed/)
})

// PRO-08
it('advises no flush but to escalate when hardly any flow fits under the limit (ratio 200)', () => {
  const plan = r1({ ratios: { R1: 200 } })
  expect(plan.refused.map((r) => r.step)).toEqual(['F1'])
  expect(plan.refused[0]?.reason).toMatch(/stop feeds, make safe, isolate, escalate/)
  expect(r1().refused).toEqual([])
})

it('stays whole in form without geometry, limits, flows or reagents: nulls, and what is needed', () => {
  const bare = {
    ...heron,
    tags: heron.tags.map((t) => ({ ...t, range: null })),
    streams: heron.streams.map((s) => ({ ...s, fluid: null, reagent: null, waterPpm: null })),
    segments: heron.segments.map((s) => ({
      ...s,
      channel: null,
      volumeMl: null,
      warmUpKPerMin: null,
      temperatures: [],
      coolantTemperature: null,
      reaction: null,
      limits: Object.fromEntries(Object.keys(s.limits).map((k) => [k, null])) as unknown as typeof s.limits,
    })),
  }
  const plan = planFlush({ skid: bare, segments: ['R1'] })
  expect(plan.steps.map((s) => s.id)).toEqual(['F0', 'F1', 'F2', 'F3', 'F4', 'F5', 'F6'])
  for (const id of ['F1', 'F3', 'F4'])
    expect([step(plan, id).flowMlMin, step(plan, id).volumeMl, step(plan, id).minutes]).toEqual([null, null, null])
  expect(plan.totalMinutes).toBeNull()
  expect(plan.missing.join('\n')).toMatch(/needs the flow/)
  expect(planText(plan)).toMatch(/not computed/)
  expect(JSON.stringify(plan)).not.toMatch(/NaN|Infinity|undefined/)
})

it('names channel and limit of the asked segment as needed before it gives a water flow', () => {
  const plan = r1({ skid: changed((s) => ({ limits: { ...s.limits, dpHighBar: null } }), 'R1') })
  expect(step(plan, 'F3').flowMlMin).toBeNull()
  expect(plan.missing.join('\n')).toMatch(/R1: predicted pressure drop against its limit, needs limits.dpHighBar/)
})

it('does not care about units: flows in g/min and ranges in mbar give the same plan', () => {
  const grams = {
    ...heron,
    tags: heron.tags.map((t) => (t.quantity === 'massFlow' ? { ...t, unit: 'g/min' as const } : t)),
    segments: heron.segments.map((s) => ({ ...s, limits: { ...s.limits, flowLow: (s.limits.flowLow ?? 0) * (1000 / 60) } })),
  }
  const flows = Object.fromEntries(Object.entries(usual.flows).map(([k, v]) => [k, (v * 1000) / 60]))
  const a = r1()
  const b = r1({ skid: grams, given: { ...usual, flows } })
  for (const [i, s] of a.steps.entries()) {
    expect((b.steps[i]?.flowMlMin ?? 0) - (s.flowMlMin ?? 0)).toBeCloseTo(0, 6)
    expect((b.steps[i]?.volumeMl ?? 0) - (s.volumeMl ?? 0)).toBeCloseTo(0, 4)
  }
})

// PRO-34
it('is plain JSON, the same twice, and words everything as advice: no command, no permission', () => {
  const plan = r1()
  expect(JSON.parse(JSON.stringify(plan))).toEqual(plan)
  expect(r1()).toEqual(plan)
  const text = planText(plan)
  expect(text).toMatch(/Advisory only/)
  expect(text).not.toMatch(/\b(must|shall|permitted|allowed to|safe to|go ahead|you may|proceed)\b/i)
})

it('takes a stopped pump for an unknown normal flow, not for none: the flush flow stands', () => {
  const plan = r1({ given: { ...usual, flows: { A: 0, B: 0, C: 0, D: 0 } } })
  expect(step(plan, 'F1').flowMlMin ?? 0).toBeGreaterThan(10)
  expect(plan.assumptions.join('\n')).toMatch(/flow of A not given/)
})

it('refuses a segment the skid has not, and settings that make no sense', () => {
  expect(() => planFlush({ skid: heron, segments: ['R7'] })).toThrow(MonitorError)
  expect(() => planFlush({ skid: heron, segments: [] })).toThrow(MonitorError)
  expect(() => r1({ settings: { warmC: 0 } })).toThrow(MonitorError)
  expect(() => r1({ settings: { dpShare: 1.2 } })).toThrow(MonitorError)
})
