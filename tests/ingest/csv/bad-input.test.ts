import { describe, expect, it } from 'vitest'
import { bytesOf, logFormat, mistake, read, skidOf, tag } from './helpers.ts'

const skid = skidOf(['PT-1', 'PT-2'])
const good = (n: number, from = 0): string => Array.from({ length: n }, (_, i) => `${1_900_000_000 + from + i},1,2\n`).join('')
const head = 'time,PT-1,PT-2\n'
const iso = (s: number): string => new Date(1_935_667_200_000 + 1000 * s).toISOString()

describe('bad input is one line with file, line, what came, what was expected, the mend', () => {
  const cases: [what: string, file: string | Uint8Array, code: string, line: number | undefined, column: number | undefined, message: RegExp][] = [
    ['an empty file', '', 'CSV_EMPTY', undefined, undefined, /empty file, expected a header/],
    ['blank lines alone', '\n \r\n\n', 'CSV_EMPTY', undefined, undefined, /empty file/],
    ['a mark alone', '\ufeff', 'CSV_EMPTY', undefined, undefined, /empty file/],
    ['a header alone', head, 'CSV_EMPTY', 1, undefined, /a header and no rows/],
    ['a header and units alone', `${head},bar,bar\n`, 'CSV_EMPTY', 1, undefined, /a header and no rows/],
    ['gzip', Uint8Array.from([0x1f, 0x8b, 8, 0, 0]), 'CSV_BINARY', undefined, undefined, /gzip archive.*gunzip/],
    ['a workbook', bytesOf('PK\u0003\u0004rest'), 'CSV_BINARY', undefined, undefined, /spreadsheet workbook.*CSV/],
    ['NUL bytes', bytesOf(`${head}1,\u0000\u0000\u0000\n`), 'CSV_BINARY', 2, undefined, /NUL byte at offset 17/],
    ['pipes', 'time|PT-1|PT-2\n1|2|3\n', 'CSV_DELIMITER', 1, undefined, /separated by "\|", expected comma, semicolon or tab/],
    ['blanks', 'time PT-1 PT-2\n1 2 3\n', 'CSV_DELIMITER', 1, undefined, /separated by blanks/],
    ['no tag', 'time,A,B\n1,2,3\n', 'CSV_HEADER', 1, undefined, /no column of a tag of this skid: "time", "A", "B"; expected "PT-1", "PT-2"/],
    ['no header', '1900000000,1,2\n1900000001,1,2\n', 'CSV_HEADER', 1, undefined, /values in the first row .*expected a header/],
    ['CR line ends', 'time,PT-1\r1900000000,1\r', 'CSV_LINE', 1, undefined, /CR alone/],
    ['a doubled column', `time,PT-1,PT-2,PT-1\n${good(1)}`, 'CSV_HEADER', 1, 4, /two columns for tag PT-1, columns 2 and 4/],
    ['columns doubled but for case', `time,pt-1,PT-2,Pt-1\n${good(1)}`, 'CSV_HEADER', 1, 4, /two columns for tag PT-1/],
    // SIG-11
    ['a units row that contradicts', `${head}s,bar,psi\n${good(1)}`, 'CSV_HEADER', 2, 3, /unit "psi" for tag PT-2, expected bar/],
    ['a foreign unit', `${head},bara,bar\n${good(1)}`, 'CSV_HEADER', 2, 2, /unit "bara" for tag PT-1, expected bar/],
    ['another unit in the header', `time,PT-1 [kPa],PT-2\n${good(1)}`, 'CSV_HEADER', 1, 2, /unit "kPa" for tag PT-1/],
    ['no time in it', `${head}a,1,2\nb,1,2\n`, 'CSV_TIME', 2, 1, /no time in "a"/],
    ['a time of day without a start', `${head}13:20:00,1,2\n`, 'CSV_TIME', 2, 1, /time of day \("13:20:00"\) without a date.*--start/],
    ['elapsed seconds without a start', `${head}0.0,1,2\n`, 'CSV_TIME', 2, 1, /elapsed seconds .*--start/],
    ['a date format that changes', `${head}${iso(0)},1,2\n${iso(1)},1,2\n24/05/2031 13:20:00,1,2\n`, 'CSV_TIME', 4, 1, /changes here: "24\/05\/2031 13:20:00" \(dd\/MM\/yyyy HH:mm:ss\), expected iso/],
    ['seconds that turn into ms', `${head}${good(2)}1900000002000,1,2\n`, 'CSV_TIME', 4, 1, /changes here.*epoch-ms.*expected epoch-s/],
    ['time backwards from the start', head + good(60).split('\n').reverse().join('\n'), 'CSV_TIME', 3, 1, /time runs backwards/],
    ['a short file backwards', `${head}${iso(3)},1,2\n${iso(2)},1,2\n${iso(1)},1,2\n`, 'CSV_TIME', 2, 1, /time runs backwards/],
    ['a line of 10 MB', `${head}${good(1)}1900000001,${'1'.repeat(10_000_000)},2\n`, 'CSV_LINE', 3, undefined, /longer than 1 MiB/],
    ['a header of 3 MB', `time,${'PT-1'.repeat(750_000)}`, 'CSV_LINE', 1, undefined, /longer than 1 MiB/],
    ['decimal commas between commas', `${head}1900000000,1,5,2,0\n1900000001,1,6,2,0\n`, 'CSV_LINE', 2, undefined, /no row that can be used \(5 cells, expected 3\)/],
    ['mostly broken rows', head + good(500) + '1900000000,1\n'.repeat(600), 'CSV_LINE', 502, undefined, /501 broken rows among the first 1001/],
  ] // biome-ignore format: a table
  it.each(cases)('%s', (_, file, code, line, column, message) => {
    const e = mistake(() => read(file, skid))
    expect([e.code, e.place?.file, e.place?.line, e.place?.column]).toEqual([code, 'run.csv', line, column])
    expect(e.line()).toMatch(message)
    expect(e.hint).not.toBeNull()
    expect(e.line()).not.toContain('\n')
  })
  it('gives the long line at any cut of the bytes', () => {
    const file = bytesOf(`${head}${good(40_000)}1,${'1'.repeat(1_100_000)}\n`)
    for (const cuts of [[], [65_536], Array.from({ length: 40 }, (_, i) => (i + 1) * 40_000)])
      expect(mistake(() => read(file, skid, { cuts })).place?.line).toBe(40_002)
  })
  it('gives a long line behind a quote too, without holding on to all that follows', () => {
    const file = bytesOf(`${head}${good(1)}1,"a\n${'1'.repeat(3_000_000)}`)
    for (const cuts of [[], Array.from({ length: 60 }, (_, i) => (i + 1) * 40_000)])
      expect(mistake(() => read(file, skid, { cuts })).place?.line).toBe(4)
  })
  it('20 first rows without a time in the format given are an error at the first', () => {
    const iso = skidOf(['PT-1', 'PT-2'], { log: [logFormat({ timeFormat: ['iso'] })] })
    const e = mistake(() => read(`${head}${'soon,1,2\n'.repeat(20)}2031-05-04T13:20:00Z,1,2\n`, iso))
    expect(e.line()).toBe(
      'run.csv:2:1: found no time in "soon", expected iso; correct log.time and log.timeFormat in the skid file',
    )
    expect(read(`${head}${'soon,1,2\n'.repeat(19)}2031-05-04T13:20:00Z,1,2\n`, iso).tally).toMatchObject({
      rows: 20,
      used: 1,
      broken: 19,
    })
  })
  it('names a time column that the skid file expects and the log has not', () => {
    const named = skidOf(['PT-1'], { log: [logFormat({ time: ['Stamp'] })] })
    expect(mistake(() => read('time,PT-1\n1,2\n', named)).line()).toMatch(
      /run.csv:1: found no column "Stamp" for time.*columns: "time", "PT-1"; correct log.time/,
    )
  })
  it('wants a column for time where the first one is a tag', () => {
    expect(mistake(() => read('PT-1,PT-2\n1,2\n', skid)).line()).toMatch(/no column for time/)
  })
})

describe('rows that are not used are counted with their lines', () => {
  it('ragged, untimed, never closed, truncated: four broken rows, the good ones kept', () => {
    const file = `${head}${iso(0)},1,2\n${iso(1)},1\nlater,1,2\n${iso(2)},"1,2\n${iso(3)},1,2\n${iso(4)},1`
    const { t, tally } = read(file, skid)
    expect(t.length).toBe(2)
    expect(tally).toMatchObject({ rows: 6, used: 2, broken: 4, outside: 0 })
    expect(tally.brokenLines).toEqual([
      { line: 3, reason: '2 cells, expected 3' },
      { line: 4, reason: 'no time in "later"' },
      { line: 5, reason: 'a quote that is never closed' },
      { line: 7, reason: '2 cells, expected 3' },
    ])
  })
  it('keeps line numbers right behind a quoted cell of three lines', () => {
    const file = `time,PT-1,note\n${iso(0)},1,"one\ntwo\nthree"\n${iso(1)},1\n`
    expect(read(file, skid).tally.brokenLines).toEqual([{ line: 5, reason: '2 cells, expected 3' }])
  })
  it('keeps the first 100 places and the whole count', () => {
    const { tally } = read(head + good(300) + 'x,1\n'.repeat(250), skid)
    expect([tally.broken, tally.brokenLines.length, tally.brokenLines.at(-1)!.line]).toEqual([250, 100, 401])
  })
  it('passes rows out of order and repeated on as they came', () => {
    const file = `${head}${iso(0)},1,2\n${iso(2)},1,2\n${iso(1)},1,2\n${iso(1)},1,2\n`
    expect(read(file, skid).t.map((t) => (t - 1_935_667_200_000) / 1000)).toEqual([0, 2, 1, 1])
  })
  it('counts rows outside the span asked for, both ends inside it', () => {
    const { t, tally } = read(head + good(10), skid, { fromMs: 1_900_000_002_000, toMs: 1_900_000_004_000 })
    expect([t.length, tally.outside, tally.rows]).toEqual([3, 7, 10])
  })
})

describe('cells', () => {
  it('empty, a logger word, a code: missing; text and an overflow: unreadable; never NaN or infinite', () => {
    const cells = ['', ' ', 'NaN', 'n/a', 'Bad Input', 'No Data', '--', '#N/A', 'inf', '-Infinity', '-200', '-200.0']
    const wrong = ['abc', '1e999', '0x10', '1 2', '1.2.3', '1_000', '12 bar', '+', '.', 'e5', '1e']
    const log = [logFormat({ missing: [-200] })]
    const file = `time;PT-1\n${[...cells, ...wrong, '1e308', ' 7 ', '+7.0e0'].map((c, i) => `${1_900_000_000 + i};${c}\n`).join('')}`
    const { codes, values } = read(file, skidOf(['PT-1'], { log }))
    expect(codes[0]).toEqual([...cells.map(() => 2), ...wrong.map(() => 3), 1, 1, 1])
    expect(values[0]!.slice(-3)).toEqual([1e308, 7, 7])
  })
  it('phases in any case take the first five words; other words follow in the order met; an empty phase is missing', () => {
    const s = skidOf(['PT-1', tag('XV', { quantity: 'state', unit: null })], { phaseColumn: 'phase' })
    const rows = [['open', 'Production'], ['shut', ' FLUSH '], ['open', 'cleaning'], ['', '']] // biome-ignore format: a table
    const file = `time,PT-1,XV,phase\n${rows.map((r, i) => `${1_900_000_000 + i},1,${r.join(',')}\n`).join('')}`
    const { values, words } = read(file, s)
    expect(words).toEqual(['startup', 'production', 'flush', 'hold', 'shutdown', 'open', 'shut', 'cleaning'])
    expect([values[1], values[2]]).toEqual([[5, 6, 5, null], [1, 2, 7, null]]) // biome-ignore format: a table
  })
  it('finds a column by its name, by case, by the tag, and without its unit; the rest is named', () => {
    const s = skidOf([
      tag('A', { column: 'Exact' }),
      tag('B', { column: 'case me' }),
      tag('C', { column: 'elsewhere' }),
      tag('D'),
      tag('E'),
    ])
    const { values, tally } = read('time, Exact ,CASE  ME,c,D [bar],pump\n1900000000,1,2,3,4,5\n', s)
    expect(values.map((v) => v[0])).toEqual([1, 2, 3, 4, null])
    expect(tally).toMatchObject({ columnsUsed: ['A', 'B', 'C', 'D'], columnsExtra: ['pump'], tagsMissing: ['E'] })
  })
})

describe('long layout', () => {
  const file =
    'time,tag,value,quality\n1900000000,PT-1,1.5,good\n1900000000,pt-2,2,Uncertain\n1900000001,PT-1,,good\n1900000001,PT-9,3,good\n1900000002,PT-1,4,bad\n1900000003,PT-1,5,hmm\n'
  it('gives a row a reading, other tags absent, qualities as codes, unknown tags counted and named', () => {
    const { t, codes, values, tally } = read(file, skid)
    expect(t.map((x) => x / 1000 - 1_900_000_000)).toEqual([0, 0, 1, 2, 3])
    expect(codes).toEqual([[1, 0, 2, 5, 4], [0, 4, 0, 0, 0]]) // biome-ignore format: a table
    expect(values[0]).toEqual([1.5, null, null, 4, 5])
    expect(tally).toMatchObject({
      layout: 'long',
      rows: 6,
      used: 5,
      foreign: 1,
      unknownQuality: 1,
      columnsExtra: ['PT-9'],
      tagsMissing: [],
    })
  })
})
