import { existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Io } from '../../server/cli/command.ts'
import { scoreCommandWith } from '../../server/cli/score.ts'
import { compareCut, cutsOf } from '../../server/score/look-ahead.ts'
import { findCases, scoreFolder } from '../../server/score/run.ts'
import { readTruth } from '../../server/score/truth-file.ts'
import { alarm, at, point, reportWith, skid, truthWith } from './case.ts'

const dir = mkdtempSync(join(tmpdir(), 'score-'))
const cases = join(dir, 'cases')
beforeAll(() => {
  for (const [name, truth] of [
    ['c-1', JSON.stringify(truthWith())],
    ['c-2', JSON.stringify(truthWith())],
    ['c-3', '{"from": 5}'],
  ] as const) {
    mkdirSync(join(cases, name), { recursive: true })
    writeFileSync(join(cases, name, 'truth.json'), truth)
    writeFileSync(join(cases, name, 'skid.json'), '{}')
  }
})
afterAll(() => rmSync(dir, { recursive: true }))

const honest = reportWith([alarm('fouling', 50), alarm('fouling', 120)], [point(10, 'R1', 1)])
const upTo = (cutMs: number | null) =>
  cutMs === null ? honest : { ...honest, alarms: honest.alarms.filter((a) => Date.parse(a.raised) <= cutMs) }
const deps = { loadSkid: () => skid, analyse: async (_: unknown, __: unknown, o: { cutMs: number | null }) => upTo(o.cutMs) }
const io = () => {
  const said = { out: '', err: '' }
  const it: Io = {
    out: async (t) => {
      said.out += t
    },
    err: (t) => {
      said.err += t
    },
    errIsTerminal: false,
    outIsTerminal: false,
    nowMs: () => 0,
    signal: new AbortController().signal,
  }
  return { said, it }
}

describe('a folder of cases', () => {
  it('scores the cases it can read and names the one it cannot, with its file and key', async () => {
    const run = await scoreFolder(cases, deps, { lookAheadCases: 2, seed: 1 })
    expect(run.cases.map((c) => c.case)).toEqual(['c-1', 'c-2'])
    expect(run.failed).toEqual([
      { case: 'c-3', code: 'SCORE_CASE', message: expect.stringContaining('from: expected an RFC 3339 time, found 5') },
    ])
    expect(run.lookAhead.every((l) => l.same)).toBe(true)
    expect(run.lookAhead.length).toBeGreaterThanOrEqual(2)
  })

  it('prints a table on stdout, the failure on stderr, and exits 1 for it; JSON instead with --json -', async () => {
    const a = io()
    expect(await scoreCommandWith(deps).run([cases], a.it)).toBe(1)
    expect(a.said.out).toMatch(/fouling found before the limit +100 +% +2 /)
    expect(a.said.err).toContain('c-3')
    const b = io()
    await scoreCommandWith(deps).run([cases, '--json', '-', '--no-look-ahead', '0'], b.it)
    expect(JSON.parse(b.said.out)).toMatchObject({ score: 1, summary: { cases: 2 }, lookAhead: [] })
  })

  it('writes --json OUT whole, leaving no part file', async () => {
    const out = join(dir, 'out.json')
    await scoreCommandWith(deps).run([join(cases, 'c-1'), '--json', out], io().it)
    expect(JSON.parse(readFileSync(out, 'utf8')).cases).toHaveLength(1)
    expect(readdirSync(dir).filter((n) => n.includes('.part'))).toEqual([])
  })

  it.each([[[]], [['a', 'b']], [['a', '--bogus']], [['a', '--no-look-ahead', 'x']]])(
    'refuses the command line %j as USAGE',
    async (args) => {
      await expect(scoreCommandWith(deps).run(args, io().it)).rejects.toMatchObject({ code: 'USAGE' })
    },
  )

  it('says that a folder holds no case, and that a folder is not there', async () => {
    await expect(findCases(`${tmpdir()}/no-such-folder-here`)).rejects.toMatchObject({ code: 'FILE_READ' })
    mkdirSync(join(dir, 'empty'))
    await expect(findCases(join(dir, 'empty'))).rejects.toMatchObject({ code: 'SCORE_CASE' })
  })
})

describe('no look-ahead', () => {
  const cutMs = Date.parse(at(100))
  it('sees an alarm that only the whole log raised before the cut', () => {
    expect(compareCut('c', honest, reportWith([], honest.timeline), cutMs, 4000)).toMatchObject({ same: false, compared: 1 })
  })
  it('sees a cause that later data changed', () => {
    const changed = reportWith([{ ...honest.alarms[0]!, cause: 'sensor' }], honest.timeline)
    expect(compareCut('c', honest, changed, cutMs, 4000).same).toBe(false)
  })
  it('sees a timeline point that later data changed', () => {
    expect(compareCut('c', honest, { ...upTo(cutMs), timeline: [point(10, 'R1', 1.1)] }, cutMs, 4000).same).toBe(false)
  })
  it('forgives an alarm that clears after the cut, and the last open scans', () => {
    const cleared = reportWith([{ ...honest.alarms[0]!, cleared: at(150) }, alarm('fouling', 99.99)], honest.timeline)
    expect(compareCut('c', cleared, upTo(cutMs), cutMs, 4000)).toMatchObject({ same: true, compared: 1 })
  })
  it('cuts at the same places for the same seed and case, within the log', () => {
    expect(cutsOf('c', 0, 1000, 5, 3)).toEqual(cutsOf('c', 0, 1000, 5, 3))
    expect(cutsOf('c', 0, 1000, 5, 3)).not.toEqual(cutsOf('d', 0, 1000, 5, 3))
    expect(cutsOf('c', 0, 1000, 50, 3).every((t) => t >= 100 && t <= 900)).toBe(true)
  })
})

const shared = join(import.meta.dirname, '../../../shared/bench-open')
describe('truth files', () => {
  it.each([
    ['no JSON', '{', /not JSON/],
    ['a list', '[]', /expected an object/],
    ['an event without onset', JSON.stringify({ ...truthWith(), fouling: [{ segment: 'R1' }] }), /fouling\[0\]\.onset/],
    ['no ratio', JSON.stringify({ ...truthWith(), ratio: null }), /ratio: expected/],
  ])('refuses %s as SCORE_CASE, saying where', (_, text, message) => {
    expect(() => readTruth(text, 't.json')).toThrow(message)
  })
  it('reads what it wrote', () => {
    expect(readTruth(JSON.stringify(truthWith()), 't.json')).toEqual(truthWith())
  })
  describe.runIf(existsSync(shared))('of the shared bench', () => {
    it('reads all twelve', async () => {
      const found = await findCases(shared)
      expect(found).toHaveLength(12)
      for (const c of found) expect(readTruth(readFileSync(c.truthFile, 'utf8'), c.truthFile).fouling).toBeInstanceOf(Array)
    })
  })
})
