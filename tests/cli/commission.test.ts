import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import type { Commissioning } from '../../server/core/baseline/record.ts'
import { reportText } from '../../server/core/pipeline/collect.ts'
import type { Report } from '../../server/core/report.ts'
import { createEngine } from '../../server/monitor/engine.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { openStore } from '../../server/store/open.ts'
import { benchHeader, benchSkid, benchStartMs, cli } from '../helpers/cli.ts'

const dir = mkdtempSync(join(tmpdir(), 'commission-'))
afterAll(() => rmSync(dir, { recursive: true, force: true }))
const file = (name: string, text: string): string => {
  writeFileSync(join(dir, name), text)
  return join(dir, name)
}
const skid = file('bench.yaml', benchSkid)

/** A row a second: ΔP 0.2 bar at 2 kg/h and ∝ Q^1.1, PT-1 30 mbar high, readings that move a little in a fixed pattern. */
function log(plan: readonly (readonly [minutes: number, kgH: number])[]): string {
  let text = benchHeader
  let i = 0
  for (const [minutes, kgH] of plan)
    for (let k = 0; k < 60 * minutes; k++, i++) {
      const ripple = Math.sin(0.7 * i) + Math.sin(1.9 * i)
      const dp = 0.2 * (kgH / 2) ** 1.1 + 0.03 + 0.0008 * ripple
      const cells = [
        kgH * (1 + 0.001 * Math.sin(2.3 * i)) + 0.001 * (i % 3),
        3 + dp,
        3 + 0.0003 * Math.sin(1.1 * i),
        20 + 0.02 * ripple,
      ]
      text += `${new Date(benchStartMs + 1000 * i).toISOString()},${cells.map((x) => x.toFixed(4)).join(',')},${kgH === 0 ? 'hold' : 'production'}\n`
    }
  return text
}
const good = file('good.csv', log([[8, 0], [8, 1], [8, 1.5], [8, 2], [8, 1]])) // biome-ignore format: a table
const record = join(dir, 'record.json')

describe('clearbore commission', () => {
  it('prints a page to sign with levels, values and the verdict on each criterion, and writes the record', async () => {
    const { code, out, err } = await cli(['commission', good, '--skid', skid, '--json', record])
    expect(err).toBe('')
    expect(out).toMatch(/S1 tube: ACCEPTED/)
    expect(out).toMatch(/accepted +zero +30\.\d mbar at standstill, within 265 mbar \(3 u\)/)
    expect(out).toMatch(/accepted +levels +3 flows, the largest 2\.00 times the least/)
    expect(out).toMatch(/n = 1\.(09|10)\d \(/)
    expect(out).toMatch(/1 segments: 1 accepted, 0 not accepted, 0 without enough data/)
    expect(out).toMatch(/Signature/)
    expect(out).toMatch(/no safety function/)
    expect(code).toBe(0)
    const { segments } = JSON.parse(readFileSync(record, 'utf8')) as Commissioning
    expect(segments[0]!.levels).toHaveLength(4)
    expect(segments[0]!.zero!.mbar).toBeCloseTo(30, 0)
  })

  it('ends with 1 where a segment is not accepted: one flow only', async () => {
    const { code, out } = await cli(['commission', file('one.csv', log([[8, 0], [20, 2]])), '--skid', skid]) // biome-ignore format: one line
    expect(code).toBe(1)
    expect(out).toMatch(/not enough data +levels +1 steady flow of 10 steps found, 3 are needed/)
  })

  it('hands its accepted values to a run: its zero and exponent are there from the start, and the baseline says commissioned', async () => {
    await cli(['commission', good, '--skid', skid, '--json', record])
    const run = file('run.csv', log([[60, 2]]))
    const reports = await Promise.all(
      [[], ['--baseline', record]].map(async (more) => {
        const { code, out } = await cli(['analyse', run, '--skid', skid, '--json', '-', ...more])
        expect(code).toBe(0)
        return (JSON.parse(out) as Report).segments[0]!
      }),
    )
    const [without, withIt] = reports as [Report['segments'][0], Report['segments'][0]]
    expect(without.baseline!.commissioned).toBe(false)
    expect(without.learned).toMatchObject({ zeroMbar: null, flowExponent: { told: false } })
    expect(withIt.baseline!.commissioned).toBe(true)
    expect(withIt.learned!.zeroMbar).toBeCloseTo(30, 0)
    expect(withIt.learned!.flowExponent.told).toBe(true)
    expect(Math.abs(withIt.learned!.flowExponent.value - 1.1)).toBeLessThan(0.05)
    expect(withIt.learned!.flowExponent.sd).toBeLessThan(without.learned!.flowExponent.sd / 2)
    // Flow and viscosity come from the same fittings and curvature: what lifts one exponent lowers the other.
    expect(withIt.learned!.viscosityExponent.value).toBeLessThan(without.learned!.viscosityExponent.value)
  })

  it('is recorded as the first act of an imported run, which reports what analyse --baseline does, again and again', async () => {
    await cli(['commission', good, '--skid', skid, '--json', record])
    const run = file('run.csv', log([[40, 2]]))
    const data = join(dir, 'data')
    const keys = join(dir, 'keys')
    const imported = await cli(['import', run, '--skid', skid, '--data', data, '--keys', keys, '--baseline', record])
    expect(imported).toMatchObject({ code: 0, err: '' })
    const analysed = JSON.parse((await cli(['analyse', run, '--skid', skid, '--json', '-', '--baseline', record])).out) as Report
    const store = openStore(data)
    try {
      const [found] = store.runs.list().filter((r) => r.title === 'run.csv')
      const acts = store.sequence.acts(found!.id)
      expect(acts.map(({ seq, act }) => [seq, act.kind, 'reason' in act ? act.reason : null])).toEqual([
        [0, 'commissioned', 'step test record.json'],
      ])
      const stepsRun = store.runs.list().find((r) => r.id !== found!.id)!.id
      const report = createEngine({ store, run: found!.id, stepsRun, skid: loadSkid(benchSkid, skid) }).report()
      const { segments } = JSON.parse(reportText(report)) as Report
      expect(segments).toEqual(analysed.segments)
      expect(segments[0]!.baseline!.commissioned).toBe(true)
    } finally {
      store.close()
    }
  })

  it('refuses a record that is none, or of another skid, with its file', async () => {
    const bad = file('bad.json', '{"report":1}')
    expect(await cli(['analyse', good, '--skid', skid, '--baseline', bad])).toMatchObject({ code: 1, err: expect.stringMatching(/bad\.json: no record of a step test/) }) // biome-ignore format: one line
    const other = file('other.json', JSON.stringify({ commissioning: 1, skid: 'elsewhere', segments: [] }))
    expect(await cli(['analyse', good, '--skid', skid, '--baseline', other])).toMatchObject({ code: 1, err: expect.stringMatching(/skid 'elsewhere'/) }) // biome-ignore format: one line
    expect((await cli(['commission', good])).code).toBe(2)
    expect((await cli(['commission', '--skid', skid])).code).toBe(2)
  })
})
