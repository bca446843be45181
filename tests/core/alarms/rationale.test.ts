import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { causeGuide, defaultRationales, type RationaleName } from '../../../server/core/alarms/default-rationale.ts'
import { delays } from '../../../server/core/alarms/delays.ts'
import { priorityFor, priorityMatrix, responseSlackS, severities } from '../../../server/core/alarms/priority.ts'
import { notReviewed, rationale } from '../../../server/core/alarms/rationale.ts'
import { alarmKinds, causes } from '../../../server/core/report.ts'

const names = Object.keys(defaultRationales) as RationaleName[]
const basis = { scanS: 1, residenceS: 20 }

describe('priority', () => {
  // ALM-03
  it('follows severity and time to respond: the minimum set of the skid comes out as common practice has it', () => {
    const want: Partial<Record<RationaleName, string>> = {
      exotherm: 'high',
      'dp-limit/high-high': 'high',
      'feed-ratio/high': 'high',
      'feed-ratio/low': 'medium',
      'temperature-limit/high': 'medium',
      fouling: 'low',
      'fouling/filter': 'low',
      'pressure-limit': 'medium',
      flow: 'medium',
      monitor: 'medium',
    }
    for (const [name, priority] of Object.entries(want))
      expect([name, rationale(name as RationaleName, 'R1', basis).priority]).toEqual([name, priority])
  })
  // ALM-03
  it('never falls with severity and never rises with time', () => {
    const rank = { low: 0, medium: 1, high: 2 }
    for (const s of severities)
      for (let b = 1; b < 4; b++) expect(rank[priorityMatrix[s][b]!]).toBeLessThanOrEqual(rank[priorityMatrix[s][b - 1]!])
    for (let b = 0; b < 4; b++)
      for (let s = 1; s < 3; s++) {
        expect(rank[priorityMatrix[severities[s]!][b]!]).toBeGreaterThanOrEqual(rank[priorityMatrix[severities[s - 1]!][b]!])
      }
    expect(priorityFor('high', 179.9).priority).toBe('high')
    expect(priorityFor('medium', 180).priority).toBe('medium')
    expect(priorityFor('high', 1800)).toEqual({
      priority: 'low',
      reason: 'high severity, over 30 min (reconsider whether this is an alarm) to respond',
    })
  })
  // ALM-04
  it('an alarm with 120 s to respond and 14 + 2 + 1 + 30 + 20 + 60 s of delays cannot be relied on: 7 s short', () => {
    expect(responseSlackS({ detectionS: 14, onDelayS: 2, displayS: 1, diagnosisS: 30, actionS: 20, deadTimeS: 60 }, 120)).toBe(-7)
  })
})

describe('rationalisation', () => {
  // ALM-01
  it('every alarm kind has one, with cause, consequence, check, action and a time to respond; every cause has its guide', () => {
    expect(new Set(names.map((n) => defaultRationales[n].kind))).toEqual(new Set(alarmKinds))
    for (const n of names) {
      const r = rationale(n, null, basis)
      for (const text of [r.name, r.basis, r.cause, r.consequence, r.check, r.action, r.priorityReason])
        expect(text.length).toBeGreaterThan(3)
      expect(r.timeToRespondSeconds).toBeGreaterThan(0)
      expect(r.review).toBe(notReviewed)
    }
    expect(Object.keys(causeGuide)).toEqual([...causes])
    for (const g of Object.values(causeGuide)) for (const text of Object.values(g)) expect(text.length).toBeGreaterThan(3)
  })
  // PRO-08, EXO-08
  it('recommends neither more pressure nor water: the cautions stand where a plug or a hot reactor is', () => {
    for (const n of ['dp-limit/high', 'dp-limit/high-high', 'pressure-limit'] as const)
      expect(defaultRationales[n].action).toContain('Do not raise pressure')
    for (const n of ['exotherm', 'temperature-limit/high-high'] as const)
      expect(defaultRationales[n].action).toContain('Never add water')
  })
  // ALM-02
  it('takes the site over the default, the segment over the kind, and moves the priority with the time to respond', () => {
    const overrides = {
      fouling: { timeToRespondSeconds: 400, action: 'flush R1 by procedure 7' },
      'fouling:R1': { timeToRespondSeconds: 100, approvedBy: 'process engineer' },
    }
    expect(rationale('fouling', 'R2', basis, overrides)).toMatchObject({
      timeToRespondSeconds: 400,
      priority: 'medium',
      action: 'flush R1 by procedure 7',
      review: notReviewed,
    })
    expect(rationale('fouling', 'R1', basis, overrides)).toMatchObject({ priority: 'high', review: 'approved by process engineer' })
    expect(rationale('fouling', 'R1', basis, { fouling: { priority: 'low', severity: 'high' } })).toMatchObject({
      priority: 'low',
      priorityReason: 'given in the skid file',
    })
    expect(rationale('fouling/filter', 'F1', basis, { fouling: { class: 'a' }, 'fouling/filter': { class: 'b' } }).class).toBe('b')
  })
  // ALM-02
  it('refuses an alarm without action, consequence or time to respond, unknown fields, wrong types and words', () => {
    for (const [fields, text] of [
      [{ action: ' ' }, /action is empty/],
      [{ consequence: '' }, /consequence is empty/],
      [{ timeToRespondSeconds: 0 }, /above 0/],
      [{ timeToRespondSeconds: Number.NaN }, /above 0/],
      [{ onDelaySeconds: -1 }, /at least 0/],
      [{ acton: 'x' }, /not a field/],
      [{ latching: 'yes' }, /must be a boolean/],
      [{ priority: 'urgent' }, /is 'urgent'/],
      [{ toString: 'x' }, /not a field/],
    ] as [Record<string, string | number | boolean>, RegExp][]) {
      expect(() => rationale('exotherm', 'R1', basis, { 'exotherm:R1': fields })).toThrow(text)
    }
  })
})

describe('delays', () => {
  it('start from 15 s for flow and pressure and 60 s for temperature, capped at half the residence time and a tenth of the time to respond', () => {
    expect(delays('flow', { scanS: 1, residenceS: null, timeToRespondS: 600 })).toEqual({
      deadbandPct: 5,
      onDelayS: 15,
      offDelayS: 15,
    })
    expect(delays('flow', { scanS: 1, residenceS: 10, timeToRespondS: 600 }).onDelayS).toBe(5)
    expect(delays('pressure', { scanS: 1, residenceS: null, timeToRespondS: 600 })).toEqual({
      deadbandPct: 2,
      onDelayS: 15,
      offDelayS: 15,
    })
    expect(delays('temperature', { scanS: 1, residenceS: null, timeToRespondS: 300 })).toEqual({
      deadbandPct: 1,
      onDelayS: 30,
      offDelayS: 60,
    })
    expect(delays('exotherm', { scanS: 1, residenceS: 5, timeToRespondS: 120 }).onDelayS).toBe(0)
  })
  it('are whole scans, at least one where there is a delay at all, at any scan from 0.1 to 60 s', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.1, max: 60, noNaN: true }),
        fc.double({ min: 10, max: 4000, noNaN: true }),
        (scanS, timeToRespondS) => {
          for (const of of ['flow', 'temperature', 'pressure', 'level'] as const) {
            const { onDelayS } = delays(of, { scanS, residenceS: null, timeToRespondS })
            expect(onDelayS).toBeGreaterThanOrEqual(scanS)
            expect(Math.abs(onDelayS / scanS - Math.round(onDelayS / scanS))).toBeLessThan(1e-9)
            expect(onDelayS).toBeLessThanOrEqual(Math.max(1.5 * scanS, 0.1 * timeToRespondS + scanS / 2))
          }
        },
      ),
    )
  })
})
