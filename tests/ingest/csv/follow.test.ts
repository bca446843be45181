import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { PushReader, type ReaderPoint } from '../../../server/ingest/csv/reader.ts'
import { bytesOf, collector, mistake, read, skidOf, tag, utf16 } from './helpers.ts'

const skid = skidOf(['PT-1', tag('XV', { quantity: 'state', unit: null })], { timeZone: 'Europe/Amsterdam' })
const options = (words: string[]) => ({ skid, words, startMs: Date.parse('2031-10-25T12:00:00Z') })
const encodings: [string, (t: string) => Uint8Array][] = [
  ['utf-8 with a mark', (t) => bytesOf(`\ufeff${t}`)],
  ['utf-16 le with a mark', (t) => utf16(`\ufeff${t}`, false)],
  ['utf-16 be without', (t) => utf16(t, true)],
]

/** Follows a file that shows `ends` bytes at a time, giving up the reader each time and going on from its point as JSON. */
function follow(bytes: Uint8Array, ends: readonly number[]): ReturnType<typeof collector> & { words: string[] } {
  const words: string[] = []
  const out = collector(2)
  let point: ReaderPoint | null = null
  for (const end of ends) {
    const reader: PushReader = new PushReader('live.csv', options(words), point)
    out.add(reader.feed(bytes.slice(point?.offset ?? 0, end)))
    out.add(reader.settle())
    point = JSON.parse(JSON.stringify(reader.point()))
  }
  return { ...out, words }
}

describe('a file that grows', () => {
  const rows = ['23:59:59,"1,5",open µ 😀', '00:00:01,2,shut', '02:30:00,"3,25","a ""b""\nc"', '02:10:00,4,open', '03:00:00,5,shut']
  const text = `time,PT-1,XV\r\n${rows.map((r) => `${r}\r\n`).join('')}`

  it.each(encodings)('%s: resumed at any bytes from its point, the rows are those of one reading', (_, encode) => {
    const bytes = encode(text)
    const whole = read(bytes, skid, { startMs: options([]).startMs, name: 'live.csv' })
    expect(whole.t.length).toBe(5)
    fc.assert(
      fc.property(fc.array(fc.nat(bytes.length), { maxLength: 8 }), (cuts) => {
        const got = follow(bytes, [...cuts.sort((a, b) => a - b), bytes.length])
        expect([got.t, got.values, got.codes, got.words]).toEqual([whole.t, whole.values, whole.codes, whole.words])
      }),
      { numRuns: 60, seed: 41 },
    )
  })
  it('leaves a half-written last line for the next time', () => {
    const bytes = bytesOf('time,PT-1,XV\n2031-05-04T13:20:00Z,1,a\n2031-05-04T13:20:01Z,1')
    const reader = new PushReader('live.csv', options([]))
    expect(reader.feed(bytes)).toEqual([])
    expect(reader.settle().map((b) => b.rows)).toEqual([1])
    expect(reader.point()).toMatchObject({ offset: 38, line: 3 })
    expect(reader.feed(bytesOf('2,a\n')).map((b) => [b.rows, b.values[0]])).toEqual([[1, 12]])
    expect(reader.point()).toMatchObject({ line: 4, offset: bytes.length + 4 })
  })
  it('waits where there is a header and no row yet', () => {
    const reader = new PushReader('live.csv', options([]))
    reader.feed(bytesOf('time,PT-1,XV\n,bar,\n'))
    expect([reader.settle(), reader.point()]).toEqual([[], null])
    reader.feed(bytesOf('2031-05-04T13:20:00Z,1,a\n'))
    expect(reader.settle().map((b) => b.rows)).toEqual([1])
  })
  it('goes on over twenty broken rows in a row, or rows that run backwards, once its beginning was read', () => {
    const first = new PushReader('live.csv', options([]))
    first.feed(bytesOf('time,PT-1,XV\n1900000000,1,a\n'))
    first.settle()
    const next = new PushReader('live.csv', options([]), first.point())
    const late = Array.from({ length: 60 }, (_, i) => `${1_900_000_099 - i},1,a\n`).join('')
    expect(next.feed(bytesOf('later,1,a\n'.repeat(25) + late)).map((b) => b.rows)).toEqual([60])
    expect(next.tally).toMatchObject({ broken: 25, used: 60 })
    expect(next.tally.brokenLines[0]).toEqual({ line: 3, reason: 'no time in "later"' })
  })
  it('says what is wrong as soon as the first row is there', () => {
    const reader = new PushReader('live.csv', options([]))
    reader.feed(bytesOf('time,PT-7\n1900000000,1\n'))
    expect(mistake(() => reader.settle()).code).toBe('CSV_HEADER')
  })
})
