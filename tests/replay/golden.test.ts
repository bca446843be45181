import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import type { Report } from '../../server/core/report.ts'
import { readTruth } from '../../server/score/truth-file.ts'
import { cli } from '../helpers/cli.ts'
import { fixture } from '../helpers/skids.ts'

interface Run {
  readonly name: string
  readonly skid: string
  readonly simulate: readonly string[]
}
const text = (name: string): string => readFileSync(fixture(name), 'utf8')
const runs = JSON.parse(text('runs/runs.json')) as Run[]
const readme = text('../README.md')
const ms = Date.parse

// A verdict that moves on purpose: `node scripts fixtures` writes all of these anew; the commit says before and after.
describe.each(runs)('the recorded run $name', ({ name, skid, simulate }) => {
  const log = fixture(`runs/${name}.csv`)
  const skidFile = fixture(`skids/${skid}.yaml`)
  const expected = text(`runs/${name}.expected.json`)

  // USR-13
  it('gives its recorded report, byte for byte', async () => {
    expect(await cli(['analyse', log, '--skid', skidFile, '--json', '-'])).toEqual({ code: 0, out: expected, err: '' })
  })

  it('is what README.md shows: the command that made it and what analyse prints of it', async () => {
    expect(readme.replaceAll(/\\\n\s*/g, '')).toContain(`--skid fixtures/skids/${skid}.yaml ${simulate.join(' ')} --out`)
    const { out } = await cli(['analyse', log, '--skid', skidFile])
    expect(readme).toContain(
      `\`\`\`\n$ npx clearbore analyse fixtures/runs/${name}.csv --skid fixtures/skids/${skid}.yaml\n${out}\`\`\``,
    )
  })

  it('comes out of simulate again, byte for byte, with its truth', async () => {
    const { out, code } = await cli(['simulate', '--skid', skidFile, ...simulate, '--out', '-'])
    expect([code, out === readFileSync(log, 'utf8')]).toEqual([0, true])
  })

  // FOU-08
  it('weighs the neighbouring taps, the streams and a lone step against the deposit, each as excluded or not', () => {
    const { evidence } = (JSON.parse(expected) as Report).alarms.find((a) => a.kind === 'fouling')!
    expect(evidence.for.length).toBeGreaterThan(0)
    for (const rival of ['a single step in R1', 'zero of PT-111', 'zero of PT-112', 'stream A', 'stream B'])
      expect([...evidence.against, ...evidence.notExcluded].filter((e) => e.includes(rival))).toHaveLength(1)
  })

  it('tells the truth of its simulation: the onset inside its interval, the limit inside most forecasts of half an hour and more ahead, one exotherm within 30 s', () => {
    const report = JSON.parse(expected) as Report
    const truth = readTruth(text(`runs/${name}.truth.json`), name)
    const deposit = truth.fouling[0]!
    const limit = ms(deposit.limitAt)
    const alarms = report.alarms.filter((a) => a.kind === 'fouling' || a.kind === 'exotherm')
    expect(alarms.map((a) => [a.kind, a.segment, a.cause])).toEqual([
      ['fouling', deposit.segment, 'fouling'],
      ['exotherm', truth.exotherms[0]!.segment, null],
    ])
    const [fouling, exotherm] = alarms
    for (const onset of [fouling!.onset!, report.segments.find((s) => s.segment === deposit.segment)!.onset!]) {
      expect(ms(onset.low)).toBeLessThanOrEqual(ms(deposit.onset))
      expect(ms(onset.high)).toBeGreaterThanOrEqual(ms(deposit.onset))
    }
    expect(ms(exotherm!.raised) - ms(truth.exotherms[0]!.start)).toBeLessThan(30_000)
    const asked = report.timeline.filter(
      (p) => p.segment === deposit.segment && p.forecast !== null && ms(p.at) < limit - 1_800_000,
    )
    const right = asked.filter(({ forecast }) => ms(forecast!.low) <= limit && ms(forecast!.high) >= limit)
    expect(asked.length).toBeGreaterThan(8)
    expect(right.length / asked.length).toBeGreaterThan(0.5)
  })
})
