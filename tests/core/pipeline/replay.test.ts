import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { createCollector, reportText } from '../../../server/core/pipeline/collect.ts'
import { createPipeline, type PipelineState } from '../../../server/core/pipeline/pipeline.ts'
import type { RowBlock } from '../../../server/core/reading.ts'
import type { Report } from '../../../server/core/report.ts'
import type { Act, Entry } from '../../../server/core/sequence.ts'
import { randomScenario } from '../../../server/core/sim/random-scenario.ts'
import type { Scenario } from '../../../server/core/sim/scenario.ts'
import { cut } from '../../helpers/rows.ts'
import { simulatedBlocks } from '../../helpers/simulated-blocks.ts'
import { heron } from '../../helpers/skids.ts'

const skid = heron()
// One block as large as the run: the generator's block is good until the next is asked for.
const rowsOf = (scenario: Scenario): RowBlock => simulatedBlocks(skid, scenario, 20_000).next().value as RowBlock
const fouling = rowsOf(randomScenario(skid, 'fouling', 5, { hours: 2.2 }))
const sensor = rowsOf(randomScenario(skid, 'sensor', 6, { hours: 1.2 }))

function report(entries: Iterable<Entry>, saveAfter: readonly number[] = []): Report {
  let pipeline = createPipeline(skid)
  const collector = createCollector(skid)
  let n = 0
  for (const e of entries) {
    collector.take(pipeline.push(e))
    if (saveAfter.includes(n++)) pipeline = createPipeline(skid, JSON.parse(JSON.stringify(pipeline.save())) as PipelineState)
  }
  collector.take(pipeline.finish())
  return collector.report(pipeline)
}
const rows = (blocks: Iterable<RowBlock>): Entry[] => [...blocks].map((block) => ({ kind: 'rows', block }))

describe('replay is live', () => {
  const runs = { fouling, sensor }
  for (const [name, run] of Object.entries(runs)) {
    const whole = report(rows([run]))
    const text = reportText(whole)

    it(`${name}: cut into blocks anywhere, stopped and resumed from JSON between them, the report is the same to the byte`, () => {
      fc.assert(
        fc.property(fc.array(fc.integer({ min: 1, max: run.rows - 1 }), { minLength: 1, maxLength: 3 }), (places) => {
          const entries = rows(cut(run, places))
          expect(
            reportText(
              report(
                entries,
                entries.map((_, i) => i),
              ),
            ),
          ).toBe(text)
        }),
        { numRuns: 3, seed: 11 },
      )
    })

    it(`${name}: the log cut anywhere tells the same of everything before the cut`, () => {
      fc.assert(
        fc.property(fc.integer({ min: 200, max: run.rows - 1 }), (place) => {
          const short = report(rows([[...cut(run, [place])][0]!]))
          // The last scans of a cut log close without waiting for rows that come late, so the comparison ends where it stopped waiting.
          const before = run.tMs[place - 1]! - 1000 * (skid.lateSeconds + skid.scanSeconds)
          const early = (r: Report) =>
            r.alarms
              .filter((a) => Date.parse(a.raised) <= before)
              .map(({ id, kind, segment, tag, raised, value, message }) => ({ id, kind, segment, tag, raised, value, message }))
          expect(early(short)).toEqual(early(whole))
          const points = (r: Report) => r.timeline.filter((p) => Date.parse(p.at) <= before)
          expect(points(short)).toEqual(points(whole))
        }),
        { numRuns: 3, seed: 12 },
      )
    })
  }

  it('an acknowledgement, a comment and a changed limit take effect where they stand in the sequence', () => {
    const at = Math.floor(fouling.rows / 2)
    const [a, b] = [...cut(fouling, [at])] as [RowBlock, RowBlock]
    const limit: Act = {
      kind: 'limit',
      tMs: a.tMs[at - 1]!,
      person: 'demo operator',
      segment: 'R1',
      limit: 'dpHighBar',
      value: 0.5,
      reason: 'trial of a low limit',
    }
    const changed = report([
      { kind: 'rows', block: a },
      { kind: 'act', act: limit },
      { kind: 'rows', block: b },
    ])
    const low = changed.alarms.find((x) => x.kind === 'dp-limit' && x.segment === 'R1')
    expect(low).toMatchObject({ limit: 0.5 })
    expect(Date.parse(low!.raised)).toBeGreaterThan(limit.tMs)
    expect(Date.parse(low!.raised)).toBeLessThan(limit.tMs + 60_000)
  })

  it('ticks of the clock change nothing while rows come in time', () => {
    const entries: Entry[] = []
    for (const block of cut(
      fouling,
      Array.from({ length: 40 }, (_, i) => 150 * (i + 1)),
    )) {
      entries.push({ kind: 'rows', block }, { kind: 'tick', tMs: block.tMs[block.rows - 1]! + 200 })
    }
    expect(report(entries).alarms).toEqual(report(rows([fouling])).alarms)
  })
})
