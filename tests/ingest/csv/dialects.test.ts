import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { at, bytesOf, latin1, logFormat, read, skidOf, tag, utf16 } from './helpers.ts'

const skid = skidOf(['PT-1', 'PT-2'])
const body = 'time,PT-1,PT-2\n2031-05-04T13:20:00Z,1.5,2\n2031-05-04T13:20:01Z,-0.25,1e3\n'
const t2 = [at('2031-05-04T13:20:00Z'), at('2031-05-04T13:20:01Z')]
const plain = { t: t2, values: [[1.5, -0.25], [2, 1000]] } // biome-ignore format: a table
const comma = (text: string): string => text.replaceAll(',', ';').replaceAll('.', ',')

describe('one table in every dialect reads alike', () => {
  const quoted = body.replace(/[^,\n]+/g, '"$&"')
  it.each([
    ['comma and point', body, 'comma', 'point'],
    ['CRLF', body.replaceAll('\n', '\r\n'), 'comma', 'point'],
    ['no break at the end', body.trimEnd(), 'comma', 'point'],
    ['semicolon and point', body.replaceAll(',', ';'), 'semicolon', 'point'],
    ['semicolon and decimal comma', comma(body), 'semicolon', 'comma'],
    ['tab', body.replaceAll(',', '\t'), 'tab', 'point'],
    ['tab and decimal comma', comma(body).replaceAll(';', '\t'), 'tab', 'comma'],
    ['every field quoted', quoted, 'comma', 'point'],
    ['quoted decimal commas between commas', body.replace('1.5', '"1,5"').replace('-0.25', '"-0,25"'), 'comma', 'comma'],
    ['a delimiter at the end of every line', body.replaceAll('\n', ',\n'), 'comma', 'point'],
    ['a delimiter at the end of every row but the header', body.replace(/Z(.*)\n/g, 'Z$1,,\r\n'), 'comma', 'point'],
    ['blanks after commas', body.replaceAll(',', ', '), 'comma', 'point'],
    ['blank lines before and between', `\n\r\n${body.replaceAll('\n', '\n\n')}`, 'comma', 'point'],
    ['a row of units', body.replace('\n', '\n,bar,[bar]\n'), 'comma', 'point'],
    ['a line that names the delimiter', `sep=;\r\n${comma(body)}`, 'semicolon', 'comma'],
    ['a byte order mark', `\ufeff${body}`, 'comma', 'point'],
    ['UTF-16 LE with a mark', utf16(`\ufeff${body}`, false), 'comma', 'point'],
    ['UTF-16 BE with a mark', utf16(`\ufeff${body}`, true), 'comma', 'point'],
    ['UTF-16 LE without', utf16(body, false), 'comma', 'point'],
    ['UTF-16 BE without', utf16(body, true), 'comma', 'point'],
  ])('%s', (_, file, delimiter, decimal) => {
    const got = read(file, skid)
    expect({ t: got.t, values: got.values }).toEqual(plain)
    expect([got.tally.delimiter, got.tally.decimal, got.tally.rows, got.tally.used, got.tally.broken]).toEqual([
      delimiter,
      decimal,
      2,
      2,
      0,
    ])
  })
  it('Latin-1: a header with ° and µ is found byte for byte', () => {
    const warm = skidOf([tag('T', { column: 'Ofen µ [°C]', unit: 'degC', quantity: 'temperature' })])
    for (const file of [
      latin1('time,Ofen µ [°C]\n2031-05-04T13:20:00Z,21.5\n'),
      bytesOf('time,Ofen µ [°C]\n2031-05-04T13:20:00Z,21.5\n'),
    ])
      expect(read(file, warm).values).toEqual([[21.5]])
  })
})

/** Any finite double, the awkward ones often: decimals, long mantissas, the largest, the smallest, minus zero. */
const double = fc.oneof(
  fc.double({ noNaN: true, noDefaultInfinity: true }),
  fc.integer({ min: -99_999_999, max: 99_999_999 }).map((n) => n / 1000),
  fc.constantFrom(0, -0, 1e308, 5e-324, 2 ** 53, 2 ** 53 + 2, 0.1 + 0.2, 1e22, 1e23, -1.7976931348623157e308),
)

const dialect = fc.record({
  delimiter: fc.constantFrom(',', ';', '\t'),
  decimal: fc.constantFrom('.', ','),
  quoting: fc.constantFrom('none', 'all', 'some'),
  eol: fc.constantFrom('\n', '\r\n'),
  encoding: fc.constantFrom('utf-8', 'bom', 'utf-16le', 'utf-16be', 'latin1'),
  style: fc.constantFrom('shortest', 'exponent', 'plus'),
  isOpen: fc.boolean(),
})

describe('properties', () => {
  it('any table of finite doubles in any dialect, cut anywhere, reads back bit for bit', () => {
    const table = fc.array(fc.tuple(double, double), { minLength: 1, maxLength: 30 })
    const cuts = fc.array(fc.nat(4000), { maxLength: 12 })
    fc.assert(
      fc.property(table, dialect, cuts, (rows, d, where) => {
        const number = (x: number): string => {
          const text = Object.is(x, -0)
            ? '-0'
            : d.style === 'exponent'
              ? x.toExponential()
              : d.style === 'plus' && x > 0
                ? `+${x}`
                : String(x)
          return text.replace('.', d.decimal)
        }
        const cell = (text: string, i: number): string =>
          d.quoting === 'all' || (d.quoting === 'some' && i % 2 === 1) || text.includes(d.delimiter) ? `"${text}"` : text
        const lines = [
          ['time', 'PT-1', 'PT-2°'],
          ...rows.map(([a, b], i) => [new Date(t2[0]! + 100 * i).toISOString(), number(a), number(b)]),
        ]
        const text = lines.map((l) => l.map(cell).join(d.delimiter)).join(d.eol) + (d.isOpen ? '' : d.eol)
        const file = {
          'utf-8': () => bytesOf(text),
          bom: () => bytesOf(`\ufeff${text}`),
          latin1: () => latin1(text),
          'utf-16le': () => utf16(`\ufeff${text}`, false),
          'utf-16be': () => utf16(text, true),
        }[d.encoding]()
        const cutsIn = where.map((c) => c % (file.length + 1)).sort((a, b) => a - b)
        const got = read(file, skidOf(['PT-1', 'PT-2°']), { cuts: cutsIn })
        expect(got.t).toEqual(rows.map((_, i) => t2[0]! + 100 * i))
        // toEqual tells -0 from 0.
        expect(got.values).toEqual([rows.map((r) => r[0]), rows.map((r) => r[1])])
      }),
      { numRuns: 400, seed: 11 },
    )
  })

  it('any decimal of up to 30 digits, with and without exponent, is the double that Number(text) gives', () => {
    const digits = fc.string({ unit: fc.constantFrom(...'0123456789'), minLength: 1, maxLength: 15 })
    const exponent = fc.oneof(
      fc.constant(''),
      fc.integer({ min: -30, max: 30 }).map((e) => `e${e}`),
    )
    const text = fc.tuple(fc.constantFrom('', '-', '+'), digits, digits, exponent).map(([sign, a, b, e]) => `${sign}${a}.${b}${e}`)
    fc.assert(
      fc.property(fc.array(text, { minLength: 1, maxLength: 50 }), (texts) => {
        const file = `time,PT-1\n${[...texts, '9007199254740993', '-9007199254740993.0'].map((t, i) => `${1_900_000_000 + i},${t}\n`).join('')}`
        expect(read(file, skid).values[0]).toEqual([...texts.map(Number), 9007199254740992, -9007199254740992])
      }),
      { numRuns: 200, seed: 14 },
    )
  })

  it('agrees with a plain split on 60 random tables of simple cells, words and gaps among them', () => {
    const cell = fc.oneof(fc.integer({ min: -9999, max: 9999 }).map((n) => String(n / 100)), fc.constantFrom('', 'NaN', 'n/a', 'abc', '7.', '.5', '1e400')) // biome-ignore format: one line
    fc.assert(
      fc.property(fc.array(fc.tuple(cell, cell), { minLength: 1, maxLength: 40 }), (rows) => {
        const file = `time,PT-1,PT-2\n${rows.map((r, i) => `${1_900_000_000 + i},${r.join(',')}\n`).join('')}`
        const naive = file.trimEnd().split('\n').slice(1).map((l) => l.split(',')) // biome-ignore format: one line
        const wanted = [1, 2].map((c) => naive.map((f) => (f[c] !== '' && Number.isFinite(Number(f[c])) ? Number(f[c]) : null)))
        const got = read(file, skid)
        expect([got.t, got.values]).toEqual([naive.map((f) => 1000 * Number(f[0])), wanted])
      }),
      { numRuns: 60, seed: 12 },
    )
  })

  it('messy rows (quotes, broken lines, breaks in cells) give the same rows, lines and counts however the bytes are cut', () => {
    const line = fc.constantFrom(
      '2031-05-04T13:20:00Z,1,2', '2031-05-04T13:20:01Z,"a ""b"" \n c",2', '2031-05-04T13:20:02Z,1', 'rubbish,1,2', '', '2031-05-04T13:20:03Z,"open,2',
      '2031-05-04T13:20:04Z,"1"x,2', ',,', '2031-05-04T13:20:05Z,1,2,,', '2031-05-04T13:20:06Z,1,2,3', '2031-05-04T13:20:07Z,-200,NaN\r',
    ) // biome-ignore format: a list
    const log = [logFormat({ missing: [-200], timeFormat: ['iso'] })]
    fc.assert(
      fc.property(fc.array(line, { maxLength: 25 }), fc.array(fc.nat(2000), { maxLength: 10 }), (lines, where) => {
        const file = bytesOf(`time,PT-1,PT-2\n2031-05-04T13:19:00Z,1,2\n${lines.join('\n')}`)
        const cuts = where.map((c) => c % (file.length + 1)).sort((a, b) => a - b)
        const each = Array.from({ length: file.length }, (_, i) => i)
        const s = skidOf(['PT-1', 'PT-2'], { log })
        const whole = read(file, s)
        expect(read(file, s, { cuts })).toEqual(whole)
        expect(read(file, s, { cuts: each })).toEqual(whole)
      }),
      { numRuns: 100, seed: 13 },
    )
  })
})
