import { readFileSync } from 'node:fs'
import { expect, it } from 'vitest'
import { layoutOf } from '../../../server/core/derive/layout.ts'
import type { Step } from '../../../server/core/derive/step.ts'
import { planFlush } from '../../../server/core/flush/plan.ts'
import { createPresent } from '../../../server/core/insight/present.ts'
import { checkSkid } from '../../../server/skid/check.ts'

const file = 'fixtures/skids/heron.yaml'
const skid = checkSkid(readFileSync(new URL(`../../../${file}`, import.meta.url), 'utf8'), file).skid!
const layout = layoutOf(skid)
const r1 = layout.segments.findIndex((g) => g.spec.id === 'R1')
/** A step at these flows, kg/h by stream, every thermometer at the same °C. */
const step = (kgH: readonly (number | null)[], tempC: number | null): Step => ({
  tMs: 0,
  stepMs: 30_000,
  seen: 1,
  gapSteps: 0,
  dpPa: [],
  dpVarPa2: [],
  tapPa: [],
  flow: kgH.map((f) => (f === null ? null : f / 3600)),
  tempK: skid.tags.map((t) => (t.quantity === 'temperature' && tempC !== null ? tempC + 273.15 : null)),
  production: 1,
  flush: 0,
})

it('keeps the flows of the baseline for a flush though a deposit has throttled those of now, and the temperatures of now', () => {
  const p = createPresent(layout)
  for (let i = 0; i < 60; i++) p.take(step([6, 2.04, 0.6, 12], -20))
  p.baselined(r1)
  for (let i = 0; i < 40; i++) p.take(step([4, 1.4, 0.4, 12], -18))
  const flush = p.forFlush(r1)
  expect(flush.flows!['A']).toBeCloseTo(6, 9)
  expect(flush.temperatures!['TT-111']).toBeCloseTo(-18, 9)
  expect(p.now()!.flows!['A']).toBeCloseTo(4, 9)
  expect(p.atBaseline(r1)!.temperatures!['TT-190']).toBeCloseTo(-20, 9)
  expect(p.atBaseline(0)).toBeNull()
})

it('a plan from it assumes neither flows nor temperatures', () => {
  const p = createPresent(layout)
  for (let i = 0; i < 60; i++) p.take(step([6, 2.04, 0.6, 12], -20))
  p.baselined(r1)
  const plan = planFlush({ skid, segments: ['R1'], ratios: {}, given: p.forFlush(r1) })
  expect(plan.assumptions.filter((a) => /flow of|no temperature/.test(a))).toEqual([])
  // Without an end to its warm-up from anything but the −20 °C that are read: 25 K at 2 K/min, then the hold.
  expect(plan.steps.find((s) => s.id === 'F2')!.minutes).toBeCloseTo(12.5 + 5 + 1, 6)
})

it('a temperature that moves is that of no working point; one that is missing stays missing; a state read back goes on the same', () => {
  const p = createPresent(layout)
  expect(p.now()).toBeNull()
  for (let i = 0; i < 30; i++) p.take(step([6, null, 0.6, 12], -20 + i))
  expect(p.now()!.temperatures!['TT-111']).toBeNull()
  expect(p.now()!.flows!['B']).toBeNull()
  expect(p.forFlush(r1).temperatures!['TT-111']).not.toBeNull()
  const again = createPresent(layout, JSON.parse(JSON.stringify(p.state)))
  for (const x of [p, again]) x.take(step([6, 2, 0.6, 12], 3))
  expect(again.now()).toEqual(p.now())
})
