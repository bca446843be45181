import { existsSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { analyseLog, fileSource } from '../../server/analyse.ts'
import type { Report } from '../../server/core/report.ts'
import type { Skid } from '../../server/core/skid.ts'
import { scoreFolder } from '../../server/score/run.ts'
import { scoreTable } from '../../server/score/table.ts'
import { loadSkid } from '../../server/skid/check.ts'

/** The own-data twin of these claims is own-simulator.test.ts beside this file. */
const shared = join(import.meta.dirname, '../../../shared/bench-open')
if (!existsSync(shared))
  it('../shared is not here: its twelve runs are not scored in this run', () => expect(existsSync(shared)).toBe(false))

describe.runIf(existsSync(shared))('the twelve runs of ../shared/bench-open', () => {
  const reports = new Map<string, Report>()
  const analyse = async ({ name, logFile }: { name: string; logFile: string }, skid: Skid, { cutMs }: { cutMs: number | null }) => {
    const { report } = await analyseLog({ skid, sources: [fileSource(logFile)], toMs: cutMs })
    if (cutMs === null) reports.set(name, report)
    return report
  }
  const scored = existsSync(shared) ? scoreFolder(shared, { loadSkid, analyse }, { lookAheadCases: 2, seed: 1 }) : null
  const figure = async (id: string) => (await scored!).summary.figures.find((f) => f.id === id)!

  it('all seven growths are found before their limit, in the right segment, with 0 false fouling alarms in 60 h in control', async () => {
    const run = await scored!
    console.log(scoreTable(run))
    expect(run.failed).toEqual([])
    expect(await figure('found')).toMatchObject({ value: 1, n: 7 })
    expect((await figure('rightSegment')).value).toBe(1)
    expect(await figure('falseFouling')).toMatchObject({ value: 0, n: 0 })
    expect(run.summary.hours.inControl).toBeGreaterThan(59)
  }, 120_000)

  it('no figure is worse than its target by more than chance allows', async () => {
    expect((await scored!).summary.figures.filter((f) => f.verdict === 'worse').map((f) => `${f.title}: ${f.value}`)).toEqual([])
  }, 120_000)

  it('all five exotherms are found, with none false, and both dosing errors are told as feed ratio', async () => {
    const run = await scored!
    const exotherms = run.cases.flatMap((c) => c.exotherms)
    expect(exotherms).toHaveLength(5)
    expect((await figure('exotherms')).value).toBe(1)
    expect((await figure('falseExotherms')).n).toBe(0)
    expect(await figure('feedErrors')).toMatchObject({ value: 1, n: 2 })
  }, 120_000)

  it('both tap drifts are flagged as sensor with the tag that drifts, and no sensor alarm is false', async () => {
    expect(await figure('sensors.soft')).toMatchObject({ value: 1, n: 2 })
    expect((await figure('falseSensors')).n).toBe(0)
  }, 120_000)

  it('no advice of kind flush where no deposit grows: runs 005 to 011', async () => {
    await scored!
    const flushes = [...reports].filter(([name]) => Number(name.slice(2)) >= 5 && Number(name.slice(2)) <= 11).flatMap(([name, r]) => r.advice.filter((a) => a.action === 'flush').map((a) => `${name} ${a.at}`)) // biome-ignore format: one line
    expect(flushes).toEqual([])
  }, 120_000)

  it('a log cut short tells the same of everything before the cut, on two runs cut at two places each', async () => {
    const { lookAhead } = await scored!
    expect(lookAhead).toHaveLength(4)
    expect(lookAhead.filter((l) => !l.same)).toEqual([])
  }, 120_000)
})
