import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { type BookState, createBook, defaultPolicy } from '../../../server/core/alarms/book.ts'
import { alarmReport, type Signal } from '../../../server/core/alarms/occurrence.ts'
import type { Act } from '../../../server/core/sequence.ts'
import { replayRecords } from './replay-records.ts'

const signal = (tS: number, over: boolean | null, more: Partial<Signal> = {}): Signal => ({
  key: 'flow:R1',
  tMs: tS * 1000,
  over,
  kind: 'flow',
  segment: 'R1',
  tag: null,
  priority: 'medium',
  value: tS,
  limit: 2,
  unit: 'kg/h',
  message: () => `flow low at ${tS} s`,
  cause: null,
  onset: null,
  detector: 'limit',
  evidence: { for: [], against: [], notExcluded: [] },
  onDelayS: 0,
  offDelayS: 0,
  ...more,
})
const person = 'R. Tamsin'
const shelve = (tS: number, alarm: number, minutes = 10): Act => ({
  kind: 'shelve',
  alarm,
  minutes,
  reason: 'pump test under way',
  person,
  tMs: tS * 1000,
})

describe('the alarm book of a run', () => {
  it('numbers occurrences 1, 2, 3 in the order raised, one open at a time for each key, figures as at the raise', () => {
    const book = createBook({ configVersion: 'v1' })
    for (const [tS, over] of [
      [0, false],
      [1, true],
      [2, true],
      [3, false],
      [4, true],
    ] as const)
      book.signal(signal(tS, over))
    book.signal(signal(5, true, { key: 'flow:R2', segment: 'R2' }))
    const { changes } = book.drain()
    expect(changes.map((c) => [c.kind, c.occurrence.id, c.tMs])).toEqual([
      ['raised', 1, 1000],
      ['cleared', 1, 3000],
      ['raised', 2, 4000],
      ['raised', 3, 5000],
    ])
    expect(alarmReport(changes[1]!.occurrence)).toEqual({
      id: 1,
      kind: 'flow',
      priority: 'medium',
      segment: 'R1',
      tag: null,
      raised: '1970-01-01T00:00:01.000Z',
      cleared: '1970-01-01T00:00:03.000Z',
      value: 1,
      limit: 2,
      unit: 'kg/h',
      message: 'flow low at 1 s',
      cause: null,
      onset: null,
      detector: 'limit',
      evidence: { for: [], against: [], notExcluded: [] },
      configuration: 0,
    })
    expect(book.drain()).toEqual({ changes: [], records: [] })
  })
  it('takes a cause and an onset found later while the alarm is active, and no longer once it has cleared', () => {
    const book = createBook({ configVersion: 'v1' })
    expect(book.amend('flow:R1', 0, { cause: 'pump' })).toBe(false)
    book.signal(signal(1, true))
    expect(book.amend('flow:R1', 2000, { cause: 'pump' })).toBe(true)
    book.signal(signal(3, false))
    expect(book.amend('flow:R1', 4000, { cause: 'gas' })).toBe(false)
    expect(book.drain().changes.map((c) => [c.kind, c.occurrence.cause])).toEqual([
      ['raised', null],
      ['amended', 'pump'],
      ['cleared', 'pump'],
    ])
  })
  // ALM-07
  it('acknowledges by id and person; an id that is not the latest of its key is refused with the reason, and journalled', () => {
    const book = createBook({ configVersion: 'v1' })
    for (const [tS, over] of [
      [1, true],
      [2, false],
      [3, true],
    ] as const)
      book.signal(signal(tS, over))
    expect(book.act({ kind: 'acknowledge', alarm: 1, person, tMs: 4000 })[0]).toMatchObject({
      outcome: 'refused',
      alarm: 1,
      person,
    })
    expect(book.act({ kind: 'acknowledge', alarm: 2, person, tMs: 5000 })[0]).toMatchObject({
      outcome: 'moved',
      from: 'UNACK',
      to: 'ACKED',
      person,
      alarm: 2,
    })
    expect(book.act({ kind: 'comment', alarm: 2, text: 'drain checked', person, tMs: 6000 })[0]).toMatchObject({
      input: 'comment',
      from: 'ACKED',
      to: 'ACKED',
      reason: 'drain checked',
    })
    expect(book.act({ kind: 'comment', alarm: null, text: 'shift change', person, tMs: 6000 })).toEqual([])
    expect(book.drain().records).toHaveLength(6)
  })
  // ALM-08
  it('a shelf runs out by the clock; what is still active then calls again, and an occurrence only tracked till then becomes annunciated', () => {
    const book = createBook({ configVersion: 'v1' })
    for (const [tS, over] of [
      [1, true],
      [2, false],
    ] as const)
      book.signal(signal(tS, over))
    book.act(shelve(3, 1))
    book.signal(signal(4, true))
    expect(book.rows()).toMatchObject([
      { state: 'SHELVED', active: true, shelvedUntilMs: 603_000, occurrence: { id: 2, annunciated: false } },
    ])
    book.tick(602_999)
    expect(book.rows()[0]?.state).toBe('SHELVED')
    book.tick(603_000)
    expect(book.rows()).toMatchObject([{ state: 'UNACK', occurrence: { id: 2, annunciated: true } }])
    expect(book.drain().records.at(-1)).toMatchObject({ input: 'uns', logic: 'shelf time over', sound: true, person: null })
  })
  // ALM-08
  it('an alarm of the highest priority cannot be shelved', () => {
    const book = createBook({ configVersion: 'v1' })
    book.signal(signal(1, true, { priority: 'high' }))
    expect(book.act(shelve(2, 1))[0]).toMatchObject({ outcome: 'refused', reason: expect.stringContaining('may not be shelved') })
  })
  // ALM-09
  it('suppression by design lasts as long as its logic and leaves a named record at either end', () => {
    const book = createBook({ configVersion: 'v1' })
    for (const on of [true, true, false, false]) book.suppress('flow:R1', 'medium', 'pump stopped in phase hold', on, 1000)
    expect(book.drain().records.map((r) => [r.input, r.logic, r.to])).toEqual([
      ['sbd+', 'pump stopped in phase hold', 'SBD'],
      ['sbd-', 'pump stopped in phase hold', 'NORM'],
    ])
  })
  it('re-alarms an acknowledged alarm after 600 s where that is configured, and not otherwise', () => {
    for (const reAlarmS of [600, null]) {
      const book = createBook({ configVersion: 'v1', ...(reAlarmS === null ? {} : { reAlarmS }) })
      book.signal(signal(1, true))
      book.act({ kind: 'acknowledge', alarm: 1, person, tMs: 2000 })
      book.tick(601_999)
      expect(book.rows()[0]?.state).toBe('ACKED')
      book.tick(602_000)
      expect(book.rows()[0]?.state).toBe(reAlarmS === null ? 'ACKED' : 'UNACK')
    }
  })
  it('a bad input keeps an active alarm active and marks it', () => {
    const book = createBook({ configVersion: 'v1' })
    book.signal(signal(1, true))
    for (let t = 2; t < 90; t++) book.signal(signal(t, null))
    expect(book.rows()).toMatchObject([{ state: 'UNACK', active: true, badInput: true }])
    expect(book.drain().records.map((r) => r.input)).toEqual(['act', 'qbad'])
  })

  const step = fc.record({
    key: fc.constantFrom('flow:R1', 'sensor:TT-1', 'exotherm:R1'),
    what: fc.constantFrom(
      'over',
      'over',
      'under',
      'between',
      'bad',
      'acknowledge',
      'reset',
      'shelve',
      'unshelve',
      'tick',
      'suppress',
      'free',
      'restart',
    ),
    dtS: fc.integer({ min: 0, max: 400 }),
  })
  const play = (book: ReturnType<typeof createBook>, steps: readonly { key: string; what: string; dtS: number }[], t0: number) => {
    let tS = t0
    for (const { key, what, dtS } of steps) {
      tS += dtS
      const alarm = book.rows().find((r) => r.key === key)?.occurrence?.id ?? 99
      const base = { person, tMs: tS * 1000, alarm }
      if (what === 'over') book.signal(signal(tS, true, { key, onDelayS: 10 }))
      else if (what === 'under' || what === 'between')
        book.signal(signal(tS, false, { key, under: what === 'under', onDelayS: 10, offDelayS: 5 }))
      else if (what === 'bad') book.signal(signal(tS, null, { key }))
      else if (what === 'tick') book.tick(tS * 1000)
      else if (what === 'restart') book.restart(tS * 1000)
      else if (what === 'suppress' || what === 'free') book.suppress(key, 'medium', 'phase flush', what === 'suppress', tS * 1000)
      else if (what === 'shelve') book.act(shelve(tS, alarm))
      else if (what === 'unshelve') book.act({ ...base, kind: 'unshelve', reason: 'test is over' })
      else book.act({ ...base, kind: what as 'acknowledge' | 'reset' })
    }
    return tS
  }
  it('goes on from its JSON state as if nothing had happened, wherever it is cut', () => {
    fc.assert(
      fc.property(fc.array(step, { maxLength: 40 }), fc.array(step, { maxLength: 40 }), fc.boolean(), (first, second, latching) => {
        const config = { configVersion: 'v1', policyOf: (_k: string, p: Signal['priority']) => defaultPolicy(p, latching) }
        const whole = createBook(config)
        const t = play(whole, first, 0)
        whole.drain()
        const cut = createBook(config, JSON.parse(JSON.stringify(whole.state())) as BookState)
        play(whole, second, t)
        play(cut, second, t)
        expect(cut.drain()).toEqual(whole.drain())
        expect(cut.state()).toEqual(whole.state())
      }),
    )
  })
  // ALM-10
  it('its journal restores every alarm; ids rise by one; each key has at most one open occurrence', () => {
    fc.assert(
      fc.property(fc.array(step, { maxLength: 80 }), fc.boolean(), (steps, latching) => {
        const book = createBook({ configVersion: 'v1', policyOf: (_k, p) => defaultPolicy(p, latching) })
        play(book, steps, 0)
        const { changes, records } = book.drain()
        for (const [key, entry] of Object.entries(book.state().entries)) {
          expect(
            replayRecords(
              records.filter((r) => r.key === key),
              entry.policy,
            ),
          ).toEqual(entry.machine)
        }
        const raised = changes.filter((c) => c.kind === 'raised')
        expect(raised.map((c) => c.occurrence.id)).toEqual(raised.map((_, i) => i + 1))
        for (const key of ['flow:R1', 'sensor:TT-1', 'exotherm:R1']) {
          const mine = changes
            .filter((c) => c.occurrence.key === key && (c.kind === 'raised' || c.kind === 'cleared'))
            .map((c) => c.kind)
          expect(mine).toEqual(mine.map((_, i) => (i % 2 === 0 ? 'raised' : 'cleared')))
        }
      }),
    )
  })
})
