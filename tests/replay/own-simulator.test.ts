import { describe, expect, it } from 'vitest'
import { createCollector } from '../../server/core/pipeline/collect.ts'
import { createPipeline } from '../../server/core/pipeline/pipeline.ts'
import type { Report } from '../../server/core/report.ts'
import { randomScenario, type ScenarioKind } from '../../server/core/sim/random-scenario.ts'
import { truthOf } from '../../server/core/sim/truth-of.ts'
import { scoreCase } from '../../server/score/score.ts'
import { summarise } from '../../server/score/summary.ts'
import { simulatedBlocks } from '../helpers/simulated-blocks.ts'
import { heron } from '../helpers/skids.ts'

/**
 * The project's own simulator, whose disturbances are not those the detectors' sizes come from: a fixed set, drawn before it was looked at. Rows
 * every 5 s where minutes matter, every 2 s where seconds do. Thresholds are the goals that a pool of hundreds of events is held to, where
 * so few can tell; the 95 % interval of 8 of 8 begins at 68 %.
 */
const drawn: readonly (readonly [kind: ScenarioKind, seed: number, logSeconds: number])[] = [
  ...[11, 12, 13, 14, 15, 16].map((s) => ['fouling', s, 5] as const),
  ['flush-cycle', 11, 5],
  ['clean', 11, 5],
  ['sensor', 11, 5],
  ['exotherm', 11, 2],
  ['exotherm', 12, 2],
]
const skid = heron()
const ran = drawn.map(([kind, seed, logSeconds]) => {
  const scenario = { ...randomScenario(skid, kind, seed), logSeconds }
  const on = { ...skid, scanSeconds: logSeconds, lateSeconds: 2 * logSeconds }
  const pipeline = createPipeline(on)
  const collector = createCollector(on)
  for (const block of simulatedBlocks(on, scenario)) collector.take(pipeline.push({ kind: 'rows', block }))
  collector.take(pipeline.finish())
  const report: Report = collector.report(pipeline)
  const truth = truthOf(skid, scenario)
  return { kind, seed, report, truth, score: scoreCase(truth, report, skid) }
})
const summary = summarise(ran.map((r) => r.score))
const figure = (id: string) => summary.figures.find((f) => f.id === id)!

describe('eleven runs of the own simulator', () => {
  it('every growth is found before its limit and in its segment', () => {
    expect(figure('found').n).toBeGreaterThanOrEqual(8)
    expect(figure('found').value).toBe(1)
    expect(figure('rightSegment').value).toBe(1)
  })

  it('no fouling alarm is false in the hours in control', () => {
    console.log(`own simulator: ${figure('found').n} growths, ${summary.hours.inControl.toFixed(0)} h in control`)
    expect(figure('falseFouling').n).toBe(0)
    expect(summary.hours.inControl).toBeGreaterThan(20)
  })

  it('no figure of detection, onset, forecast, cause, feed ratio or sensor is worse than its goal by more than chance allows (one-sided 5 %)', () => {
    const apart = /^ratioError/
    const worse = summary.figures.filter(
      (f) => f.verdict === 'worse' && !apart.test(f.id) && !f.title.startsWith('true ratio at first alarm'),
    )
    expect(worse.map((f) => `${f.title}: ${f.value} of ${f.n}`)).toEqual([])
  })

  // Worse than on the shared runs, and said so: six readings a step instead of thirty, pressure drops of 0.3 to 0.8 bar on taps of 25 bar.
  it('the ratio is off by less than 0.4 % in the median and 1.5 % in 95 of 100, and a growth of 1 to 4 h is found below 1.06 (goals: 0.25 %, 1 %, 1.035)', () => {
    expect(figure('ratioError.median').value!).toBeLessThan(0.004)
    expect(figure('ratioError.p95').value!).toBeLessThan(0.015)
    const hours = summary.figures.find((f) => f.title.startsWith('true ratio at first alarm') && f.title.endsWith('1 to 4 h'))!
    expect(hours.n).toBeGreaterThanOrEqual(5)
    expect(hours.value!).toBeLessThan(1.06)
  })

  it('no exotherm alarm is false, though the quench takes in a stream straight from its drum', () => {
    expect(figure('falseExotherms').n).toBe(0)
  })

  it('the exotherms are found and a flush is advised in no run without a growing deposit', () => {
    expect(figure('exotherms').n).toBeGreaterThanOrEqual(2)
    expect(figure('exotherms').value).toBe(1)
    for (const r of ran)
      if (r.kind === 'clean' || r.kind === 'sensor' || r.kind === 'exotherm')
        expect(r.report.advice.map((a) => a.action)).not.toContain('flush')
  })

  it('on every growth that reaches its limit a flush was advised before', () => {
    const reached = ran.flatMap((r) =>
      r.truth.fouling.filter((f) => f.limitReached && f.limitAt !== null).map((f) => ({ ...f, report: r.report })),
    )
    expect(reached.length).toBeGreaterThanOrEqual(3)
    for (const f of reached) {
      const flushes = f.report.advice.filter(
        (a) => a.action === 'flush' && a.segments.includes(f.segment) && a.at > f.onset && a.at < f.limitAt!,
      )
      expect(flushes.length, `${f.segment} ${f.onset}`).toBeGreaterThan(0)
    }
  })
})
