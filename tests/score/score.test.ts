import { describe, expect, it } from 'vitest'
import type { Truth } from '../../server/core/sim/truth.ts'
import { scoreCase } from '../../server/score/score.ts'
import { summarise } from '../../server/score/summary.ts'
import { alarm, at, forecast, onset, point, reportWith, skid, truthWith } from './case.ts'

const rich: Partial<Truth> = {
  exotherms: [
    { segment: 'R1', kind: 'ignition', start: at(10), peakAt: at(11), end: at(13), amplitudeC: 8, riseS: 20, hottest: 'TT-112' },
    { segment: 'R1', kind: 'ignition', start: at(40), peakAt: at(41), end: at(43), amplitudeC: 8, riseS: 20, hottest: 'TT-112' },
  ],
  feedErrors: [{ stream: 'B', start: at(40), end: at(45), factor: 1.3 }],
  sensorFaults: [
    { tag: 'PT-113', kind: 'zeroDrift', start: at(60), end: at(80), size: 0.1, overS: 600, hard: false },
    { tag: 'TT-111', kind: 'open', start: at(30), end: at(35), size: null, overS: null, hard: true },
  ],
}
const figure = (s: ReturnType<typeof summarise>, id: string) => s.figures.find((f) => f.id === id)!

describe('a case and the summary', () => {
  it('finds exotherms in the segment or by its thermocouple, times them, and counts temperature limits apart', () => {
    const report = reportWith([
      alarm('exotherm', 10.25, { segment: 'R1' }),
      alarm('temperature-limit', 41, { segment: null, tag: 'TT-112' }),
      alarm('exotherm', 90),
      alarm('exotherm', 20),
      alarm('feed-ratio', 41),
      alarm('feed-ratio', 100),
    ])
    const score = scoreCase(truthWith(rich), report, skid)
    expect(score.exotherms.map((e) => [e.delayS, e.delayAnyS])).toEqual([
      [15, 15],
      [null, 60],
    ])
    expect(score.falseAlarms.exotherm).toEqual([at(90)])
    expect(score.feedErrors[0]!.delayS).toBe(60)
    expect(score.falseAlarms.feedRatio).toEqual([at(100)])
  })

  it('takes a feed-ratio alarm up to half an hour after one pump was moved for neither wanted nor false', () => {
    const truth = truthWith({ confounders: [{ kind: 'flowStepOne', at: at(30), stream: 'B', factor: 1.06 }] })
    const score = scoreCase(
      truth,
      reportWith([alarm('feed-ratio', 31), alarm('feed-ratio', 59), alarm('feed-ratio', 61), alarm('feed-ratio', 29)]),
      skid,
    )
    expect(score.falseAlarms.feedRatio).toEqual([at(61), at(29)])
  })

  it('flags a sensor fault only by its own tag; a neighbour and a sound tag are counted apart', () => {
    const sensor = (minutes: number, tag: string) => alarm('sensor', minutes, { segment: null, tag })
    const score = scoreCase(truthWith(rich), reportWith([sensor(70, 'PT-112'), sensor(31, 'TT-111'), sensor(150, 'PT-110')]), skid)
    expect(score.sensorFaults.map((f) => [f.tag, f.delayS, f.onNeighbour])).toEqual([
      ['PT-113', null, true],
      ['TT-111', 60, false],
    ])
    expect(score.falseAlarms).toMatchObject({ sensor: [at(150)], sensorWrongTag: [at(70)] })
  })

  it('compares the ratio with the truth at timeline points in production only: 1.01 for 1 is an error of 0.01', () => {
    const truth = truthWith({ phases: [{ phase: 'production', from: at(0), to: at(60) }] })
    const score = scoreCase(
      truth,
      reportWith([], [point(10, 'R1', 1.01), point(20, 'R1', null), point(70, 'R1', 5), point(30, 'ZZ', 5)]),
      skid,
    )
    expect(score.ratioErrors).toEqual([expect.closeTo(0.01, 12)])
    expect(score.ratioPoints).toBe(2)
  })

  it('gives a perfect report full marks: all found, nothing false, errors 0', () => {
    const report = reportWith(
      [
        alarm('fouling', 102, { onset: onset(100, 99, 101) }),
        alarm('exotherm', 10.1),
        alarm('exotherm', 40.1),
        alarm('feed-ratio', 40.2),
        alarm('sensor', 61, { segment: null, tag: 'PT-113' }),
        alarm('sensor', 31, { segment: null, tag: 'TT-111' }),
      ],
      Array.from({ length: 22 }, (_, i) =>
        point(i * 10, 'R1', 1 + Math.max(0, i * 10 - 100) / 100, i < 11 ? null : forecast(200, 190, 210)),
      ),
      onset(100, 99, 101),
    )
    const s = summarise([scoreCase(truthWith(rich), report, skid)])
    for (const id of [
      'found',
      'rightSegment',
      'exotherms',
      'feedErrors',
      'sensors.hard',
      'sensors.soft',
      'causeOfGrowth',
      'onset.raised.coverage',
      'forecast.50.given',
    ])
      expect([id, figure(s, id).value]).toEqual([id, 1])
    for (const id of [
      'falseFouling',
      'falseExotherms',
      'falseSensors',
      'falseFeedRatio',
      'onset.raised.median',
      'onset.hindsight.p90',
      'forecast.50.median',
      'ratioError.p95',
    ])
      expect([id, figure(s, id).value]).toEqual([id, 0])
    expect(figure(s, 'ratioAtAlarm.1to4h').value).toBeCloseTo(1.02, 12)
    expect(s.missed).toEqual([])
  })

  it('pools cases: 1 false alarm in 2 × 100 min in control is 300 per 1000 h, worse than 1.5; 1 of 2 growths found is 50 %', () => {
    const s = summarise([
      scoreCase(truthWith(), reportWith([alarm('fouling', 50), alarm('fouling', 110)]), skid),
      scoreCase(truthWith(), reportWith([]), skid),
    ])
    expect(figure(s, 'falseFouling')).toMatchObject({ value: expect.closeTo(300, 9), n: 1, verdict: 'worse' })
    expect(figure(s, 'found')).toMatchObject({ value: 0.5, n: 2, verdict: 'worse' })
    expect(s.missed).toHaveLength(1)
    expect(s.falseFouling).toEqual([{ case: 'w-1', segment: 'R1', raised: at(50), named: 'fouling' }])
  })

  it('calls 1 miss in 40 growths within chance of 99 % (P of one or more misses is 0.33), 5 in 40 worse', () => {
    const cases = (misses: number) =>
      Array.from({ length: 40 }, (_, i) => scoreCase(truthWith(), reportWith(i < misses ? [] : [alarm('fouling', 110)]), skid))
    expect(figure(summarise(cases(1)), 'found').verdict).toBe('within chance')
    expect(figure(summarise(cases(5)), 'found').verdict).toBe('worse')
    expect(figure(summarise(cases(0)), 'found').verdict).toBe('met')
  })

  it('counts the cause of alarms under another true cause: sensor named sensor right, named fouling wrong, 1 of 2', () => {
    const truth = truthWith({ ...rich, fouling: [], inControl: [{ from: at(0), to: at(220) }] })
    const drift = (cause: 'sensor' | 'fouling') => alarm('fouling', 70, { segment: 'R2', cause })
    const s = summarise([
      scoreCase(truth, reportWith([drift('sensor')]), skid),
      scoreCase(truth, reportWith([drift('fouling')]), skid),
    ])
    expect(figure(s, 'otherCause')).toMatchObject({ value: 0.5, n: 2 })
    expect(s.foulingAlarms).toMatchObject({ other: 1, false: 1 })
  })

  it('says nothing of what did not occur: value null, no verdict', () => {
    const s = summarise([scoreCase(truthWith({ fouling: [] }), reportWith([]), skid)])
    expect(figure(s, 'found')).toMatchObject({ value: null, n: 0, verdict: null })
  })
})
