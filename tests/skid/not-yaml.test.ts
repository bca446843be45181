import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { MonitorError } from '../../server/core/errors.ts'
import { checkSkid, loadSkid, problemLine } from '../../server/skid/check.ts'
import { base } from './base.ts'

const first = (text: string) => {
  const { skid, problems } = checkSkid(text, 'bad.yaml')
  expect(skid).toBeNull()
  for (const p of problems) expect(problemLine('bad.yaml', p)).toMatch(/^bad\.yaml:[1-9]\d*:[1-9]\d*: [^\n]+; expected [^\n]+$/)
  const p = problems[0]!
  return `${p.line}:${p.column} ${p.message}`
}

describe('a file that is no skid file: one clear line with place and mend', () => {
  it.each([
    ['nothing', '', '1:1 the file is empty'],
    ['blanks', ' \n\n', '1:1 the file is empty'],
    ['comments only', '# skid: heron\n', '1:1 the file is empty'],
    ['a list at the top', '- skid: heron\n', '1:1 the file is a list'],
    ['a word', 'hello world\n', "1:1 the file is the text 'hello world'"],
    ['a number', '42', '1:1 the file is 42'],
    ['a log', 'time,PT-101\n2026-01-01T00:00:00Z,1\n', '1:1 the file is the text'],
    ['bytes', 'skid: heron\ntitle: \u0000\u0001', '2:8 not a text file: character U+0000'],
    ['bytes that are no UTF-8', 'skid: \ufffd', '1:7 not a text file: character U+FFFD'],
    ['tabs', 'skid: heron\ndetection:\n\tfalseAlarmDays: 30\n', '3:1 a tab indents this line'],
    ['two documents', 'skid: a\n---\nskid: b\n', '2:1 2 documents in one file'],
    ['an open quote', 'skid: "heron\ntitle: x\n', '3:1 a bracket, quote or comma is missing'],
    ['an open bracket', 'tags: [ { tag: A }\nstreams: []\n', '2:1'],
    ["a ': ' in a value", 'title: a: b\n', "1:8 a second ': ' on one line"],
    ['a shifted key', 'detection:\n  a: 1\n b: 2\n', '3:1 the indentation fits no level'],
    ['an alias of nothing', 'skid: *x\n', "1:7 '*x' names no anchor"],
    ['a tag of another program', 'skid: !point heron\n', '1:7 not YAML: Unresolved tag: !point'],
    ['a key that is a list', '? [a, b]\n: 1\n', '1:1'],
  ])('%s', (_, text, expected) => {
    expect(first(text)).toContain(expected)
  })

  it('more than 1 MB, before anything is parsed', () => {
    expect(first(`# ${'x'.repeat(1_000_001)}`)).toBe('1:1 the file is larger than 1 MB')
  })

  it('an alias bomb of nine levels (10^9 values), in under a second', () => {
    const levels = Array.from('bcdefghij', (name, i) => `${name}: &${name} [${Array(10).fill(`*${'abcdefghi'[i]}`).join(', ')}]`)
    const started = process.hrtime.bigint()
    expect(first(`a: &a [x]\n${levels.join('\n')}\n`)).toBe('2:8 aliases unfold to too many values')
    expect(Number(process.hrtime.bigint() - started) / 1e9).toBeLessThan(1)
  })

  it('an anchor that holds itself', () => {
    const { problems } = checkSkid('skid: heron\ntags: &t [*t]\n', 'x')
    expect(problems.map((p) => `${p.line}:${p.column} ${p.message}`)).toContain('2:11 tags[0] is a list')
  })

  it.each(['[', '{a: ', '- ', '? ', '[{'])('100 000 × %j, which would overflow the stack of a recursive reader', (piece) => {
    expect(first(piece.repeat(100_000))).toContain('nested more than 60 levels deep')
  })

  it('10 000 different keys, each unknown', () => {
    const text = Array.from({ length: 10_000 }, (_, i) => `k${i}: 1`).join('\n')
    expect(checkSkid(text, 'x').problems.filter((p) => p.message.startsWith('unknown key')).length).toBe(10_000)
  })
})

describe('never an exception', () => {
  const noThrow = (text: string) => {
    const { skid, problems } = checkSkid(text, 'x')
    expect(skid === null).toBe(problems.length > 0)
    const lines = text.split('\n').length
    const misplaced = problems.filter((p) => !(p.line >= 1 && p.line <= lines && p.column >= 1))
    const unclear = problems.filter((p) => /[\n\r]|undefined|\[object/.test(`${p.message}${p.expected}${p.hint}`))
    expect([...misplaced, ...unclear]).toEqual([])
    if (skid === null) expect(() => loadSkid(text, 'x')).toThrow(MonitorError)
  }

  it('on 500 random texts', () => {
    fc.assert(fc.property(fc.string({ unit: 'binary', maxLength: 300 }), noThrow), { numRuns: 500, seed: 1 })
  })

  it('on 500 random pieces of YAML punctuation', () => {
    const piece = fc.constantFrom(
      '[',
      ']',
      '{',
      '}',
      ': ',
      ', ',
      '- ',
      '\n',
      '\n  ',
      '&a ',
      '*a',
      '"',
      "'",
      '|',
      '>',
      '#',
      '? ',
      '!',
      '%',
      '---\n',
      'tags',
      'skid',
      'log',
      '1',
      '~',
      '\t',
      '<<',
    )
    fc.assert(
      fc.property(fc.array(piece, { maxLength: 60 }), (all) => noThrow(all.join(''))),
      { numRuns: 500, seed: 2 },
    )
  })

  it('on the base with 300 random cuts and insertions', () => {
    const cut = fc.tuple(fc.nat(base.length), fc.nat(40), fc.string({ maxLength: 6 }))
    fc.assert(
      fc.property(cut, ([at, length, put]) => noThrow(base.slice(0, at) + put + base.slice(at + length))),
      { numRuns: 300, seed: 3 },
    )
  })

  it('on 200 random JSON values under the right keys', () => {
    const keys = ['skid', 'timeZone', 'scanSeconds', 'log', 'detection', 'tags', 'streams', 'segments', 'alarms']
    const inner = fc.object({
      key: fc.constantFrom(
        'tag',
        'id',
        'fluid',
        'mixture',
        'limits',
        'feedRatio',
        'of',
        'channel',
        'range',
        'files',
        'time',
        'viscosityMPaS',
        'fouling',
      ),
      maxDepth: 4,
    })
    const value = fc.oneof(fc.jsonValue(), inner, fc.array(inner))
    fc.assert(
      fc.property(fc.dictionary(fc.constantFrom(...keys), value), (o) => noThrow(JSON.stringify(o))),
      { numRuns: 200, seed: 4 },
    )
  })
})

describe('loadSkid', () => {
  it('throws SKID_FILE with the first mistake, its place and how many more', () => {
    const text = base
      .replace('scanSeconds: 1', 'scanSeconds: 0')
      .replace('kind: filter', 'kind: sieve')
      .replace('riseToFindPct: 5', 'riseToFindPct: 0')
    let error: unknown
    try {
      loadSkid(text, 'dir/plover.yaml')
    } catch (e) {
      error = e
    }
    if (!(error instanceof MonitorError)) throw new Error('a MonitorError wanted', { cause: error })
    expect(error.code).toBe('SKID_FILE')
    expect(error.place).toEqual({ file: 'dir/plover.yaml', line: 4, column: 14 })
    expect(error.line()).toBe(
      'dir/plover.yaml:4:14: scanSeconds is 0; expected a number from 0.1 to 60 (seconds) (and 2 more mistakes); clearbore check-skid FILE lists them all',
    )
  })
})
