import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import type { Io } from '../../server/cli/command.ts'
import { simulateCommand } from '../../server/cli/simulate.ts'
import { cell, phases } from '../../server/core/reading.ts'
import { randomScenario } from '../../server/core/sim/random-scenario.ts'
import { simulate } from '../../server/core/sim/simulator.ts'
import { readLog } from '../../server/ingest/csv/read-log.ts'
import { readTruth } from '../../server/score/truth-file.ts'
import { heron } from '../core/sim/skids.ts'

const dir = mkdtempSync(join(tmpdir(), 'simulate-'))
afterAll(() => rmSync(dir, { recursive: true }))
const skid = join(import.meta.dirname, '../../fixtures/skids/heron.yaml')
const path = (name: string) => join(dir, name)

async function run(args: readonly string[], terminal = false) {
  const said = { out: '', err: '' }
  let clock = 0
  const io: Io = {
    out: async (t) => {
      said.out += t
    },
    err: (t) => {
      said.err += t
    },
    errIsTerminal: terminal,
    outIsTerminal: false,
    nowMs: () => (clock += 300),
    signal: new AbortController().signal,
  }
  return { code: await simulateCommand.run(args, io), ...said }
}
const base = ['--skid', skid, '--seed', '4']

describe('simulate', () => {
  it('writes log and truth, the same bytes each time, nothing else in the folder', async () => {
    const args = (n: number) => [
      ...base,
      '--hours',
      '0.4',
      '--fouling',
      'R1:saturating:0.1:0.2',
      '--exotherm',
      'R1:ignition:0.3',
      '--out',
      path(`a${n}.csv`),
      '--truth',
      path(`a${n}.json`),
    ]
    await run(args(1))
    await run(args(2))
    expect(readFileSync(path('a1.csv'))).toEqual(readFileSync(path('a2.csv')))
    expect(readdirSync(dir).sort()).toEqual(['a1.csv', 'a1.json', 'a2.csv', 'a2.json'])
    const truth = readTruth(readFileSync(path('a1.json'), 'utf8'), 'a1.json')
    expect(truth.fouling[0]).toMatchObject({ segment: 'R1', model: 'saturating', onset: '2031-05-05T18:06:00.000Z' })
    expect(truth.exotherms[0]).toMatchObject({ segment: 'R1', kind: 'ignition', start: '2031-05-05T18:18:00.000Z' })
    expect(truth.category).toBe('fouling')
  })

  it('writes a log that the reader of logs gives back value for value, phases included', async () => {
    await run([...base, '--scenario', 'random:sensor', '--out', path('b.csv')])
    const words: string[] = [...phases]
    const { blocks, tally } = readLog({ name: 'b.csv', chunks: (async function* () { yield readFileSync(path('b.csv')) })() }, { skid: heron, words, startMs: null }) // biome-ignore format: one line
    const rows = simulate(heron, randomScenario(heron, 'sensor', 4))
    let wrong = 0
    let count = 0
    for await (const block of blocks) {
      for (let i = 0; i < block.rows; i++) {
        const row = rows.next().value!
        count++
        if (block.tMs[i] !== row.tMs) wrong++
        row.values.forEach((v, k) => {
          const at = i * block.width + k
          if (v === null ? block.codes[at] !== cell.missing : block.codes[at] !== cell.value || block.values[at] !== v) wrong++
        })
        if (words[block.values[i * block.width + heron.tags.length]!] !== row.phase) wrong++
      }
    }
    expect({ wrong, broken: tally.broken, left: rows.next().done }).toEqual({ wrong: 0, broken: 0, left: true })
    expect(count).toBeGreaterThan(2000)
  })

  it('writes to stdout with --out -, and takes --from, --log-seconds and --event', async () => {
    const { out, err, code } = await run([
      ...base,
      '--hours',
      '0.1',
      '--out',
      '-',
      '--from',
      '2030-01-02T03:04:05Z',
      '--log-seconds',
      '10',
      '--event',
      'flowStep:at=0.05,factor=1.3',
    ])
    const lines = out.trim().split('\n')
    expect(lines).toHaveLength(37)
    expect(lines[1]).toMatch(/^2030-01-02T03:04:05\.000Z,/)
    const flow = (i: number) => Number(lines[i]!.split(',')[1])
    expect(flow(36) / flow(10)).toBeCloseTo(1.3, 1)
    expect([code, err]).toEqual([0, ''])
  })

  it('takes a scenario file, and says what is wrong in one with its name', async () => {
    const file = path('s.json')
    writeFileSync(file, JSON.stringify({ seed: 3, hours: 0.1, startupMinutes: 2, events: [{ kind: 'gasSlug', atHours: 0.05 }] }))
    const { out } = await run(['--skid', skid, '--scenario', file, '--out', '-'])
    expect(out.split('\n')[1]).toMatch(/,hold$/)
    for (const [text, message] of [
      ['{', /not JSON/],
      ['{"hour": 3}', /no 'hour'/],
      ['{"events": [{"kind": "gasSlugs"}]}', /unknown kind of event 'gasSlugs'/],
      ['{"events": [{"kind": "flowStep", "atHours": 1}]}', /needs 'factor'/],
      ['{"events": [{"kind": "flowStep", "atHours": "1", "factor": 2}]}', /atHours of flowStep must be a number/],
    ] as const) {
      writeFileSync(file, text)
      await expect(run(['--skid', skid, '--scenario', file, '--out', '-'])).rejects.toMatchObject({
        code: 'SIM_OPTION',
        message,
        place: { file },
      })
    }
  })

  it('runs the demo: R1 begins to foul after 25 min and meets its limit some hours later, a small exotherm on the way', async () => {
    await run(['--skid', skid, '--scenario', 'demo', '--log-seconds', '60', '--out', path('d.csv'), '--truth', path('d.json')])
    const truth = readTruth(readFileSync(path('d.json'), 'utf8'), 'd.json')
    expect(truth.fouling).toHaveLength(1)
    expect(truth.fouling[0]).toMatchObject({ segment: 'R1', onset: '2031-05-05T18:25:00.000Z', limitReached: true })
    const hours = (Date.parse(truth.fouling[0]!.limitAt) - Date.parse(truth.fouling[0]!.onset)) / 3_600_000
    expect(hours).toBeGreaterThan(2.5)
    expect(hours).toBeLessThan(6)
    expect(truth.exotherms).toHaveLength(1)
  })

  it.each([
    ['no skid', ['--hours', '1', '--seed', '1', '--out', '-'], /--skid/],
    ['no seed', ['--skid', skid, '--hours', '1', '--out', '-'], /--seed/],
    ['an unknown option', [...base, '--huors', '1', '--out', '-'], /huors/],
    ['a segment that is not there', [...base, '--hours', '1', '--out', '-', '--fouling', 'R9'], /unknown segment 'R9'/],
    ['a law that is not there', [...base, '--hours', '1', '--out', '-', '--fouling', 'R1:liner'], /unknown growth law 'liner'/],
    ['an event beyond the end', [...base, '--hours', '1', '--out', '-', '--event', 'flowStep:at=3,factor=1.1'], /outside the run/],
    ['an event of no kind', [...base, '--hours', '1', '--out', '-', '--event', 'flowstp:at=1'], /unknown kind of event/],
    ['hours that are no number', [...base, '--hours', 'ten', '--out', '-'], /--hours needs a number/],
    ['a time that is none', [...base, '--hours', '1', '--out', '-', '--from', 'yesterday'], /RFC 3339/],
    ['a seed with a fraction', ['--skid', skid, '--hours', '1', '--seed', '1.5', '--out', '-'], /whole number/],
  ])('refuses %s as a mistake of the command line', async (_, args, message) => {
    await expect(run(args)).rejects.toMatchObject({ code: 'USAGE', message })
  })

  it('names the nearest when a name is near: --fouling R1:liner means linear, --huors means hours', async () => {
    await expect(run([...base, '--hours', '1', '--out', '-', '--fouling', 'R1:liner'])).rejects.toMatchObject({
      hint: expect.stringContaining("'linear'"),
    })
    await expect(run([...base, '--huors', '1', '--out', '-'])).rejects.toMatchObject({ hint: "did you mean '--hours'?" })
  })

  it('leaves no half file behind when the truth cannot be written, and says which file', async () => {
    const args = [...base, '--hours', '0.1', '--out', path('e.csv'), '--truth', path('no/such/folder/e.json')]
    await expect(run(args)).rejects.toMatchObject({ code: 'FILE_WRITE', place: { file: path('no/such/folder/e.json') } })
    expect(existsSync(path('e.csv'))).toBe(false)
    expect(readdirSync(dir).filter((n) => n.includes('.part'))).toEqual([])
  })

  it('tells a terminal share, rate and time left, and cleans the line up', async () => {
    const { err } = await run([...base, '--hours', '1', '--out', path('f.csv')], true)
    expect(err).toMatch(/\rsimulate \d+ % \(\d+ of 3600 rows, [\d.e+]+ rows\/s, \d+ s left\)/)
    expect(err.endsWith('\r')).toBe(true)
  })
})
