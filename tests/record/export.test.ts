import { writeFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { cell, phases, type RowBlock, rowBlock } from '../../server/core/reading.ts'
import type { Entry } from '../../server/core/sequence.ts'
import type { Skid } from '../../server/core/skid.ts'
import { readLog } from '../../server/ingest/csv/read-log.ts'
import { csvLine } from '../../server/record/csv-cell.ts'
import { localIso } from '../../server/record/local-time.ts'
import { readRecord, recordText } from '../../server/record/record-json.ts'
import { samplesCsv } from '../../server/record/samples-csv.ts'
import { skidOf, tag } from '../ingest/csv/helpers.ts'
import { tempDir } from '../monitor/bench.ts'

const skid: Skid = skidOf(['PT-1', 'PT-2', tag('XV', { quantity: 'state', unit: null, column: '=XV' })], { timeZone: 'UTC' })
const words = [...phases, 'open', 'half, "shut"', ' padded', '=HYPERLINK("http://x")', '-1+1']

/** Any double that a reading may hold, the awkward ones often. */
const anyValue = fc.oneof(
  fc.double({ noNaN: true, noDefaultInfinity: true }),
  fc.constantFrom(0, -0, 0.1 + 0.2, 5e-324, 1.7976931348623157e308, 2 ** 53 + 2, -1e-7, 1e21, 123.456),
)
const codesOf = (full: boolean) => (full ? fc.constantFrom(0, 1, 1, 1, 2, 3, 4, 5) : fc.constantFrom(1, 1, 1, 2, 3))
const wordIndex = fc.constantFrom(5, 6, words.length - 2, words.length - 1)

const blocks = (full: boolean) =>
  fc
    .array(
      fc.tuple(
        fc.integer({ min: 0, max: 3_600_000 }),
        fc.tuple(anyValue, anyValue, wordIndex),
        fc.tuple(codesOf(full), codesOf(full), fc.constantFrom(1, 1, 2)),
      ),
      { minLength: 1, maxLength: 30 },
    )
    .map((rows): RowBlock => {
      const b = rowBlock(rows.length, 3)
      b.rows = rows.length
      rows
        .sort((a, c) => a[0] - c[0])
        .forEach(([t, values, codes], r) => {
          b.tMs[r] = Date.UTC(2031, 4, 5) + t
          for (let c = 0; c < 3; c++) {
            b.codes[r * 3 + c] = codes[c]!
            b.values[r * 3 + c] = codes[c] === 1 || codes[c]! >= 4 ? values[c]! : 0
          }
        })
      return b
    })

const bits = (v: number): string => Buffer.from(new Float64Array([v]).buffer).toString('hex')

/** Samples by tag: time, bits or word, quality. */
function samplesOf(b: RowBlock, list: readonly string[]): string[][] {
  const out: string[][] = [[], [], []]
  for (let r = 0; r < b.rows; r++)
    for (let c = 0; c < b.width; c++) {
      const code = b.codes[r * b.width + c]!
      if (code === cell.absent) continue
      const v = b.values[r * b.width + c]!
      const text = code === cell.missing || code === cell.unreadable ? '' : c === 2 ? list[v]! : bits(v)
      out[c]!.push(`${b.tMs[r]} ${code} ${text}`)
    }
  return out
}

async function readBack(text: string): Promise<string[][]> {
  const list: string[] = []
  const { blocks } = readLog(
    {
      name: 'back.csv',
      chunks: (async function* () {
        yield new TextEncoder().encode(text)
      })(),
    },
    { skid, words: list, startMs: null },
  )
  const out: string[][] = [[], [], []]
  for await (const b of blocks) for (const [c, s] of samplesOf(b, list).entries()) out[c]!.push(...s)
  return out
}

describe('readings as CSV', () => {
  it.each([
    ['wide where that says all', false, 'wide'],
    ['long where tags are left out or marked by the source', true, 'long'],
  ] as const)('%s: every sample reads back to the same time, bits and quality', async (_, full, layout) => {
    const seen = new Set<string>()
    await fc.assert(
      fc.asyncProperty(blocks(full), async (block) => {
        fc.pre(block.codes.some((c) => c === cell.value))
        const entries: { entry: Entry }[] = [{ entry: { kind: 'tick', tMs: 1 } }, { entry: { kind: 'rows', block } }]
        const csv = samplesCsv(skid, words, () => entries)
        seen.add(csv.layout)
        const text = [...csv.lines()].join('')
        // Nor can a cell of text be a formula in a spreadsheet.
        expect(text).not.toMatch(/(^|,)"?[=@]|(^|,)"?[+-](?![\d.])|-1\+1(?<!'-1\+1)/m)
        expect(await readBack(text)).toEqual(samplesOf(block, words))
      }),
      { numRuns: 200, seed: 3 },
    )
    expect(seen).toContain(layout)
  })
})

describe('a record', () => {
  it('reads back to the same entries, bit for bit, in the same order', async () => {
    const file = join(tempDir(), 'record.json')
    const head = { record: 1, skidFile: { name: 's', text: 't' }, words } as unknown as Parameters<typeof recordText>[0]['head']
    await fc.assert(
      fc.asyncProperty(fc.array(fc.oneof(blocks(true), fc.integer({ min: 0 }), fc.string())), async (parts) => {
        const entries = parts.map((p, seq): { seq: number; entry: Entry } => ({
          seq,
          entry:
            typeof p === 'number'
              ? { kind: 'tick', tMs: p }
              : typeof p === 'string'
                ? { kind: 'act', act: { kind: 'comment', tMs: 5, person: 'A', alarm: null, text: p } }
                : { kind: 'rows', block: p },
        }))
        writeFileSync(
          file,
          [...recordText({ head, entries, transitions: [], report: {} as never, chain: [], sign: () => null })].join(''),
        )
        expect(
          JSON.parse([...recordText({ head, entries, transitions: [], report: {} as never, chain: [], sign: () => null })].join(''))
            .sequence.length,
        ).toBe(entries.length)
        const back = await readRecord(file)
        const got: Entry[] = []
        for await (const e of back.entries) got.push(e)
        const flat = (e: Entry) =>
          e.kind === 'rows'
            ? [e.block.tMs, e.block.codes, e.block.values].map((a) =>
                Buffer.from(a.buffer, a.byteOffset, a.byteLength).toString('hex'),
              )
            : e
        expect(got.map(flat)).toEqual(entries.map(({ entry }) => flat(entry)))
      }),
      { numRuns: 60, seed: 5 },
    )
  })
  it.each([
    ['an empty file', '', /no record/],
    ['a log', 'time,PT-1\n1,2\n', /no record/],
    ['a record of another version', '{"record":2,\n"sequence":[\n],\n', /version 2/],
    ['a record cut off in its sequence', '{"record":1,\n"sequence":[\n{"seq":0,"tick":5},\n', /ends in the middle/],
  ])('refuses %s with its place', async (_, text, says) => {
    const file = join(tempDir(), 'bad.json')
    writeFileSync(file, text)
    const read = async (): Promise<void> => {
      for await (const _ of (await readRecord(file)).entries);
    }
    await expect(read()).rejects.toMatchObject({ message: expect.stringMatching(says), place: { file } })
  })
})

describe('texts of an export', () => {
  it('no cell of text can be a formula, quotes are doubled, numbers stay numbers', () => {
    expect(csvLine(['=1+1', '+x', '-x', '@x', 'a "b", c', -5, -0, null])).toBe(`'=1+1,'+x,'-x,'@x,"a ""b"", c",-5,-0,\r\n`)
  })
  it('local time carries its offset through both changes of Amsterdam in 2031 (30 March, 26 October at 01:00 UTC)', () => {
    const at = (iso: string) => localIso(Date.parse(iso), 'Europe/Amsterdam')
    expect(at('2031-03-30T00:59:59.250Z')).toBe('2031-03-30T01:59:59.250+01:00')
    expect(at('2031-03-30T01:00:00Z')).toBe('2031-03-30T03:00:00.000+02:00')
    expect(at('2031-10-26T00:30:00Z')).toBe('2031-10-26T02:30:00.000+02:00')
    expect(at('2031-10-26T01:30:00Z')).toBe('2031-10-26T02:30:00.000+01:00')
    expect(localIso(Date.parse('2031-05-05T18:00:00Z'), 'America/St_Johns')).toBe('2031-05-05T15:30:00.000-02:30')
    expect(localIso(Date.parse('2031-05-05T18:00:00Z'), 'Asia/Kathmandu')).toBe('2031-05-05T23:45:00.000+05:45')
  })
})
