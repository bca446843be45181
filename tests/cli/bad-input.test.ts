import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeEach, describe, expect, it } from 'vitest'
import { benchHeader, benchRows, benchSkid, benchStartMs, cli } from '../helpers/cli.ts'
import { utf16 } from '../ingest/csv/helpers.ts'

const dir = mkdtempSync(join(tmpdir(), 'bad-input-'))
afterAll(() => rmSync(dir, { recursive: true }))
beforeEach(() => {
  rmSync(dir, { recursive: true })
  mkdirSync(dir)
  writeFileSync(path('skid.yaml'), benchSkid)
})
const path = (name: string): string => join(dir, name)
const iso = (i: number): string => new Date(benchStartMs + 1000 * i).toISOString()

/** Analyses a log of these bytes into a report file. */
const analyse = async (log: string | Uint8Array, more: readonly string[] = []) => {
  writeFileSync(path('run.csv'), log)
  return cli(['analyse', path('run.csv'), '--skid', path('skid.yaml'), '--json', path('report.json'), ...more])
}
const report = () => JSON.parse(readFileSync(path('report.json'), 'utf8'))

/** One line on stderr: the file, the line where there is one, what was found, the mend. Nothing on stdout, no file beside the inputs. */
function refused(
  said: { code: number; out: string; err: string },
  message: RegExp,
  inputs = ['run.csv', 'skid.yaml'],
  code = 1,
): void {
  expect(said.err).toMatch(message)
  expect(said.err).toMatch(/^[^\n]+; [^\n]+\n$/)
  expect(said.err).not.toMatch(/\bat .*:\d+:\d+\)?$/m)
  expect([said.code, said.out]).toEqual([code, ''])
  expect(readdirSync(dir).sort()).toEqual([...inputs].sort())
}

describe('a log that cannot be read ends analyse with exit code 1 and one line, and leaves no report behind', () => {
  const cases: readonly (readonly [what: string, log: string | Uint8Array, line: RegExp])[] = [
    ['an empty file', '', /^run\.csv: found an empty file, expected a header/],
    ['a file cut off within its header', 'time,FT-1,PT', /^run\.csv:1: found a header and no rows/],
    ['a file cut off behind its header', benchHeader, /^run\.csv:1: found a header and no rows/],
    ['a binary file', Uint8Array.from({ length: 5000 }, (_, i) => (i * 7919) % 256), /^run\.csv(:\d+)?: found .*expected/],
    ['a zipped file', Uint8Array.from([0x1f, 0x8b, 8, 0, 0, 1, 2, 3]), /^run\.csv: found a gzip archive.*gunzip/],
    ['a wrong delimiter', (benchHeader + benchRows(5)).replaceAll(',', '|'), /^run\.csv:1: found .*separated by "\|", expected comma, semicolon or tab/],
    ['no header that matches a tag', `time,P1,P2\n${iso(0)},1,2\n`, /^run\.csv:1: found no column of a tag of this skid: "time", "P1", "P2"; expected "FT-1"/],
    ['no header at all', benchRows(3), /^run\.csv:1: found values in the first row/],
    ['time going backwards', benchHeader + benchRows(60).trim().split('\n').reverse().join('\n'), /^run\.csv:2:1: .*time runs backwards/],
    ['a date format that changes', `${benchHeader}${benchRows(2)}05/05/2031 18:00:02,6,7,5,-20,production\n`, /^run\.csv:4:1: .*changes here: "05\/05\/2031 18:00:02" \(dd\/MM\/yyyy HH:mm:ss or .*\), expected iso/],
    ['doubled columns', `time,FT-1,PT-1,PT-1\n${iso(0)},6,7,7\n`, /^run\.csv:1:4: found two columns for tag PT-1, columns 3 and 4/],
    ['a line of 10 MB', `${benchHeader}${benchRows(1)}${iso(1)},${'1'.repeat(10_000_000)}\n`, /^run\.csv:3: found a line longer than 1 MiB/],
    ['rows that do not fit the header', `${benchHeader}${Array.from({ length: 2000 }, (_, i) => `${iso(i)},6\n`).join('')}`, /^run\.csv:2: .*2 cells, expected 6/],
  ] // biome-ignore format: a table
  it.each(cases)('%s', async (_, log, line) => {
    refused(await analyse(log), line)
  })

  it('elapsed seconds without --start', async () => {
    refused(await analyse(benchHeader + benchRows(3, 0, (i) => i.toFixed(1))), /^run\.csv:2:1: found elapsed seconds .*--start/)
  })

  it('a second file that is bad, though the first is good', async () => {
    writeFileSync(path('b.csv'), 'time|FT-1\n1|2\n')
    refused(await analyse(benchHeader + benchRows(300), [path('b.csv')]), /^b\.csv:1: found .*separated by "\|"/, [
      'b.csv',
      'run.csv',
      'skid.yaml',
    ])
  })

  it('keeps the report that stood there before', async () => {
    writeFileSync(path('report.json'), 'yesterday')
    expect((await analyse('')).code).toBe(1)
    expect(readFileSync(path('report.json'), 'utf8')).toBe('yesterday')
  })
})

describe('odd data in a good log is counted, not taken and not fatal', () => {
  it('a last line cut off in the middle: one broken row, named with its line', async () => {
    const { code, out } = await analyse(`${benchHeader}${benchRows(300)}${iso(300)},6.0`)
    expect(code).toBe(0)
    expect(out).toContain('run.csv: 1 broken rows not used, first at line 302 (2 cells, expected 6)')
    expect(report().run.rows.total).toBe(300)
  })

  // SIG-02, USR-07
  it('a column of NaN: 300 of 300 bad, the ratio null and never a number', async () => {
    const { code, err } = await analyse((benchHeader + benchRows(300)).replaceAll(/^(\d[^,]*,[^,]*),[^,]*/gm, '$1,NaN'))
    expect([code, err]).toEqual([0, ''])
    const { run, segments } = report()
    expect(run.tags.find((t: { tag: string }) => t.tag === 'PT-1')).toMatchObject({ samples: 300, good: 0, bad: 300 })
    expect(segments[0]).toMatchObject({ ratio: { last: null, max: null }, baseline: null, onset: null, forecast: null })
  })

  it('1e308 in each column once: bad readings, and every number of the report finite and below 1e6', async () => {
    const rows = benchRows(400).trim().split('\n')
    for (let c = 1; c <= 4; c++) {
      const cells = rows[200 + 40 * c - 40]!.split(',')
      cells[c] = c % 2 === 0 ? '-1e308' : '1e308'
      rows[200 + 40 * c - 40] = cells.join(',')
    }
    const { code, err } = await analyse(benchHeader + rows.join('\n'))
    expect([code, err]).toEqual([0, ''])
    for (const t of report().run.tags) expect(t).toMatchObject({ samples: 400, bad: 1 })
    const numbers = [...readFileSync(path('report.json'), 'utf8').matchAll(/": (-?[\d.e+-]+)/g)].map((m) => Number(m[1]))
    expect(numbers.length).toBeGreaterThan(20)
    expect(Math.max(...numbers.map(Math.abs))).toBeLessThan(1e6)
  })

  it('UTF-16 with its mark, either way round, gives the report of the same text in UTF-8, byte for byte', async () => {
    const text = benchHeader + benchRows(300)
    await analyse(text)
    const expected = readFileSync(path('report.json'), 'utf8')
    for (const bigEndian of [false, true]) {
      expect((await analyse(utf16(`\ufeff${text}`, bigEndian))).code).toBe(0)
      expect(readFileSync(path('report.json'), 'utf8')).toBe(expected)
    }
  })
})

describe('a skid file that is none ends with exit code 1 and one line with its place', () => {
  const bomb = `a: &a [x]\n${Array.from('bcdefghij', (n, i) => `${n}: &${n} [${Array(10).fill(`*${'abcdefghi'[i]}`).join(', ')}]`).join('\n')}\n`
  it.each([
    ['that is not YAML', 'skid: [bench\ntitle: : x\n', /skid\.yaml:\d+:\d+: .*; expected /],
    ['that is a log', benchHeader + benchRows(3), /skid\.yaml:1:1: the file is the text/],
    ['that is binary', 'skid: \u0000\u0001\u0002', /skid\.yaml:1:7: not a text file: character U\+0000/],
    ['that is an alias bomb of 10^9 values', bomb, /skid\.yaml:2:8: aliases unfold to too many values/],
    ['that is nested 100 000 deep', '['.repeat(100_000), /skid\.yaml:1:\d+: nested more than 60 levels deep/],
    ['with a misspelt key', benchSkid.replace('scanSeconds', 'scanSecond'), /skid\.yaml:4:1: unknown key 'scanSecond'; .*did you mean 'scanSeconds'/],
  ] as const)('%s', async (_, skid, line) => {
    writeFileSync(path('skid.yaml'), skid)
    refused(await analyse(benchHeader + benchRows(10)), line)
  }) // biome-ignore format: a table

  it('settings and events files too', async () => {
    writeFileSync(path('more.txt'), '- 1\n')
    const inputs = ['more.txt', 'run.csv', 'skid.yaml']
    refused(
      await analyse(benchHeader + benchRows(10), ['--settings', path('more.txt')]),
      /more\.txt:1:1: the file is a list; expected/,
      inputs,
    )
    refused(
      await analyse(benchHeader + benchRows(10), ['--events', path('more.txt')]),
      /^more\.txt:1: found the columns "- 1", expected time,kind/,
      inputs,
    )
  })
})

describe('exit codes', () => {
  const log = benchHeader + benchRows(10)

  it('1 for a file that is not there, whichever it is, with its path', async () => {
    writeFileSync(path('run.csv'), log)
    for (const [args, name] of [
      [[path('no.csv'), '--skid', path('skid.yaml')], 'no.csv'],
      [[path('run.csv'), '--skid', path('no.yaml')], 'no.yaml'],
      [[path('run.csv'), '--skid', path('skid.yaml'), '--settings', path('no.set')], 'no.set'],
      [[path('run.csv'), '--skid', path('skid.yaml'), '--events', path('no.ev')], 'no.ev'],
      [[dir, '--skid', path('skid.yaml')], ''],
    ] as const) {
      const said = await cli(['analyse', ...args, '--json', path('report.json')])
      refused(said, /./)
      expect(said.err.startsWith(join(dir, name))).toBe(true)
    }
  })

  it.each([
    ['an unknown command', ['analyze', 'run.csv'], /unknown command 'analyze'; did you mean 'analyse'\?/],
    ['an unknown option', ['analyse', 'run.csv', '--skid', 'skid.yaml', '--jsn', 'x'], /--jsn.*; clearbore analyse --help/],
    ['an option without its value', ['analyse', 'run.csv', '--skid'], /--skid.*; clearbore analyse --help/],
    ['no skid file', ['analyse', 'run.csv'], /analyse needs --skid FILE/],
    ['no log', ['analyse', '--skid', 'skid.yaml'], /analyse needs at least one log/],
    ['a time that is none', ['analyse', 'RUN', '--skid', 'SKID', '--from', 'yesterday'], /--from must be a time such as 2031-05-05T18:00:00Z, got 'yesterday'/],
  ] as const)('2 for %s', async (_, args, line) => {
    writeFileSync(path('run.csv'), log)
    refused(await cli(args.map((a) => ({ RUN: path('run.csv'), SKID: path('skid.yaml') })[a as string] ?? a)), line, ['run.csv', 'skid.yaml'], 2)
  }) // biome-ignore format: a table

  it('2 for no command at all, with the list of commands; 0 for --help everywhere', async () => {
    expect(await cli([])).toMatchObject({ code: 2, err: '' })
    const overview = await cli(['--help'])
    expect(overview).toMatchObject({ code: 0, err: '' })
    const names = [...overview.out.matchAll(/^ {2}([a-z-]+) {2,}/gm)].map((m) => m[1]!)
    expect(names).toContain('analyse')
    for (const name of names)
      expect(await cli([name, '--help'])).toMatchObject({
        code: 0,
        err: '',
        out: expect.stringContaining(`Usage: clearbore ${name}`),
      })
  })

  it('3 for a report that cannot be written: a folder that is not there, a folder in its place', async () => {
    writeFileSync(path('run.csv'), log)
    mkdirSync(path('taken'))
    for (const target of ['no/report.json', 'taken']) {
      const said = await cli(['analyse', path('run.csv'), '--skid', path('skid.yaml'), '--json', path(target)])
      refused(said, /: cannot /, ['run.csv', 'skid.yaml', 'taken'], 3)
      expect(said.err.startsWith(path(target))).toBe(true)
    }
    expect(readdirSync(path('taken'))).toEqual([])
  })
})
