import { existsSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { analyseLog } from '../../server/analyse.ts'
import { createCollector } from '../../server/core/pipeline/collect.ts'
import { createPipeline } from '../../server/core/pipeline/pipeline.ts'
import type { Report } from '../../server/core/report.ts'
import { logText } from '../../server/core/sim/log-text.ts'
import { randomScenario, type ScenarioKind } from '../../server/core/sim/random-scenario.ts'
import type { Scenario } from '../../server/core/sim/scenario.ts'
import { truthOf } from '../../server/core/sim/truth-of.ts'
import type { Skid } from '../../server/core/skid.ts'
import { scoreCase } from '../../server/score/score.ts'
import { summarise } from '../../server/score/summary.ts'
import { heron } from '../core/sim/skids.ts'
import { simulatedBlocks } from '../helpers/simulated-blocks.ts'

function analysed(skid: Skid, scenario: Scenario): Report {
  const pipeline = createPipeline(skid)
  const collector = createCollector(skid)
  for (const block of simulatedBlocks(skid, scenario)) collector.take(pipeline.push({ kind: 'rows', block }))
  collector.take(pipeline.finish())
  return collector.report(pipeline)
}

/** The grid of the analysis follows the logger. */
const onGrid = (skid: Skid, scenario: Scenario): Skid => ({
  ...skid,
  scanSeconds: scenario.logSeconds,
  lateSeconds: 2 * scenario.logSeconds,
})

/** The first seeds there are, a row every 5 s to keep it short. */
const drawn: readonly (readonly [ScenarioKind, number])[] = [
  ['clean', 1],
  ['fouling', 1],
  ['fouling', 2],
  ['flush-cycle', 1],
]
const scenarios = drawn.map(([kind, seed]) => ({ ...randomScenario(heron, kind, seed), logSeconds: 5 }))

describe('the pipeline on runs of the own simulator', () => {
  it('says of a simulated run in memory what it says of the log written from it', async () => {
    const scenario = { ...randomScenario(heron, 'fouling', 2), logSeconds: 10 }
    const text = new TextEncoder().encode([...logText(heron, scenario).lines()].join(''))
    const source = { name: 'run.csv', chunks: (async function* () { yield text })() } // biome-ignore format: one line
    const { report } = await analyseLog({ skid: heron, sources: [source] })
    expect({ ...analysed(heron, scenario), notes: [] }).toEqual({ ...report, notes: [] })
  })

  // FOU-07
  it('finds the four growths of four runs before their limits, in the right segment, and raises no false fouling alarm in some 14 h in control', () => {
    const summary = summarise(scenarios.map((s) => scoreCase(truthOf(heron, s), analysed(onGrid(heron, s), s), heron)))
    const figure = (id: string) => summary.figures.find((f) => f.id === id)!
    expect(figure('found')).toMatchObject({ value: 1, n: 4 })
    expect(figure('rightSegment').value).toBe(1)
    expect(figure('falseFouling')).toMatchObject({ value: 0, n: 0 })
    expect(summary.hours.inControl).toBeGreaterThan(13)
  })
})

const shared = join(import.meta.dirname, '../../../shared/bench-open')
describe.runIf(existsSync(shared))('the simulator on the skids of the shared bench', () => {
  it('runs each of the twelve skid files', async () => {
    const { loadSkid } = await import('../../server/skid/check.ts')
    for (let n = 1; n <= 12; n++) {
      const file = join(shared, `o-${String(n).padStart(3, '0')}`, 'skid.json')
      const skid = loadSkid(readFileSync(file, 'utf8'), file)
      const rows = [
        ...logText(skid, {
          ...randomScenario(skid, 'clean', n),
          hours: 0.05,
          events: [],
          logSeconds: 5,
          startupMinutes: 0,
        }).lines(),
      ]
      expect(rows).toHaveLength(37)
    }
  })
})
