import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { AlarmRecord } from '../../../server/core/alarms/alarm-state.ts'
import { flood } from '../../../server/core/alarms/flood.ts'
import { alarmMetrics } from '../../../server/core/alarms/metrics.ts'
import { performanceTable } from '../../../server/core/alarms/performance.ts'

const base: AlarmRecord = {
  alarm: 1,
  key: 'flow:R1',
  tMs: 0,
  from: 'NORM',
  to: 'UNACK',
  input: 'act',
  outcome: 'moved',
  sound: true,
  priority: 'low',
  configVersion: '1',
  value: null,
  limit: null,
  unit: null,
  quality: 'good',
  person: null,
  logic: null,
  reason: null,
  durationS: null,
  oneShot: false,
}
const act = (tS: number, more: Partial<AlarmRecord> = {}): AlarmRecord => ({ ...base, tMs: tS * 1000, ...more })
const clr = (tS: number, more: Partial<AlarmRecord> = {}) =>
  act(tS, { input: 'clr', from: 'UNACK', to: 'RTNUN', sound: false, ...more })
const hour = 3.6e6

describe('metrics of the alarm system', () => {
  // ALM-13
  it('a period of half a million years is counted as fast as an hour, and no longer a list than its alarms', () => {
    const m = alarmMetrics([act(30), act(40), clr(2 * 86_400)], -8.64e15, 8.64e15)
    expect(m.tenMinutes).toEqual({ windows: 28_800_000_000, over10: 0, most: 2 })
    expect(m.hoursOver30.windows).toBe(4_800_000_000)
    expect(
      performanceTable(m, { all: 0, outside: 0 }).find((r) => r.metric.startsWith('stale') || /stale/i.test(r.metric))?.value,
    ).toBeGreaterThanOrEqual(1)
  })

  it('counts 12 annunciations in 2 h as 6 an hour, in fixed windows of the clock, and calls it a short record', () => {
    const records = Array.from({ length: 12 }, (_, i) => act(i * 600 + 30, { key: `flow:${i % 3}` }))
    const m = alarmMetrics(records, 0, 2 * hour)
    expect(m).toMatchObject({ annunciated: 12, ratePerHour: 6, hours: 2, records: 12, topTenShare: 1 })
    expect(m.tenMinutes).toEqual({ windows: 12, over10: 0, most: 1 })
    expect(m.hoursOver30).toEqual({ windows: 2, over30: 0 })
    expect(m.mostFrequent[0]).toEqual({ key: 'flow:0', count: 4, share: 1 / 3 })
    expect(m.label).toBe('short record – not a conformance statement')
    expect(alarmMetrics(records, 0, 31 * 24 * hour).label).toBe(null)
  })
  it('only whole clock windows count: from 00:05 to 01:05 there are five of ten minutes and none of an hour', () => {
    const m = alarmMetrics([], 300_000, 300_000 + hour)
    expect([m.tenMinutes.windows, m.hoursOver30.windows]).toEqual([5, 0])
  })
  it('eleven in ten minutes is a window over 10; thirty-one in an hour is an hour over 30', () => {
    const m = alarmMetrics(
      Array.from({ length: 31 }, (_, i) => act(i < 11 ? i * 10 : 700 + i * 90)),
      0,
      hour,
    )
    expect([m.tenMinutes.over10, m.tenMinutes.most, m.hoursOver30.over30]).toEqual([1, 11, 1])
  })
  // ALM-13
  it('leaves suppressed activations and refusals out of the count and lists them', () => {
    const m = alarmMetrics(
      [
        act(1, { outcome: 'tracked', sound: false, to: 'SHELVED' }),
        act(2, { key: 'a:b' }),
        act(3, { input: 'ack', outcome: 'refused', sound: false, person: 'x' }),
      ],
      0,
      hour,
    )
    expect(m).toMatchObject({ annunciated: 1, refused: 1, suppressed: [{ key: 'flow:R1', count: 1 }], outsideProcedure: 0 })
  })
  it('three activations in a minute chatter, once a bout; 30 s apart they do not', () => {
    const bout = [0, 10, 20, 30, 40].flatMap((t) => [act(1000 + t), clr(1005 + t)])
    expect(alarmMetrics(bout, 0, hour).chattering).toEqual([{ key: 'flow:R1', atMs: 1_000_000 }])
    expect(
      alarmMetrics(
        [0, 31, 62].flatMap((t) => [act(t), clr(t + 5)]),
        0,
        hour,
      ).chattering,
    ).toEqual([])
  })
  it('an alarm that clears after 4 s with nobody acting and does not come again is fleeting; acknowledged or repeated it is not', () => {
    expect(alarmMetrics([act(100), clr(104)], 0, hour).fleeting).toEqual([{ key: 'flow:R1', atMs: 100_000, lastedS: 4 }])
    const acked = act(102, { input: 'ack', from: 'UNACK', to: 'ACKED', sound: false, person: 'x' })
    expect(alarmMetrics([act(100), acked, clr(104)], 0, hour).fleeting).toEqual([])
    expect(alarmMetrics([act(100), clr(104), act(300), clr(304)], 0, hour).fleeting).toEqual([])
  })
  it('active for more than 24 h is stale, also where it began before the period', () => {
    expect(alarmMetrics([act(0)], 20 * hour, 25 * hour).stale).toEqual([{ key: 'flow:R1', fromMs: 0, hours: 25 }])
    expect(alarmMetrics([act(0), clr(23 * 3600)], 0, 48 * hour).stale).toEqual([])
  })
  it('gives the mix of priorities, and zeros for an empty period', () => {
    const m = alarmMetrics([act(1), act(2), act(3, { priority: 'medium' }), act(4, { priority: 'high' })], 0, hour)
    expect(m.priorityShare).toEqual({ low: 0.5, medium: 0.25, high: 0.25 })
    const none = alarmMetrics([], 5, 5)
    expect([none.annunciated, none.ratePerHour, none.floodShare, none.topTenShare]).toEqual([0, 0, 0, 0])
    JSON.stringify(none, (_k, x) => (typeof x === 'number' && !Number.isFinite(x) ? expect.fail('not finite') : x))
  })
  it('does not depend on what lies after the period', () => {
    const times = fc.array(fc.integer({ min: 0, max: 7200 }), { maxLength: 60 })
    fc.assert(
      fc.property(times, (ts) => {
        const records = ts.sort((a, b) => a - b).map((t, i) => (i % 2 === 0 ? act(t) : clr(t)))
        expect(alarmMetrics(records, 0, hour)).toEqual(
          alarmMetrics(
            records.filter((r) => r.tMs < hour),
            0,
            hour,
          ),
        )
      }),
    )
  })
})

describe('floods', () => {
  // ALM-13
  it('begin at the eleventh alarm in ten minutes and end when fewer than five are left in the window', () => {
    const times = Array.from({ length: 12 }, (_, i) => i * 10_000)
    // The window holds 12; the eighth (at 70 s) leaves at 670 s and leaves four behind.
    expect(flood(times, hour)).toEqual([{ fromMs: 100_000, toMs: 670_000, count: 12 }])
    expect(flood(times.slice(0, 10), hour)).toEqual([])
    expect(
      alarmMetrics(
        times.map((t) => act(t / 1000)),
        0,
        hour,
      ).floodShare,
    ).toBeCloseTo(570 / 3600, 12)
  })
  it('goes on while at least five come in ten minutes, and a second one is a second one', () => {
    const first = Array.from({ length: 11 }, (_, i) => i * 1000)
    const steady = Array.from({ length: 10 }, (_, i) => 100_000 + i * 120_000)
    const second = Array.from({ length: 11 }, (_, i) => 3_000_000 + i * 1000)
    const found = flood([...first, ...steady, ...second], hour)
    expect(found.map((f) => [f.fromMs, f.count])).toEqual([
      [10_000, 21],
      [3_010_000, 11],
    ])
    expect(found[0]!.toMs).toBe(100_000 + 5 * 120_000 + 600_000)
  })
})
