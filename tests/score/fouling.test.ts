import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { scoreFouling, trueRatioAt } from '../../server/score/fouling.ts'
import { alarm, at, forecast, growth, onset, point, reportWith, skid, truthWith } from './case.ts'

const classes = (truth: ReturnType<typeof truthWith>, ...alarms: ReturnType<typeof alarm>[]) =>
  scoreFouling(truth, reportWith(alarms), skid).alarms.map((a) => a.is)

describe('fouling against the truth', () => {
  it('reads the true ratio between points of the trajectory: 1.3 half an hour into a growth of 0.01 a minute', () => {
    expect(trueRatioAt(growth, 1800)).toBeCloseTo(1.3, 12)
    expect(trueRatioAt(growth, 9000)).toBe(2.2)
  })

  it('finds a growth by the first alarm on its segment before the limit: 5 min in, true ratio 1.05', () => {
    const [event] = scoreFouling(truthWith(), reportWith([alarm('fouling', 105), alarm('fouling', 150)]), skid).events
    expect(event).toMatchObject({ raised: at(105), delayS: 300, firstSegment: 'R1', namedCause: 'fouling', second: false })
    expect(event!.trueRatio).toBeCloseTo(1.05, 12)
  })

  it('does not count an alarm before the onset, at the limit, or on another segment as found', () => {
    for (const a of [
      alarm('fouling', 99),
      alarm('fouling', 200),
      alarm('fouling', 150, { segment: 'R2' }),
      alarm('dp-limit', 150),
    ]) {
      expect(scoreFouling(truthWith(), reportWith([a]), skid).events[0]!.raised).toBeNull()
    }
  })

  it('classes every alarm: found, repeat, late, false, wrong-segment, outside', () => {
    expect(
      classes(
        truthWith(),
        alarm('fouling', 50),
        alarm('fouling', 120),
        alarm('fouling', 130),
        alarm('fouling', 140, { segment: 'R2' }),
      ),
    ).toEqual(['false', 'found', 'repeat', 'wrong-segment'])
    expect(classes(truthWith(), alarm('fouling', 205))).toEqual(['late'])
    expect(classes(truthWith({ phases: [{ phase: 'startup', from: at(0), to: at(60) }] }), alarm('fouling', 50))).toEqual([
      'outside',
    ])
  })

  it('sets apart an alarm that a drifting tap caused when it names the sensor, and calls it false when it names fouling', () => {
    const truth = truthWith({
      fouling: [],
      inControl: [{ from: at(0), to: at(220) }],
      sensorFaults: [{ tag: 'PT-112', kind: 'zeroDrift', start: at(20), end: at(90), size: 0.1, overS: 3600, hard: false }],
    })
    expect(classes(truth, alarm('fouling', 60, { cause: 'sensor' }), alarm('fouling', 61))).toEqual(['other', 'false'])
    expect(classes(truth, alarm('fouling', 60, { segment: 'F1', cause: 'sensor' }))).toEqual(['false'])
    expect(classes(truth, alarm('fouling', 120, { cause: 'sensor' }))).toEqual(['false'])
  })

  it('finds a filter loading as a growth of cause filter', () => {
    const truth = truthWith({ fouling: [{ ...growth, segment: 'F1', cause: 'filter' }], inControl: [{ from: at(0), to: at(220) }] })
    const { events, alarms } = scoreFouling(truth, reportWith([alarm('fouling', 120, { segment: 'F1', cause: 'filter' })]), skid)
    expect(events[0]).toMatchObject({ cause: 'filter', namedCause: 'filter', raised: at(120) })
    expect(alarms[0]).toMatchObject({ is: 'found', acting: ['filter'] })
  })

  it('measures the onset in shares of onset to limit: 2 min late of 100 is 0.02, an interval of 8 min is 0.08 and covers', () => {
    const report = reportWith([alarm('fouling', 110, { onset: onset(102, 98, 106) })], [], onset(107, 101, 110))
    const [event] = scoreFouling(truthWith(), report, skid).events
    expect(event!.onsetRaised).toEqual({ error: 0.02, covered: true, width: 0.08 })
    expect(event!.onsetHindsight).toEqual({ error: 0.07, covered: false, width: 0.09 })
  })

  it('takes the forecast that stood at the checkpoint: of minute 120 at 125, 140 at 150, none at 175 after it was withdrawn', () => {
    const report = reportWith(
      [],
      [
        point(120, 'R1', 1.2, forecast(215, 190, 240)),
        point(140, 'R1', 1.4, forecast(190, 170, 195)),
        point(130, 'R2', 1),
        point(170, 'R1', 1.7),
      ],
    )
    const [event] = scoreFouling(truthWith(), report, skid).events
    expect(event!.forecasts).toEqual([
      { fraction: 0.25, given: true, error: 0.2, covered: true, width: 50 / 75 },
      { fraction: 0.5, given: true, error: 0.2, covered: false, width: 0.5 },
      { fraction: 0.75, given: false },
    ])
  })

  it('counts a second growth after a flush on its own, hindsight judged on the last found', () => {
    const second = { ...growth, onset: at(210), end: at(220), limitAt: at(230), limitReached: false, checkpoints: [] }
    const truth = truthWith({ fouling: [{ ...growth, end: at(190), endedBy: 'flush' }, second] })
    const report = reportWith([alarm('fouling', 120), alarm('fouling', 212)], [], onset(210, 209, 211))
    const { events } = scoreFouling(truth, report, skid)
    expect(events.map((e) => [e.second, e.raised, e.lastFound])).toEqual([
      [false, at(120), false],
      [true, at(212), true],
    ])
    expect(events[0]!.onsetHindsight).toBeNull()
    expect(events[1]!.onsetHindsight!.error).toBe(0)
  })

  it('classes each alarm exactly once whatever comes, and finds at most one per growth', () => {
    const any = fc.array(
      fc.record({
        minutes: fc.integer({ min: 0, max: 219 }),
        segment: fc.constantFrom('R1', 'R2', 'F1', null),
        cause: fc.constantFrom('fouling' as const, 'sensor' as const, 'unknown' as const, null),
      }),
      { maxLength: 12 },
    )
    fc.assert(
      fc.property(any, (list) => {
        const { alarms, events } = scoreFouling(
          truthWith(),
          reportWith(list.map((l) => alarm('fouling', l.minutes, { segment: l.segment, cause: l.cause }))),
          skid,
        )
        expect(alarms).toHaveLength(list.length)
        const found = alarms.filter((a) => a.is === 'found')
        expect(found.length).toBe(events.filter((e) => e.raised !== null).length)
        expect(found.length).toBeLessThanOrEqual(1)
      }),
      { numRuns: 100 },
    )
  })
})
