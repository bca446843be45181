import { describe, expect, it } from 'vitest'
import type { AdviceState, LiveState } from '../../server/wire/index.ts'
import { answersOf } from '../../web/model/answers.ts'
import { zoneClock } from '../../web/model/clock.ts'
import { adviceInForce, standingOn } from '../../web/model/in-force.ts'
import { alarmOf, sceneOf, t0 } from '../helpers/scene.ts'

const clock = zoneClock('Europe/Amsterdam')
const hour = 3_600_000
const exotherm = alarmOf(2, {
  kind: 'exotherm',
  priority: 'high',
  raisedMs: t0 + 5 * hour,
  value: 2.1,
  limit: 0.5,
  unit: 'K',
  cause: null,
})
const feedStop: AdviceState = { at: '', atMs: t0 + 5 * hour, action: 'stop-feed', segments: ['S2'], reason: 'heat', plan: null }

describe('the four answers', () => {
  it('say where, how bad, how long as a range, and what now, of the fouling segment', () => {
    const { facts, state } = sceneOf({ alarms: [alarmOf(1)] })
    const a = answersOf(facts, state, clock)
    expect([a.where.far, a.howBad.far, a.howBad.unit, a.howLong.far, a.howLong.to, a.whatNow.far]).toEqual([
      'S2',
      '1.34',
      '× clean',
      '1 h 54',
      '2 h 48',
      'Flush advised',
    ])
    expect(a.howLong.below).toBe('to the 4.0 bar ΔP limit, 04:54 to 05:48 (80 %)')
    expect(a.howBad.below).toContain('ΔP 2.82 bar, clean would be 2.10 bar')
  })
  it('turn to the exotherm as soon as it stands, and back when it is gone', () => {
    const { facts, state } = sceneOf({ alarms: [alarmOf(1), exotherm] })
    expect(answersOf(facts, state, clock).where.below).toContain('exotherm')
    expect(answersOf(facts, state, clock).howBad.unit).toBe('°C')
    expect(answersOf(facts, state, clock).howBad.below).toContain('2.1 K above what coolant and feeds explain')
    // The deposit's forecast is not the exotherm's: the time to respond stands there instead.
    expect(answersOf(facts, state, clock).howLong).toMatchObject({ far: '30 min', to: null })
    const over = sceneOf({ alarms: [alarmOf(1), { ...exotherm, active: false, state: 'RTNUN' }] })
    expect(answersOf(over.facts, over.state, clock).where.below).toContain('flow resistance rising')
  })
  it('never name a healthy figure where none is known: no baseline, no ratio, no forecast', () => {
    const none = sceneOf({ baseline: false, ratio: 1 })
    const a = answersOf(none.facts, none.state, clock)
    expect([a.where.far, a.howBad.far, a.howLong.far]).toEqual(['not yet', 'not known', 'not known'])
    const lost = sceneOf({ ratio: null, alarms: [alarmOf(1)] })
    const b = answersOf(lost.facts, lost.state, clock)
    expect([b.where.far, b.howBad.far, b.howLong.far]).toEqual(['S2', 'not known', 'no forecast'])
  })
  it('are quiet when nothing stands, with the highest ratio named', () => {
    const { facts, state } = sceneOf({ ratio: 1 })
    const a = answersOf(facts, state, clock)
    expect([a.where.far, a.howLong.far, a.whatNow.far]).toEqual(['All steady', 'no limit', 'Carry on'])
    expect(Number(a.howBad.far)).toBeLessThan(1.03)
  })
  it('take no shelved alarm for the one that matters', () => {
    const { facts, state } = sceneOf({ ratio: 1, alarms: [alarmOf(1, { state: 'SHELVED', needsAck: false })] })
    expect(answersOf(facts, state, clock).segment).toBeNull()
  })
  // ALM-08
  it('never say steady while an alarm that is put aside has its condition, nor that nothing grows while something does', () => {
    const { facts, state } = sceneOf({ alarms: [alarmOf(1, { state: 'SHELVED', needsAck: false })] })
    const a = answersOf(facts, state, clock)
    expect([a.where.far, a.where.below]).toEqual(['Put aside', 'S2 flow resistance rising shelved'])
    expect([a.howLong.far, a.howLong.to, a.howLong.below]).toEqual([
      '1 h 54',
      '2 h 48',
      'S2 to the 4.0 bar ΔP limit, 04:54 to 05:48 (80 %)',
    ])
    expect(a.whatNow.far).toBe('See the list')
    // Gone, though still on the shelf: nothing to say.
    const over = sceneOf({ ratio: 1, alarms: [alarmOf(1, { state: 'SHELVED', needsAck: false, active: false })] })
    expect(answersOf(over.facts, over.state, clock).where.far).toBe('All steady')
  })
})

describe('advice in force', () => {
  const withAdvice = (state: LiveState): LiveState => ({ ...state, advice: [feedStop, ...state.advice] })
  it('puts the feed stop first while the exotherm is there, and the flush first once it is over', () => {
    const on = withAdvice(sceneOf({ alarms: [alarmOf(1), exotherm] }).state)
    expect(adviceInForce(on).map((a) => [a.advice.action, a.cause.id])).toEqual([
      ['stop-feed', 2],
      ['flush', 1],
    ])
    const off = withAdvice(sceneOf({ alarms: [alarmOf(1), { ...exotherm, active: false, state: 'RTNUN' }] }).state)
    expect(adviceInForce(off).map((a) => a.advice.action)).toEqual(['flush'])
  })
  it('is empty when no alarm that it answers stands', () => {
    expect(adviceInForce(withAdvice(sceneOf({ ratio: 1 }).state))).toEqual([])
  })
})

it('a segment carries the alarm whose condition is there before a more urgent one that is gone', () => {
  const { state } = sceneOf({ alarms: [alarmOf(1), { ...exotherm, active: false, state: 'RTNUN' }] })
  expect(standingOn(state, 'S2')?.id).toBe(1)
  expect(standingOn(state, 'S1')).toBeNull()
})
