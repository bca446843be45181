import { expect, it } from 'vitest'
import { createCollector } from '../../server/core/pipeline/collect.ts'
import { createPipeline } from '../../server/core/pipeline/pipeline.ts'
import { randomScenario } from '../../server/core/sim/random-scenario.ts'
import { truthOf } from '../../server/core/sim/truth-of.ts'
import { type CaseScore, scoreCase } from '../../server/score/score.ts'
import { summarise } from '../../server/score/summary.ts'
import { heron } from '../core/sim/skids.ts'
import { simulatedBlocks } from '../helpers/simulated-blocks.ts'

it('keeps false fouling and false exotherm alarms to 1.5 per 1000 h each, within chance, over 200 h of clean running with confounders', () => {
  const cases: CaseScore[] = []
  let hours = 0
  for (let seed = 1000; hours < 200; seed++) {
    const scenario = { ...randomScenario(heron, 'clean', seed), logSeconds: 5 }
    const skid = { ...heron, scanSeconds: 5, lateSeconds: 10 }
    const pipeline = createPipeline(skid)
    const collector = createCollector(skid)
    for (const block of simulatedBlocks(skid, scenario)) collector.take(pipeline.push({ kind: 'rows', block }))
    collector.take(pipeline.finish())
    const score = scoreCase(truthOf(skid, scenario), collector.report(pipeline), skid)
    cases.push(score)
    hours += score.hours.inControl
  }
  const summary = summarise(cases)
  for (const id of ['falseFouling', 'foulingLike', 'falseExotherms', 'falseFeedRatio', 'falseSensors']) {
    const figure = summary.figures.find((f) => f.id === id)!
    console.log(`${figure.title}: ${figure.n} in ${figure.hours!.toFixed(0)} h`)
  }
  for (const f of summary.falseFouling) console.log(`  ${f.case} ${f.segment} ${f.raised} named ${f.named}`)
  for (const f of summary.falseExotherms) console.log(`  ${f.case} exotherm ${f.raised}`)
  for (const id of ['falseFouling', 'falseExotherms'])
    expect(summary.figures.find((f) => f.id === id)!.verdict, id).not.toBe('worse')
}, 1_800_000)
