import { existsSync, readFileSync } from 'node:fs'
import { parse } from 'csv-parse/sync'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { cell } from '../../../server/core/reading.ts'
import { missingWords } from '../../../server/ingest/csv/words.ts'
import { bytesOf, read, skidOf, tag, utf16 } from './helpers.ts'

/**
 * The same bytes through the reader and through csv-parse (general-purpose library, MIT), which alone decides what the cells are. What a cell
 * means is then told by `Number` and `Date.parse`.
 */
const noTail = (cells: readonly string[]): string[] => cells.slice(0, cells.findLastIndex((c) => c.trim() !== '') + 1)

function meaning(text: string, decimal: string): { code: number; value: number | null } {
  const bare = text.trim()
  if (missingWords.has(bare.toLowerCase())) return { code: cell.missing, value: null }
  const value = Number(decimal === ',' ? bare.replace(',', '.') : bare)
  return Number.isFinite(value) && bare !== '' ? { code: cell.value, value } : { code: cell.unreadable, value: null }
}

const from = Date.UTC(2031, 4, 4, 13)
const number = fc.oneof(
  fc.integer({ min: -99_999, max: 99_999 }).map((k) => String(k / 100)),
  fc.double({ noNaN: true, noDefaultInfinity: true }).map(String),
  fc.integer({ min: -999, max: 999 }).map((k) => `${k}e-2`),
  fc.constantFrom(
    '0',
    '-0',
    '007',
    '+1.50',
    '.5',
    '5.',
    ' 12 ',
    '1e3',
    '12345678901234567890',
    '0.1000000000000000055511151231257827',
  ),
)
const odd = fc.constantFrom('', 'NaN', '----', '#N/A', 'Bad', 'x', '1.2.3', '1 2', '--1')
const note = fc
  .array(fc.constantFrom('a', 'Ä', '"', ',', ';', '\t', '\n', '\r\n', ' ', '.', '7', '€'), { maxLength: 6 })
  .map((c) => c.join(''))
const row = fc.record({
  numbers: fc.tuple(number, fc.oneof({ weight: 6, arbitrary: number }, { weight: 1, arbitrary: odd }), number),
  note,
  quote: fc.array(fc.boolean(), { minLength: 6, maxLength: 6 }),
  gapMs: fc.integer({ min: 1, max: 3000 }),
  /** Cells left out at the end, or one too many. */
  ragged: fc.oneof({ weight: 12, arbitrary: fc.constant(0) }, { weight: 1, arbitrary: fc.constantFrom(-1, -2, 1) }),
})
const file = fc.record({
  rows: fc.array(row, { minLength: 8, maxLength: 40 }),
  delimiter: fc.constantFrom(',', ';', '\t'),
  decimal: fc.constantFrom('.', ','),
  lineEnd: fc.constantFrom('\n', '\r\n'),
  units: fc.boolean(),
  tail: fc.boolean(),
  endsOpen: fc.boolean(),
  encoding: fc.constantFrom('utf8', 'utf8 bom', 'utf16le', 'utf16be'),
  cuts: fc.array(fc.nat(3000), { maxLength: 4 }),
})
type File = typeof file extends fc.Arbitrary<infer T> ? T : never

/** One file as text. The first row shows the decimal sign plainly, as a file of one sign does. */
function written(f: File): string {
  const { delimiter, decimal, lineEnd } = f
  const put = (text: string, quote: boolean): string =>
    quote || /["\n\r]/.test(text) || text.includes(delimiter) ? `"${text.replaceAll('"', '""')}"` : text
  const line = (cells: readonly string[], quote: readonly boolean[]): string =>
    cells.map((c, i) => put(c, quote[i] ?? false)).join(delimiter) + (f.tail ? delimiter : '') + lineEnd
  const plain = [false]
  let t = from
  const lines = f.rows.map(({ numbers, note, quote, gapMs, ragged }, i) => {
    t += gapMs
    const own = i === 0 ? ['1.25', '2.5', '3.75'] : numbers
    const cells = [new Date(t).toISOString(), ...own.map((n) => n.replace('.', decimal)), note, 'end']
    if (i > 0 && ragged < 0) cells.length += ragged
    if (i > 0 && ragged > 0) cells.push('9')
    return line(cells, quote)
  })
  const head = line(['time', 'PT-1', 'PT-2', 'PT-3', 'note', 'last'], [])
  const text = head + (f.units ? line(['', 'bar', '[bar]', 'bar', '', ''], plain) : '') + lines.join('')
  return f.endsOpen ? text.slice(0, -lineEnd.length) : text
}

const encoded = (text: string, encoding: string): Uint8Array =>
  encoding === 'utf8'
    ? bytesOf(text)
    : encoding === 'utf8 bom'
      ? bytesOf(`\ufeff${text}`)
      : utf16(`\ufeff${text}`, encoding === 'utf16be')

const skid = skidOf(['PT-1', 'PT-2', 'PT-3', tag('note', { quantity: 'text', unit: null })])

describe('reader against csv-parse', () => {
  it('400 generated files in every mixture of delimiter, decimal sign, quotes, line ends, units row, ragged rows and encoding: same rows, cells and bits', () => {
    let rows = 0
    let broken = 0
    fc.assert(
      fc.property(file, (f) => {
        const text = written(f)
        const bytes = encoded(text, f.encoding)
        const theirs = (parse(text, { delimiter: f.delimiter, relax_column_count: true }) as string[][])
          .slice(f.units ? 2 : 1)
          .map((cells) => ({ cells, used: noTail(cells).length <= 6 && cells.length >= 6 }))
        const whole = theirs.filter((r) => r.used).map((r) => r.cells)
        const cuts = [...new Set(f.cuts.filter((c) => c < bytes.length))].sort((a, b) => a - b)
        const ours = read(bytes, skid, { cuts })
        rows += whole.length
        broken += theirs.length - whole.length
        expect(ours.tally.broken).toBe(theirs.length - whole.length)
        expect(ours.t).toEqual(whole.map((c) => Date.parse(c[0]!)))
        for (let c = 0; c < 3; c++) {
          const meant = whole.map((cells) => meaning(cells[c + 1]!, f.decimal))
          expect(ours.codes[c]).toEqual(meant.map((m) => m.code))
          expect(ours.values[c]!.map((v, i) => Object.is(v, meant[i]!.value))).toEqual(meant.map(() => true))
        }
        const said = ours.values[3]!.map((w) => (w === null ? null : ours.words[w]))
        expect(said).toEqual(whole.map((cells) => (cells[4]!.trim() === '' ? null : cells[4]!.trim())))
      }),
      { numRuns: 400, seed: 20310504 },
    )
    expect(rows).toBeGreaterThan(5000)
    expect(broken).toBeGreaterThan(100)
  })
})

const root = '../shared/datasets'
const has = existsSync(root)
if (!has) it('../shared is not here: no open dataset is compared in this run', () => expect(existsSync(root)).toBe(has))

describe.runIf(has)('reader against csv-parse on open datasets (shared)', () => {
  it.each([
    ['pipe-thermal-front/open/pipe_151204_2.csv', ',', '.', []],
    ['pipe-thermal-front/open/pipe_150801.csv', ',', '.', []],
    ['heater-temperature-steps/open/two_heaters_3s_exponent.csv', ',', '.', []],
    ['filter-clogging-liquid/open/Sample41.csv', ',', '.', []],
    ['filter-clogging-liquid/open/Sample01.csv', ',', '.', []],
    ['water-loop-valve/open/valve2_1.csv', ';', '.', []],
    ['water-loop-valve/open/other_14.csv', ';', '.', []],
    ['rig-logs-awkward/open/pump_log_first600s.csv', ';', ',', ['Abs.Timestamp']],
    ['csv-format-variants/open/semicolon_decimal_comma_crlf_noDate.csv', ';', ',', []],
    ['csv-format-variants/open/comma_quoted_decimal_comma_dmy.csv', ',', ',', ['Time']],
  ] as const)('%s: every reading of every column is the same double', (path, delimiter, decimal, noTag) => {
    const bytes = readFileSync(`${root}/${path}`)
    const [head, ...rows] = parse(bytes, { delimiter, relax_column_count: true, bom: true }) as string[][]
    const columns = head!.flatMap((name, at) =>
      at === 0 || (noTag as readonly string[]).includes(name) || name.trim() === '' ? [] : [{ name, at }],
    )
    // The unit of a header's brackets is no question here.
    const tags = columns.map(({ name }, i) => tag(`X-${i}`, { column: name, quantity: 'output', unit: null }))
    const ours = read(bytes, skidOf(tags), { startMs: from, name: path.split('/').at(-1)! })
    expect([ours.t.length, ours.tally.broken]).toEqual([rows.length, 0])
    columns.forEach(({ name, at }, i) => {
      const meant = rows.map((r) => meaning(r[at] ?? '', decimal).value)
      expect([name, ours.values[i]!.findIndex((v, r) => !Object.is(v, meant[r]))]).toEqual([name, -1])
    })
  })
})
