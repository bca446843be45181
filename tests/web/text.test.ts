import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { backoffMs } from '../../web/model/backoff.ts'
import { zoneClock } from '../../web/model/clock.ts'
import { age, axisUnit, duration, figure, fixed, range, short } from '../../web/model/format.ts'
import { timeTicks, valueTicks } from '../../web/model/ticks.ts'
import { inPlantTime } from '../../web/model/words.ts'

const hour = 3_600_000
const amsterdam = zoneClock('Europe/Amsterdam')

describe('numbers', () => {
  it('carry a true minus sign, their unit and no finer digit than asked', () => {
    expect(figure(-14.8, 'degC')).toBe('−14.8 °C')
    expect(figure(4.4249, 'bar')).toBe('4.42 bar')
    expect(figure(1.336, 'ratio')).toBe('1.34 × clean')
    expect(figure(null, 'bar')).toBe('no reading')
    expect(fixed(-0.001, 2)).toBe('0.00')
    expect(axisUnit('kg/h')).toBe('[kg/h]')
    expect(axisUnit(null)).toBe('[–]')
  })
  it('lengths of time are cut, never rounded up: 119 s is 1 min, 115 min is 1 h 55', () => {
    expect([45_000, 119_000, 115 * 60_000, 2 * hour, 76 * hour].map(duration)).toEqual([
      '45 s',
      '1 min',
      '1 h 55',
      '2 h',
      '3 d 4 h',
    ])
    expect(age(400)).toBe('0.4 s')
    expect(age(9950)).toBe('9 s')
  })
  it('a range holds what it is given: its lower end is cut and its upper end rounded up', () => {
    expect(range(1.99 * hour, 2.001 * hour)).toEqual({ low: '1 h 59', high: '2 h 01' })
    expect(range(-5, 30_000)).toEqual({ low: '0 s', high: '30 s' })
  })
  it('long names are cut with an ellipsis and stay within their room', () => {
    expect(short('REACTOR-LOOP', 6)).toBe('REACT…')
    fc.assert(fc.property(fc.string(), fc.integer({ min: 2, max: 20 }), (s, n) => short(s, n).length <= Math.max(n, 0)))
  })
})

describe('clock of the plant', () => {
  it('shows Amsterdam at +01:00 in January and +02:00 in July, across the change of 30 March 2031 at 01:00 UTC', () => {
    const before = Date.UTC(2031, 2, 30, 0, 59, 59)
    expect([amsterdam.hms(before), amsterdam.offset(before)]).toEqual(['01:59:59', '+01:00'])
    expect([amsterdam.hms(before + 1000), amsterdam.offset(before + 1000)]).toEqual(['03:00:00', '+02:00'])
    expect(amsterdam.full(Date.UTC(2031, 6, 1, 22, 5))).toBe('2 Jul 2031 00:05:00')
  })
  it('knows zones west of UTC and with half hours, and takes UTC for a zone it does not know', () => {
    expect(zoneClock('America/St_Johns').offset(Date.UTC(2031, 0, 1))).toBe('−03:30')
    expect(zoneClock('Not/AZone').offset(0)).toBe('+00:00')
  })
  it('puts instants in sentences of the tool into plant time, with the day where it is another one', () => {
    const now = Date.UTC(2031, 0, 14, 2, 0)
    expect(inPlantTime('met 2031-01-14T04:07:00.000Z, began 2031-01-13T22:52:00Z; dpHighBar', amsterdam, now)).toBe(
      'met 05:07, began 13 Jan 23:52; the ΔP limit',
    )
  })
})

describe('axes', () => {
  it('time ticks are round in the plant’s zone, rise, and are no more than asked', () => {
    const zones = ['UTC', 'Europe/Amsterdam', 'America/St_Johns', 'Asia/Kathmandu']
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 4e12 }),
        fc.integer({ min: 10_000, max: 21 * 24 * hour }),
        fc.integer({ min: 3, max: 14 }),
        fc.constantFrom(...zones),
        (from, span, most, zone) => {
          const clock = zoneClock(zone)
          const ticks = timeTicks(from, from + span, most, clock)
          expect(ticks.length).toBeLessThanOrEqual(most + 2)
          ticks.forEach((t, i) => {
            expect(t.at).toBeGreaterThanOrEqual(from - hour)
            expect(t.at).toBeLessThanOrEqual(from + span)
            if (i > 0) expect(t.at).toBeGreaterThan(ticks[i - 1]!.at)
            expect(Math.abs((t.at + clock.offsetMs(t.at)) % 1000)).toBe(0)
          })
        },
      ),
      { numRuns: 300 },
    )
    expect(timeTicks(Date.UTC(2031, 0, 13, 20), Date.UTC(2031, 0, 14, 2), 6, amsterdam).map((t) => t.label)).toEqual([
      '21:00',
      '22:00',
      '23:00',
      '14 Jan',
      '01:00',
      '02:00',
      '03:00',
    ])
  })
  it('value ticks are 1, 2 or 5 times a power of ten: 0.84 to 2 in five gives 1.0, 1.5 and 2.0', () => {
    expect(valueTicks(0.84, 2, 3).map((t) => t.label)).toEqual(['1.0', '1.5', '2.0'])
    expect(valueTicks(-30, 20, 5).map((t) => t.label)).toEqual(['−30', '−20', '−10', '0', '10', '20'])
    expect(valueTicks(1, 1, 5)).toEqual([])
  })
})

it('waits 0.5 s before the first new try, doubling to 3 s, spread by a fifth', () => {
  expect([0, 1, 2, 3, 4, 5, 9].map((n) => backoffMs(n, 0.5))).toEqual([500, 1000, 2000, 3000, 3000, 3000, 3000])
  expect([backoffMs(0, 0), backoffMs(0, 1)]).toEqual([400, 600])
})
