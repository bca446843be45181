import { expect, it } from 'vitest'
import { createBook } from '../../server/core/alarms/book.ts'
import type { Signal } from '../../server/core/alarms/occurrence.ts'
import { createAlarmLog } from '../../server/monitor/alarm-log.ts'
import { firstOutOf } from '../../server/monitor/alarm-story.ts'
import { alarmOf } from '../helpers/scene.ts'

const signal = (tMs: number, key: string, over: boolean): Signal => ({
  key, tMs, over, kind: 'flow', segment: 'R1', tag: null, priority: 'low', value: 1, limit: 2, unit: 'kg/h', message: 'low', cause: null, onset: null,
  detector: 'limit', evidence: { for: [], against: [], notExcluded: [] }, onDelayS: 0, offDelayS: 0,
}) // biome-ignore format: a signal

function logged() {
  const book = createBook({ configVersion: '1' })
  const log = createAlarmLog(() => null)
  const fold = (): void => {
    const { changes, records } = book.drain()
    for (const change of changes) log.take({ kind: 'alarm', change })
    for (const record of records) log.take({ kind: 'transition', record })
  }
  return { book, log, fold }
}

// ALM-08
it('a shelved alarm says who, why and until when; taken out of service and back within that time it is shelved until the same moment', () => {
  const { book, log, fold } = logged()
  book.signal(signal(0, 'flow:R1', true))
  book.act({ kind: 'shelve', alarm: 1, minutes: 20, reason: 'meter in repair', person: 'a', tMs: 1000 })
  fold()
  expect(log.standing()[0]).toMatchObject({
    state: 'SHELVED', shelvedUntilMs: 1_201_000, shelveMaxMin: 30, aside: { sinceMs: 1000, person: 'a', logic: null, reason: 'meter in repair' },
  }) // biome-ignore format: short
  book.act({ kind: 'out-of-service', key: 'flow:R1', person: 'b', reason: 'meter taken out', tMs: 60_000 })
  fold()
  expect(log.standing()[0]).toMatchObject({ state: 'OOS', shelvedUntilMs: null, aside: { person: 'b', reason: 'meter taken out' } })
  book.act({ kind: 'in-service', key: 'flow:R1', person: 'b', reason: 'meter back in', tMs: 120_000 })
  fold()
  expect(log.standing()[0]).toMatchObject({ state: 'SHELVED', shelvedUntilMs: 1_201_000, aside: { person: 'a' } })
  book.tick(1_201_000)
  fold()
  expect(log.standing()[0]).toMatchObject({ state: 'UNACK', shelvedUntilMs: null, aside: null })
})

// ALM-08
it('a refused shelving changes nothing that is shown, an extension keeps since when', () => {
  const { book, log, fold } = logged()
  book.signal(signal(0, 'flow:R1', true))
  const shelve = (minutes: number, tMs: number) =>
    book.act({ kind: 'shelve', alarm: 1, minutes, reason: 'known and being mended', person: 'a', tMs })
  shelve(31, 1000)
  fold()
  expect(log.standing()[0]).toMatchObject({ state: 'UNACK', aside: null })
  shelve(10, 2000)
  shelve(30, 300_000)
  fold()
  expect(log.standing()[0]).toMatchObject({ state: 'SHELVED', shelvedUntilMs: 2_100_000, aside: { sinceMs: 2000 } })
})

// ALM-09
it('an alarm suppressed by design says the name of the logic', () => {
  const { book, log, fold } = logged()
  book.signal(signal(0, 'flow:R1', true))
  book.design(() => 'low flow while the pump is stopped', 1000)
  fold()
  expect(log.standing()[0]).toMatchObject({ state: 'SBD', aside: { logic: 'low flow while the pump is stopped', person: null } })
})

// ALM-08
it('an alarm taken out of service before it was ever raised is listed and counted, and gone from the list when it is back', () => {
  const { book, log, fold } = logged()
  book.act({ kind: 'out-of-service', key: 'flow:R1', person: 'a', reason: 'meter not fitted yet', tMs: 5000 })
  fold()
  expect(log.standing()).toMatchObject([
    {
      id: -1,
      key: 'flow:R1',
      kind: 'flow',
      segment: 'R1',
      state: 'OOS',
      active: false,
      needsAck: false,
      aside: { sinceMs: 5000, reason: 'meter not fitted yet' },
    },
  ])
  book.act({ kind: 'in-service', key: 'flow:R1', person: 'a', reason: 'meter fitted', tMs: 9000 })
  fold()
  expect([log.standing(), log.all()]).toEqual([[], []])
})

// ALM-14
it('eleven alarms in ten minutes are told as a flood with the first of them, which stays although it is over and acknowledged', () => {
  const { book, log, fold } = logged()
  for (let i = 0; i < 11; i++) book.signal(signal(i * 1000, `flow:P${i}`, true))
  book.act({ kind: 'acknowledge', alarm: 1, person: 'a', tMs: 20_000 })
  book.signal(signal(21_000, 'flow:P0', false))
  fold()
  expect(log.standing().map((r) => r.id)).not.toContain(1)
  expect(log.flood(22_000)).toMatchObject({ sinceMs: 10_000, count: 11, first: { id: 1, state: 'NORM' } })
  expect(log.flood(611_000)).toBeNull()
})

// USR-08
it('first-out is the first of the alarms that came within ten minutes of each other, and an alarm that came alone is its own', () => {
  const at = (id: number, min: number) => alarmOf(id, { raisedMs: min * 60_000 })
  const rows = [at(1, 0), at(2, 15), at(3, 24), at(4, 30)]
  expect(firstOutOf(rows, rows[3]!).id).toBe(2)
  expect(firstOutOf(rows, rows[1]!).id).toBe(2)
  expect(firstOutOf(rows, rows[0]!).id).toBe(1)
})
