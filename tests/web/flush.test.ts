import { describe, expect, it } from 'vitest'
import { layoutOf } from '../../server/core/derive/layout.ts'
import { freshGuide } from '../../server/core/flush/course-state.ts'
import { openCourse } from '../../server/core/flush/open-course.ts'
import { planFlush } from '../../server/core/flush/plan.ts'
import type { Course, CourseStep } from '../../server/wire/index.ts'
import {
  amount,
  filledShare,
  isReady,
  keyOf,
  nextStep,
  pointValue,
  recordable,
  runningStep,
  standingRefusal,
  whatNow,
} from '../../web/model/flush-now.ts'
import { heron, usual } from '../core/flush/heron.ts'

/** A course as F0 opens it. */
function opened(): Course {
  const input = { skid: heron, segments: ['R1'], ratios: { R1: 1.5 }, given: usual }
  const s = freshGuide()
  openCourse(s, { layout: layoutOf(heron), input, plan: planFlush(input), tMs: 1e12, person: 'operator 1' })
  return s.course!
}
const stepOf = (c: Course, id: string): CourseStep => c.steps.find((s) => s.step === id)!
const run = (c: Course, id: string): CourseStep => {
  for (const s of c.steps.slice(
    0,
    c.steps.findIndex((x) => x.step === id),
  ))
    Object.assign(s, { state: 'accepted', startedMs: 1e12, endedMs: 1e12 + 60_000 })
  return Object.assign(stepOf(c, id), { state: 'running' as const, startedMs: 1e12 + 60_000 })
}
const all = (s: CourseStep, state: CourseStep['points'][number]['state']): void => {
  for (const p of s.points) Object.assign(p, { state, why: '' })
}

describe('what now', () => {
  it('names one thing: begin, wait, look, accept, in the order in which they come', () => {
    const c = opened()
    expect([runningStep(c), nextStep(c)?.step, whatNow(c).far]).toEqual([null, 'F0', 'F0 is next'])
    const f0 = run(c, 'F0')
    expect(whatNow(c).far).toBe('Wait')
    for (const p of f0.points) if (p.by === 'readings') p.state = 'met'
    expect(whatNow(c).far).toBe('Look and record')
    all(f0, 'met')
    expect([isReady(f0), whatNow(c).far]).toEqual([true, 'F0 is met'])
    f0.state = 'accepted'
    expect([nextStep(c)?.step, whatNow(c).far]).toEqual(['F1', 'F1 is next'])
  })

  it('says of refused water that it waits, until F3 has begun; of ice, of a deposit that stays and of an end what they are', () => {
    const c = opened()
    run(c, 'F2')
    c.refusals.push({ tMs: 1e12, person: 'operator 1', step: 'F3', asked: 'started', reasons: ['no water before F2 is accepted'] })
    expect([whatNow(c).far, standingRefusal(c)?.step]).toEqual(['Wait, no water', 'F3'])
    all(stepOf(c, 'F2'), 'met')
    expect([whatNow(c).far, standingRefusal(c)?.step]).toEqual(['F2 is met', 'F3'])
    Object.assign(stepOf(c, 'F2'), { state: 'accepted' })
    expect([whatNow(c).far, standingRefusal(c)]).toEqual(['F3 is next', null])
    run(c, 'F3')
    expect(standingRefusal(c)).toBeNull()
    c.calls.push({ tMs: 1e12, kind: 'not-water-soluble', segment: 'R1', text: 'escalate' })
    expect(whatNow(c).far).toBe('Escalate')
    run(c, 'F5')
    c.calls.push({ tMs: 1e12, kind: 'ice', segment: 'R1', text: 'ice' })
    expect(whatNow(c).far).toBe('Ice: warm up')
    c.state = 'complete'
    expect(whatNow(c).far).toBe('Flush complete')
    c.recovery[0]!.verdict = 'not-fully-restored'
    expect(whatNow(c).far).toBe('Not restored')
    c.state = 'aborted'
    expect(whatNow(c).far).toBe('Flush aborted')
  })

  // PRO-34
  it('is never a command nor a permission, and at most 16 characters', () => {
    const c = opened()
    for (const id of ['F0', 'F1', 'F2', 'F3', 'F4', 'F5', 'F6'])
      for (const state of ['met', 'not-yet', 'unknown', 'failed'] as const) {
        all(run(c, id), state)
        const { far, below } = whatNow(c)
        expect(far.length).toBeLessThanOrEqual(16)
        expect(`${far} ${below}`).not.toMatch(/\b(must|you may|allowed to|go ahead|permitted|open the|close the|start the)\b/i)
      }
  })
})

describe('a chamber', () => {
  it('fills with the volume passed, with time where nothing is pumped, and stays full once accepted', () => {
    const c = opened()
    const f1 = run(c, 'F1')
    f1.passedMl = f1.plannedMl! / 4
    expect(filledShare(f1, 2e12)).toBeCloseTo(0.25, 9)
    f1.passedMl = 3 * f1.plannedMl!
    expect([filledShare(f1, 2e12), amount(f1)]).toEqual([1, `${Math.round(f1.passedMl)} mL`])
    const f2 = run(c, 'F2')
    expect(filledShare(f2, f2.startedMs! + (f2.minutes! * 60_000) / 2)).toBeCloseTo(0.5, 9)
    expect([filledShare(f1, 2e12), filledShare(stepOf(c, 'F3'), 2e12)]).toEqual([1, 0])
  })
})

it('offers for a record what people see, and readings only while they are not known after a first scan', () => {
  const c = opened()
  const f1 = run(c, 'F1')
  expect(recordable(f1).map(keyOf)).toEqual(['effluent-inactive'])
  for (const p of f1.points)
    if (p.criterion === 'quench-isolated') Object.assign(p, { state: 'unknown', why: 'its flow reading is not good' })
  expect(recordable(f1).map(keyOf)).toEqual(['effluent-inactive', 'quench-isolated:flow D'])
  const [volume] = f1.points
  expect([
    pointValue({ ...volume!, value: 12.4 }),
    pointValue({ ...volume!, unit: '°C', value: 6.5 }),
    pointValue({ ...volume!, unit: '°C', value: -6.5 }),
  ]).toEqual(['12 mL', '+6.5 °C', '−6.5 °C'])
})
