import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { AlarmRow } from '../../server/wire/index.ts'
import { asAt, countsOf, knownAt, orderOf, pinnedOf } from '../../web/model/alarm-list.ts'
import { alarmOf, t0 } from '../helpers/scene.ts'

const minute = 60_000
const raised = (id: number, min: number, more: Partial<AlarmRow> = {}) => alarmOf(id, { raisedMs: t0 + min * minute, ...more })

describe('order of the list', () => {
  it('is newest on top, and by number where two come at once', () => {
    expect(orderOf([raised(1, 0), raised(2, 5), raised(3, 5)], [], false)).toEqual([3, 2, 1])
  })
  it('never moves a row while somebody points at the list: new ones go below, gone ones keep their place until let go', () => {
    const shown = [2, 1]
    expect(orderOf([raised(1, 0), raised(3, 9)], shown, true)).toEqual([2, 1, 3])
    expect(orderOf([raised(1, 0), raised(3, 9)], shown, false)).toEqual([3, 1])
  })
  it('while held, every row shown keeps its index whatever comes and goes', () => {
    fc.assert(
      fc.property(
        fc.uniqueArray(fc.integer({ min: 1, max: 30 })),
        fc.uniqueArray(fc.integer({ min: 1, max: 30 })),
        (shown, now) => {
          const order = orderOf(
            now.map((id) => raised(id, id)),
            shown,
            true,
          )
          expect(order.slice(0, shown.length)).toEqual(shown)
          expect(new Set(order).size).toBe(order.length)
          for (const id of now) expect(order).toContain(id)
        },
      ),
    )
  })
})

describe('flood', () => {
  const flood = (first: AlarmRow) => ({ sinceMs: first.raisedMs, count: 12, first })

  // ALM-14
  it('pins the first alarm, also when it is over, and the oldest of the most urgent that nobody has acknowledged', () => {
    const over = raised(1, 0, { state: 'NORM', active: false, needsAck: false })
    const rows = [
      over,
      raised(2, 1, { priority: 'low' }),
      raised(3, 2, { priority: 'high', state: 'ACKED', needsAck: false }),
      raised(4, 3, { priority: 'high' }),
      raised(5, 4, { priority: 'high' }),
    ]
    expect(pinnedOf(rows, flood(over))).toEqual({ first: 1, top: 4 })
    expect(pinnedOf([over, rows[2]!], flood(over))).toEqual({ first: 1, top: null })
    expect(pinnedOf(rows, null)).toBeNull()
  })
  // ALM-14
  it('pins stand on top in their order, and never move a row while somebody is at the list', () => {
    const rows = [raised(1, 0), raised(2, 1), raised(3, 2)]
    expect(orderOf(rows, [], false, [1, 2])).toEqual([1, 2, 3])
    expect(orderOf(rows, [3, 2, 1], true, [1])).toEqual([3, 2, 1])
  })
})

it('counts what stands, what is not acknowledged and what is put aside, by priority', () => {
  const c = countsOf([
    raised(1, 0),
    raised(2, 0, { state: 'ACKED', needsAck: false }),
    raised(3, 0, { priority: 'high', state: 'RTNUN', active: false }),
    raised(4, 0, { priority: 'low', state: 'SHELVED' }),
    raised(5, 0, { state: 'SBD' }),
    raised(6, 0, { state: 'OOS' }),
  ])
  expect(c.medium).toEqual({ n: 2, unack: 1, active: 2 })
  expect(c.high).toEqual({ n: 1, unack: 1, active: 0 })
  expect(c.low.n).toBe(0)
  expect([c.shelved, c.suppressed, c.outOfService]).toEqual([1, 1, 1])
})

it('shows an alarm of a stored run as it stood: before its acknowledgement UNACK, after it ACK, after both NORM', () => {
  const a = raised(1, 0, {
    clearedMs: t0 + 20 * minute,
    acknowledgedMs: t0 + 10 * minute,
    acknowledgedBy: 'demo operator',
    state: 'NORM',
    active: false,
    needsAck: false,
  })
  const states = [5, 15, 25].map((min) => asAt(a, t0 + min * minute))
  expect(states.map((s) => [s.state, s.active, s.needsAck])).toEqual([
    ['UNACK', true, true],
    ['ACKED', true, false],
    ['NORM', false, false],
  ])
  expect(states[0]!.clearedMs).toBeNull()
  expect(asAt({ ...a, acknowledgedMs: null }, t0 + 25 * minute).state).toBe('RTNUN')
})

// USR-13
it('in a replay an alarm that was shelved then is shown shelved, one that was over is over, and one not raised yet is not there', () => {
  const rows = [raised(1, 0), raised(2, 1), raised(3, 30)]
  const tMs = t0 + 10 * minute
  const shelved = raised(1, 0, { state: 'SHELVED', needsAck: false })
  const clock = { kind: 'wall', nowMs: tMs, speed: 1 } as const
  expect(knownAt(rows, tMs, { alarms: [shelved], clock }).map((a) => [a.id, a.state])).toEqual([
    [1, 'SHELVED'],
    [2, 'NORM'],
  ])
  // The state of another moment says nothing of this one.
  const other = { alarms: [shelved], clock: { ...clock, nowMs: tMs - 1000 } }
  expect(knownAt(rows, tMs, other).map((a) => a.state)).toEqual(['UNACK', 'UNACK'])
})
