import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { detectFormat } from '../../../server/ingest/csv/time-detect.ts'
import { LocalClock } from '../../../server/ingest/csv/zone.ts'
import { at, logFormat, mistake, read, skidOf } from './helpers.ts'

const times = (
  cells: readonly string[],
  o: { format?: string[]; zone?: string; start?: string; offset?: number } = {},
): string[] => {
  const log = [logFormat({ timeFormat: o.format ?? [], clockOffsetSeconds: o.offset ?? 0 })]
  const file = `time;PT-1\n${cells.map((c) => `${c};1\n`).join('')}`
  const startMs = o.start === undefined ? null : at(o.start)
  return read(file, skidOf(['PT-1'], { log, timeZone: o.zone ?? 'UTC' }), { startMs }).t.map((t) => new Date(t).toISOString())
}

describe('time cells', () => {
  it.each([
    ['2031-05-04T13:20:07Z', '2031-05-04T13:20:07.000Z'],
    ['2031-05-04T13:20:07.25Z', '2031-05-04T13:20:07.250Z'],
    ['2031-05-04 13:20:07,250', '2031-05-04T13:20:07.250Z'],
    ['2031-05-04T13:20:07.123456789Z', '2031-05-04T13:20:07.123Z'],
    ['2031-05-04T15:20:07+02:00', '2031-05-04T13:20:07.000Z'],
    ['2031-05-04T07:50:07-0530', '2031-05-04T13:20:07.000Z'],
    ['2031-05-04T15:20+02', '2031-05-04T13:20:00.000Z'],
    ['2031-05-04 13:20:07 UTC', '2031-05-04T13:20:07.000Z'],
    ['20310504T132007Z', '2031-05-04T13:20:07.000Z'],
    ['2032-02-29T23:59:60Z', '2032-03-01T00:00:00.000Z'],
    ['1935667207', '2031-05-04T13:20:07.000Z'],
    ['1935667207.25', '2031-05-04T13:20:07.250Z'],
    ['1935667207,25', '2031-05-04T13:20:07.250Z'],
    ['1935667207250', '2031-05-04T13:20:07.250Z'],
    ['20310504132007', '2031-05-04T13:20:07.000Z'],
    ['04.05.2031 13:20:07', '2031-05-04T13:20:07.000Z'],
    ['24/05/2031 13.20.07', '2031-05-24T13:20:07.000Z'],
    ['5/24/2031 1:20:07 PM', '2031-05-24T13:20:07.000Z'],
    ['5/24/31 12:20 am', '2031-05-24T00:20:00.000Z'],
    ['2031/05/24 13:20:07.5', '2031-05-24T13:20:07.500Z'],
    ['2031-05-24 13:20:07:569', '2031-05-24T13:20:07.569Z'],
  ])('finds how %s is written', (cell, iso) => expect(times([cell, cell])).toEqual([iso, iso]))

  it.each([
    ['dd/MM/yyyy HH.mm.ss', '04/05/2031 13.20.07', '2031-05-04T13:20:07.000Z'],
    ['MM/dd/yyyy HH.mm.ss', '04/05/2031 13.20.07', '2031-04-05T13:20:07.000Z'],
    ['d.M.yy H:mm', '4.5.31 9:20', '2031-05-04T09:20:00.000Z'],
    ["yyyy-MM-dd'T'HH:mm:ss.SSS", '2031-05-04T13:20:07.042', '2031-05-04T13:20:07.042Z'],
    ["dd/MM/yyyy 'at' hh:mm a", '04/05/2031 at 12:05 PM', '2031-05-04T12:05:00.000Z'],
    ['yyyyMMdd HHmmssSSS', '20310504 132007042', '2031-05-04T13:20:07.042Z'],
    ['epoch-s', '12.5', '1970-01-01T00:00:12.500Z'],
  ])('reads %s as given', (format, cell, iso) => expect(times([cell], { format: [format] })).toEqual([iso]))

  it('tells day from month by one value above 12 among the first rows', () => {
    expect(times(['04/05/2031 00:00:00', '13/05/2031 00:00:00'])).toEqual(['2031-05-04T00:00:00.000Z', '2031-05-13T00:00:00.000Z'])
    expect(times(['04/05/2031 00:00:00', '04/13/2031 00:00:00'])).toEqual(['2031-04-05T00:00:00.000Z', '2031-04-13T00:00:00.000Z'])
  })
  it('asks for the format where day and month cannot be told apart', () => {
    const e = mistake(() => times(['04/05/2031 00:00:00', '05/05/2031 00:00:00']))
    expect(e.line()).toBe(
      'run.csv:2:1: found "04/05/2031 00:00:00", which may be dd/MM/yyyy HH:mm:ss or MM/dd/yyyy HH:mm:ss, and no row that tells; ' +
        'expected a format that fits only one way; set log.timeFormat in the skid file to the right one',
    )
  })
  it('does not take a short year for a day', () => {
    expect(mistake(() => times(['25/05/04 00:00:00'])).message).toMatch(/may be dd\/MM\/yy HH:mm:ss or yy\/MM\/dd HH:mm:ss/)
  })
  it('does not take a row number for time', () => {
    expect(mistake(() => read('no,elapsed_s,PT-1\n1,0.5,1\n', skidOf(['PT-1']))).line()).toMatch(
      /:2:2: found elapsed seconds \("0.5"\)/,
    )
  })
  it('takes either of two formats that are given, row by row', () => {
    const both = { format: ['dd/MM/yyyy HH:mm:ss', 'iso'] }
    expect(times(['04/05/2031 00:00:00', '2031-05-04T00:00:01Z', '04/05/2031 00:00:02'], both).map((t) => t.slice(17, 19))).toEqual(
      ['00', '01', '02'],
    )
  })
  it('adds elapsed seconds to the start, to the ms', () => {
    expect(times(['0', '0.073', '1.5E+02'], { start: '2031-05-04T13:00:00Z' }).map((t) => t.slice(11, 23))).toEqual([
      '13:00:00.000',
      '13:00:00.073',
      '13:02:30.000',
    ])
  })
  it('rolls a bare time of day over at midnight, and back for a late row across it', () => {
    const got = times(['23:59:58', '23:59:59.5', '00:00:01', '23:59:59.9', '0:00:02'], { start: '2031-05-04T23:00:00Z' })
    expect(got.map((t) => t.slice(8, 23))).toEqual([
      '04T23:59:58.000',
      '04T23:59:59.500',
      '05T00:00:01.000',
      '04T23:59:59.900',
      '05T00:00:02.000',
    ])
  })
  it('starts a time of day on the date of the start, on the next where it lies more than 12 h before', () => {
    expect(times(['18.00.00'], { start: '2004-03-10T00:00:00Z' })).toEqual(['2004-03-10T18:00:00.000Z'])
    expect(times(['00:00:05'], { start: '2004-03-10T23:59:00Z' })).toEqual(['2004-03-11T00:00:05.000Z'])
    expect(times(['17:59:50'], { start: '2004-03-10T18:00:00Z' })).toEqual(['2004-03-10T17:59:50.000Z'])
  })
  it('adds the clock offset of the logger', () =>
    expect(times(['2031-05-04T13:20:00Z'], { offset: 42.5 })).toEqual(['2031-05-04T13:20:42.500Z']))
  it('joins a date and a time column, whichever stands first', () => {
    const skid = skidOf(['PT-1'])
    const late = at('2031-05-24T13:20:00Z')
    expect(read('Time;PT-1;Date\n13:20:00;1;24/05/2031\n', skid).t).toEqual([late])
    expect(read('Date;Time;PT-1\n2031-05-24;13:20:00;1\n', skid).t).toEqual([late])
  })
  it('refuses elapsed minutes', () => {
    const e = mistake(() => read('time [min];PT-1\n0;1\n1;1\n', skidOf(['PT-1']), { startMs: 0 }))
    expect(e.line()).toMatch(/run.csv:2:1: found elapsed time in "min", expected elapsed seconds; export/)
  })
  it('detectFormat lets a broken row decide nothing', () => {
    expect(detectFormat(['rubbish', '13/05/2031 00:00:00', 'x']).formats).toEqual(['dd/MM/yyyy HH:mm:ss'])
  })
})

describe('local time', () => {
  // Europe/Amsterdam 2031: forward on 30 March 01:00 UTC, back on 26 October 01:00 UTC (Directive 2000/84/EC: last Sundays).
  const zone = 'Europe/Amsterdam'
  // REC-09
  it('takes the repeated hour first as summer, then as winter time once the clock went back', () => {
    const got = times(
      [
        '2031-10-26 01:59:30',
        '2031-10-26 02:30:00',
        '2031-10-26 02:59:30',
        '2031-10-26 02:00:00',
        '2031-10-26 02:30:00',
        '2031-10-26 03:00:00',
      ],
      { zone },
    )
    expect(got.map((t) => t.slice(11, 16))).toEqual(['23:59', '00:30', '00:59', '01:00', '01:30', '02:00'])
  })
  it('keeps a row that is late by seconds inside the repeated hour in its own pass', () => {
    const got = times(['2031-10-26 02:30:00', '2031-10-26 02:30:05', '2031-10-26 02:30:03', '2031-10-26 02:30:10'], { zone })
    expect(got.map((t) => t.slice(11, 19))).toEqual(['00:30:00', '00:30:05', '00:30:03', '00:30:10'])
  })
  // REC-09
  it('reads every second of both passes at 1 Hz in order, 7200 rows one second apart', () => {
    const hour = Array.from(
      { length: 3600 },
      (_, s) => `2031-10-26 02:${String(Math.floor(s / 60)).padStart(2, '0')}:${String(s % 60).padStart(2, '0')}`,
    )
    const got = times([...hour, ...hour], { zone }).map((t) => Date.parse(t))
    expect(got).toEqual(Array.from({ length: 7200 }, (_, s) => at('2031-10-26T00:00:00Z') + 1000 * s))
  })
  // REC-09
  it('reads a time in the skipped hour as if the clock had not moved, and counts it', () => {
    const file = 'time,PT-1\n2031-03-30 01:59:00,1\n2031-03-30 02:30:00,1\n2031-03-30 03:31:00,1\n'
    const got = read(file, skidOf(['PT-1'], { timeZone: zone }))
    expect(got.t.map((t) => new Date(t).toISOString().slice(11, 16))).toEqual(['00:59', '01:30', '01:31'])
    expect(got.tally.skippedHour).toBe(1)
  })
  it('shifts by half an hour on Lord Howe Island, which Intl and this clock agree on', () => {
    const clock = new LocalClock('Australia/Lord_Howe')
    expect([clock.offsetAt(at('2031-01-15T00:00:00Z')), clock.offsetAt(at('2031-07-15T00:00:00Z'))]).toEqual([
      11 * 3_600_000,
      10.5 * 3_600_000,
    ])
    expect(clock.toUtc(at('2031-01-15T11:00:00Z'), Number.NaN)).toBe(at('2031-01-15T00:00:00Z'))
  })
  it('is the inverse of the offset for any instant in any of five zones, given the last row a second before', () => {
    const zones = ['UTC', 'Europe/Amsterdam', 'America/St_Johns', 'Australia/Lord_Howe', 'Asia/Kathmandu'].map(
      (z) => new LocalClock(z),
    )
    const near = fc.oneof(fc.integer({ min: at('1990-01-01T00:00:00Z') / 1000, max: at('2037-01-01T00:00:00Z') / 1000 }), fc.integer({ min: -7200, max: 7200 }).map((s) => at('2031-10-26T01:00:00Z') / 1000 + s)) // biome-ignore format: one line
    fc.assert(
      fc.property(near, fc.constantFrom(...zones), (s, clock) => {
        const utc = 1000 * s
        expect(clock.toUtc(utc + clock.offsetAt(utc), utc - 1000)).toBe(utc)
      }),
      { numRuns: 400, seed: 21 },
    )
  })
  it('refuses a zone that does not exist', () =>
    expect(mistake(() => new LocalClock('Europe/Atlantis')).message).toMatch(/Europe\/Atlantis.*IANA/))
})
