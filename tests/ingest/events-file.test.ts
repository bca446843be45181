import { describe, expect, it } from 'vitest'
import { readEvents } from '../../server/ingest/events-file.ts'
import { at, bytesOf, latin1, mistake, utf16 } from './csv/helpers.ts'

const head = 'time,kind,value,unit,person,note\n'
const events = (text: string, zone = 'UTC') => readEvents('events.csv', bytesOf(text), zone)

describe('events file', () => {
  it('gives acts sorted by time, a Karl Fischer result with its value in ppm, absent value and unit as null', () => {
    const got = events(
      `${head}2031-05-04T13:20:00Z,drum change,,,Ada Vink,"drum 7, stream A"\n2031-05-04T12:00:00+02:00,karl fischer,62.5,ppm,Bo Tern,\n`,
    )
    expect(got).toEqual([
      {
        kind: 'event',
        tMs: at('2031-05-04T10:00:00Z'),
        person: 'Bo Tern',
        event: 'karl fischer',
        value: 62.5,
        unit: 'ppm',
        note: '',
      },
      {
        kind: 'event',
        tMs: at('2031-05-04T13:20:00Z'),
        person: 'Ada Vink',
        event: 'drum change',
        value: null,
        unit: null,
        note: 'drum 7, stream A',
      },
    ])
  })
  it('reads a time without zone in the zone of the skid: 08:00 in Amsterdam in July is 06:00 UTC', () => {
    expect(events(`${head}2031-07-01 08:00:00,sample,,,Ada Vink,\n`, 'Europe/Amsterdam')[0]!.tMs).toBe(at('2031-07-01T06:00:00Z'))
  })
  it('takes semicolons with a decimal comma, columns in another order, Latin-1 and UTF-16', () => {
    const text = 'kind;time;unit;value;note\ntitre;2031-05-04T13:20:00Z;g/L;1,25;Säure µ\n'
    for (const bytes of [bytesOf(text), latin1(text), utf16(`\ufeff${text}`, true)]) {
      const [act] = readEvents('events.csv', bytes, 'UTC')
      expect([act!.event, act!.value, act!.unit, act!.note, act!.person]).toEqual(['titre', 1.25, 'g/L', 'Säure µ', ''])
    }
  })
  it('keeps events of one time in the order of the file', () => {
    const rows = ['b', 'a', 'c'].map((k) => `2031-05-04T13:20:00Z,${k},,,Ada Vink,\n`).join('')
    expect(events(head + rows).map((e) => e.event)).toEqual(['b', 'a', 'c'])
  })
  it('gives nothing for a header alone', () => expect(events(head)).toEqual([]))
  it.each([
    ['a time', `${head}2031-05-04T13:20:00Z,sample,,,A,\nyesterday,sample,,,A,\n`, 3, 1, /found the time "yesterday"/],
    ['a kind', `${head}2031-05-04T13:20:00Z,,1,,A,\n`, 2, 2, /no kind of event/],
    ['a value', `${head}2031-05-04T13:20:00Z,sample,about 3,,A,\n`, 2, 3, /"about 3", expected a number/],
    ['an overflow', `${head}2031-05-04T13:20:00Z,sample,1e999,,A,\n`, 2, 3, /"1e999"/],
    ['too many cells', `${head}2031-05-04T13:20:00Z,sample,,,A,one, two\n`, 2, 7, /found 7 cells, expected 6/],
    ['a missing column', 'when,what\n1,2\n', 1, undefined, /"when", "what", expected time,kind/],
    ['a doubled column', 'time,kind,time\n', 1, undefined, /two columns "time"/],
    ['nothing', '', undefined, undefined, /empty file/],
  ])('names line and column of %s that is wrong', (_, text, line, column, message) => {
    const e = mistake(() => events(text))
    expect([e.code, e.place?.file, e.place?.line, e.place?.column]).toEqual(['EVENTS_FILE', 'events.csv', line, column])
    expect(e.message).toMatch(message)
    expect(e.hint).not.toBeNull()
    expect(e.line()).not.toContain('\n')
  })
})
