import { describe, expect, it } from 'vitest'
import type { AlarmRecord } from '../../../server/core/alarms/alarm-state.ts'
import { alarmMetrics } from '../../../server/core/alarms/metrics.ts'
import { performanceTable } from '../../../server/core/alarms/performance.ts'

const record = (tMs: number, more: Partial<AlarmRecord> = {}): AlarmRecord => ({
  alarm: 1, key: 'flow:R1', tMs, from: 'NORM', to: 'UNACK', input: 'act', outcome: 'moved', sound: true, priority: 'low', configVersion: '1',
  value: null, limit: null, unit: null, quality: 'good', person: null, logic: null, reason: null, durationS: null, oneShot: false, ...more,
}) // biome-ignore format: a record
const hour = 3.6e6
const none = { all: 0, outside: 0 }
const rowsOf = (records: readonly AlarmRecord[], fromMs: number, toMs: number, changes = none) =>
  performanceTable(alarmMetrics(records, fromMs, toMs), changes)
const find = (rows: ReturnType<typeof rowsOf>, metric: RegExp, unit?: string) =>
  rows.find((r) => metric.test(r.metric) && (unit === undefined || r.unit === unit))!

describe('the table of the alarm system', () => {
  // ALM-13
  it('36 alarms in 4 h are 1.5 in 10 min, 9 an hour, 216 a day: manageable in all three units', () => {
    const rows = rowsOf(
      Array.from({ length: 36 }, (_, i) => record(i * 400_000)),
      0,
      4 * hour,
    )
    expect(['per 10 min', 'per h', 'per day'].map((u) => find(rows, /^Average rate/, u).value)).toEqual([1.5, 9, 216])
    expect(rows.filter((r) => /^Average rate/.test(r.metric)).map((r) => r.met)).toEqual([true, true, true])
    expect(find(rows, /^Most alarms/).value).toBe(2)
  })
  // ALM-13
  it('eleven alarms in one of six windows: 17 % of the windows against under 1 %, largest count 11 against 10', () => {
    const rows = rowsOf(
      Array.from({ length: 11 }, (_, i) => record(i * 10_000)),
      0,
      hour,
    )
    expect(find(rows, /^10-min windows/)).toMatchObject({ value: 1 / 6, met: false, basis: '1 of 6 windows of 10 min' })
    expect(find(rows, /^Most alarms/)).toMatchObject({ value: 11, met: false })
    expect(find(rows, /^Time in flood/).met).toBe(false)
    // One alarm alone makes all of them: above the share that ten may have.
    expect(find(rows, /^Share of the ten/)).toMatchObject({ value: 1, met: false })
  })
  // ALM-13
  it('counts stale alarms by day: five active through the second day are five on that day, four are fewer than five', () => {
    const through = (n: number) => Array.from({ length: n }, (_, i) => record(0, { key: `flow:${i}` }))
    expect(find(rowsOf(through(5), 0, 48 * hour), /^Stale/)).toMatchObject({ value: 5, met: false })
    expect(find(rowsOf(through(4), 0, 48 * hour), /^Stale/)).toMatchObject({ value: 4, met: true })
    // Three days, two alarms each on a day of its own: never more than two at once.
    const apart = [0, 1, 2].flatMap((d) => [
      record(d * 26 * hour, { key: `a${d}` }),
      record(d * 26 * hour, { key: `b${d}` }),
      record(d * 26 * hour + 25 * hour, { key: `a${d}`, input: 'clr', sound: false }),
      record(d * 26 * hour + 25 * hour, { key: `b${d}`, input: 'clr', sound: false }),
    ])
    expect(find(rowsOf(apart, 0, 80 * hour), /^Stale/)).toMatchObject({ value: 2, basis: '6 stale occurrences in all' })
  })
  it('adds setpoint changes without person or reason to suppressions without, target none', () => {
    const shelved = record(10, { input: 'shv', sound: false, to: 'SHELVED', person: null, reason: null })
    expect(find(rowsOf([shelved], 0, hour, { all: 3, outside: 2 }), /outside the procedure/)).toMatchObject({
      value: 3, met: false, basis: '1 suppressions, 2 of 3 setpoint changes',
    }) // biome-ignore format: short
    expect(find(rowsOf([], 0, hour), /outside the procedure/)).toMatchObject({ value: 0, met: true })
  })
  it('gives no figure where the period holds none: shares and mixes of nothing are null, not 0', () => {
    const rows = rowsOf([], 5, 5)
    for (const r of rows)
      if (r.unit === 'share' || r.unit.startsWith('per')) expect([r.metric, r.value, r.met]).toEqual([r.metric, null, null])
    expect(rows.length).toBe(15)
  })
})
