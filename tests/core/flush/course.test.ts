import fc from 'fast-check'
import { expect, it } from 'vitest'
import { type Acceptance, nextStep, openPoints } from '../../../server/core/flush/course.ts'
import { planFlush } from '../../../server/core/flush/plan.ts'
import type { FlushPlan } from '../../../server/core/report.ts'
import { heron, usual } from './heron.ts'

const plan = planFlush({ skid: heron, segments: ['R1'], ratios: { R1: 1.5 }, given: usual })
const met = (step: string, criterion: string, more: Partial<Acceptance> = {}): Acceptance => ({
  step,
  criterion,
  verdict: 'met',
  value: 1,
  source: 'panel',
  quality: 'good',
  person: 'operator 1',
  tMs: 1,
  reason: null,
  ...more,
})
const all = (ids: readonly string[], more: Partial<Acceptance> = {}) =>
  plan.steps.filter((s) => ids.includes(s.id)).flatMap((s) => s.criteria.map((c) => met(s.id, c.id, more)))

it('walks F0 to F6 when every criterion is met, and is then done', () => {
  const ids = plan.steps.map((s) => s.id)
  for (let n = 0; n < ids.length; n++) expect(nextStep(plan, all(ids.slice(0, n))).step?.id).toBe(ids[n])
  const end = nextStep(plan, all(ids))
  expect([end.step, end.done, end.refused]).toEqual([null, true, []])
})

// PRO-10
it('refuses water with the reason while one criterion of F1 or F2 is open, whatever else is accepted', () => {
  for (const id of ['F1', 'F2']) {
    for (const c of plan.steps.find((s) => s.id === id)?.criteria ?? []) {
      const accepted = all(['F0', 'F1', 'F2', 'F3', 'F4', 'F5', 'F6']).filter((a) => a.criterion !== c.id || a.step !== id)
      const next = nextStep(plan, accepted)
      expect(next.step?.id).toBe(id)
      expect(next.refused.find((r) => r.step === 'F3')?.reason).toContain(`${c.id}: no result`)
    }
  }
})

// PRO-10
it('counts missing values, uncertain quality, no person and a skip as not accepted in F1; a reasoned skip passes only in a soft step', () => {
  const bad: Partial<Acceptance>[] = [
    { value: null },
    { quality: 'uncertain' },
    { quality: 'bad' },
    { person: ' ' },
    { verdict: 'failed', reason: 'test was positive' },
    { verdict: 'skipped', reason: 'no time for the effluent test tonight' },
  ]
  for (const b of bad)
    expect(nextStep(plan, [...all(['F0', 'F2']), ...all(['F1']).slice(1), met('F1', 'volume', b)]).step?.id).toBe('F1')
  const soft = (reason: string | null) =>
    nextStep(plan, [...all(['F0']).slice(1), met('F0', 'reagent-stopped', { verdict: 'skipped', reason, value: null })])
  expect(soft('ok').step?.id).toBe('F0')
  expect(soft('feed pump was already isolated').step?.id).toBe('F1')
  expect(soft('feed pump was already isolated').exceptions).toHaveLength(1)
})

it('takes the advice back when a check fails later: F4 running, then an effluent test is positive, F1 is next and water refused', () => {
  const accepted = [
    ...all(['F0', 'F1', 'F2', 'F3']),
    met('F1', 'effluent-inactive', { verdict: 'failed', reason: 'second sample positive', tMs: 2 }),
  ]
  const next = nextStep(plan, accepted)
  expect(next.step?.id).toBe('F1')
  expect(next.refused.map((r) => r.step)).toContain('F3')
})

it('does not advise a step the plan itself refuses, nor water from a plan without displacement', () => {
  const stuck: FlushPlan = { ...plan, refused: [{ step: 'F1', reason: 'blockage' }] }
  expect(nextStep(stuck, all(['F0']))).toMatchObject({ step: null, done: false })
  const odd: FlushPlan = { ...plan, steps: plan.steps.filter((s) => s.id !== 'F1') }
  expect(nextStep(odd, all(['F0', 'F2'])).step).toBeNull()
})

// PRO-10
it('over 500 random walks: F3 and later are never next before F1 and F2 are met with good values; order of records of different times does not matter', () => {
  const one = fc.record({
    pick: fc.nat(),
    verdict: fc.constantFrom('met' as const, 'met' as const, 'met' as const, 'failed' as const, 'skipped' as const),
    value: fc.constantFrom(1, 'ok', null, 2),
    quality: fc.constantFrom('good' as const, 'good' as const, 'good' as const, 'uncertain' as const, 'bad' as const),
    reason: fc.constantFrom(null, 'short', 'a reason of useful length'),
    person: fc.constantFrom('operator 1', 'operator 2', ''),
  })
  const criteria = plan.steps.flatMap((s) => s.criteria.map((c) => ({ step: s.id, criterion: c.id })))
  let reachedWater = 0
  fc.assert(
    fc.property(fc.array(one, { maxLength: 60 }), fc.integer({ min: 0, max: 3 }), fc.nat(), (walk, begun, seed) => {
      const start = all(['F0', 'F1', 'F2'].slice(0, begun))
      const accepted = [
        ...start,
        ...walk.map(
          (w, i): Acceptance => ({
            ...(criteria[w.pick % criteria.length] ?? { step: '', criterion: '' }),
            verdict: w.verdict,
            value: w.value,
            quality: w.quality,
            reason: w.reason,
            person: w.person,
            source: 'panel',
            tMs: 10 + i,
          }),
        ),
      ]
      const next = nextStep(plan, accepted)
      const latest = (step: string, criterion: string) =>
        accepted.filter((a) => a.step === step && a.criterion === criterion).at(-1)
      const good = ['F1', 'F2'].every((id) =>
        (plan.steps.find((s) => s.id === id)?.criteria ?? []).every((c) => {
          const a = latest(id, c.id)
          return a?.verdict === 'met' && a.quality === 'good' && a.value !== null && a.person !== ''
        }),
      )
      if (next.done || ['F3', 'F4', 'F5', 'F6'].includes(next.step?.id ?? '')) {
        expect(good).toBe(true)
        reachedWater++
      }
      expect(next.refused.some((r) => r.step === 'F3')).toBe(!good)
      // at most one step is advised, and it is the first that is open
      expect(next.step?.id ?? null).toBe(plan.steps.find((s) => openPoints(s, accepted).length > 0)?.id ?? null)
      const mixed = accepted.filter((a) => a.tMs > 1).sort((a, b) => ((a.tMs * (seed + 7)) % 101) - ((b.tMs * (seed + 7)) % 101))
      expect(nextStep(plan, [...start, ...mixed]).step?.id).toBe(next.step?.id)
      expect(nextStep(JSON.parse(JSON.stringify(plan)), JSON.parse(JSON.stringify(accepted)))).toEqual(next)
    }),
    { numRuns: 500 },
  )
  expect(reachedWater).toBeGreaterThan(5)
})
