import { readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { figureText, fromLocal, toLocal, verdictText } from '../../web/model/alarm-figures.ts'
import { reasonOf, refusalText } from '../../web/model/alarm-refusal.ts'
import { zoneClock } from '../../web/model/clock.ts'
import { onScreen } from '../../web/model/on-screen.ts'
import { spanOf, trendOf } from '../../web/model/trend-of.ts'
import { alarmOf, sceneOf, t0 } from '../helpers/scene.ts'

describe('refusals', () => {
  // ALM-10
  it('every reason that the alarm machine can refuse for has its mend', () => {
    const file = fileURLToPath(new URL('../../server/core/alarms/machine.ts', import.meta.url))
    const source = readFileSync(file, 'utf8')
    const reasons = [...source.matchAll(/refused\(s?,? ?(?:s, )?([`'])(.+?)\1/g)].map((m) => m[2]!)
    expect(reasons.length).toBeGreaterThan(10)
    const unmended = reasons
      .map((r) => r.replace(/\$\{stateName\(s\)\}/, 'SHELVED').replace(/\$\{[^}]+\}/g, '30'))
      .filter((r) => !refusalText(r).includes(' – '))
    expect(unmended.filter((r) => !/suppression by design/.test(r))).toEqual([])
  })
  it('says the reason and the mend, without repeating what was asked for', () => {
    expect(refusalText('at most 30 min at once (asked: flush is planned)')).toBe(
      'refused: at most 30 min at once – choose a shorter time; it can be extended before it ends',
    )
  })
  // USR-05
  it('a reason is what was picked and what was written, and either alone', () => {
    expect(reasonOf('instrument under repair', ' order 4417 ')).toBe('instrument under repair: order 4417')
    expect([reasonOf('', 'seen'), reasonOf('known', ' ')]).toEqual(['seen', 'known'])
  })
})

describe('figures', () => {
  it('prints shares as per cent, rates with their unit, and says where there is no figure', () => {
    expect(figureText({ value: 1 / 6, unit: 'share' })).toBe('16.7 %')
    expect(figureText({ value: 1.5, unit: 'per 10 min' })).toBe('1.50 per 10 min')
    expect(figureText({ value: 216, unit: 'per day' })).toBe('216.0 per day')
    expect(figureText({ value: 0, unit: 'count' })).toBe('0')
    expect(figureText({ value: null, unit: 'share' })).toBe('no figure')
    expect([verdictText(true), verdictText(false), verdictText(null)]).toEqual(['met', 'not met', '–'])
  })
  // REC-09
  it('reads a time of the plant, the first of an hour that comes twice, and gives it back to the minute in any zone', () => {
    const { offsetMs } = zoneClock('Europe/Amsterdam')
    expect(fromLocal('2031-01-14 03:12', offsetMs)).toBe(Date.UTC(2031, 0, 14, 2, 12))
    // Clocks go back at 03:00 summer time on 26 October 2031.
    expect(fromLocal('2031-10-26 02:30', offsetMs)).toBe(Date.UTC(2031, 9, 26, 0, 30))
    expect(fromLocal('2031-10-26 03:30', offsetMs)).toBe(Date.UTC(2031, 9, 26, 2, 30))
    expect([fromLocal('', offsetMs), fromLocal('14.1.2031', offsetMs), fromLocal('2031-13-01 00:00', offsetMs)]).toEqual([
      null,
      null,
      null,
    ])
    const zones = fc.constantFrom('UTC', 'Europe/Amsterdam', 'Asia/Kolkata', 'America/New_York')
    fc.assert(
      fc.property(zones, fc.integer({ min: 30_000_000, max: 35_000_000 }), (zone, minutes) => {
        const clock = zoneClock(zone)
        const text = toLocal(minutes * 60_000, clock.offsetMs)
        expect(toLocal(fromLocal(text, clock.offsetMs)!, clock.offsetMs)).toBe(text)
      }),
    )
  })
})

describe('from an alarm to its trend', () => {
  const { facts } = sceneOf()
  // USR-08
  it('goes to its segment in the quantity it is about; a sensor to the segment that uses it; to none where no place belongs to it', () => {
    expect(trendOf(alarmOf(1), facts)).toEqual({ segment: 'S2', kind: 'ratio' })
    expect(trendOf(alarmOf(1, { kind: 'exotherm' }), facts)).toEqual({ segment: 'S2', kind: 'temperature' })
    const hot = facts.segments.find((s) => s.temperatures.length > 0)!
    expect(trendOf(alarmOf(1, { kind: 'sensor', segment: null, tag: hot.temperatures[0]! }), facts)).toEqual({
      segment: hot.id,
      kind: 'temperature',
    })
    expect(trendOf(alarmOf(1, { kind: 'no-data', segment: null, tag: null }), facts)).toBeNull()
  })
  it('shows from 20 min before the earliest onset to half an hour after the raise, from half an hour before where there is none', () => {
    const a = alarmOf(1, { raisedMs: t0 + 4 * 3_600_000 })
    expect(spanOf(a)).toEqual([Date.parse(a.onset!.low) - 1_200_000, a.raisedMs + 1_800_000])
    expect(spanOf({ ...a, onset: null })).toEqual([a.raisedMs - 1_800_000, a.raisedMs + 1_800_000])
  })
})

// ALM-07
it('a row counts as seen when all of it lies between strip and foot', () => {
  expect(onScreen({ top: 60, bottom: 160 }, 60, 700)).toBe(true)
  expect(onScreen({ top: 59, bottom: 160 }, 60, 700)).toBe(false)
  expect(onScreen({ top: 650, bottom: 701 }, 60, 700)).toBe(false)
  expect(onScreen({ top: 100, bottom: 100 }, 60, 700)).toBe(false)
})
