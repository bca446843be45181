import { describe, expect, it } from 'vitest'
import { createCollector } from '../../../server/core/pipeline/collect.ts'
import { createPipeline } from '../../../server/core/pipeline/pipeline.ts'
import { type SimEvent, scenarioOf } from '../../../server/core/sim/scenario.ts'
import { simulatedBlocks } from '../../helpers/simulated-blocks.ts'
import { heron } from '../sim/skids.ts'

const skid = { ...heron, scanSeconds: 5, lateSeconds: 10 }
const startMs = Date.UTC(2031, 4, 5, 18)

/** Alarms, by minutes after the start, and notes of a clean heron with zeros of instruments off. */
function run(hours: number, seed: number, events: SimEvent[]) {
  const pipeline = createPipeline(skid)
  const collector = createCollector(skid)
  for (const block of simulatedBlocks(skid, scenarioOf({ hours, seed, logSeconds: 5, events })))
    collector.take(pipeline.push({ kind: 'rows', block }))
  collector.take(pipeline.finish())
  const { alarms, notes } = collector.report(pipeline)
  return { alarms: alarms.map((a) => ({ ...a, minutes: (Date.parse(a.raised) - startMs) / 60_000 })), notes }
}
const alarms = (hours: number, seed: number, events: SimEvent[]) => run(hours, seed, events).alarms
const shift = (tag: string, atHours: number, bar: number, overS = 0): SimEvent => ({
  kind: 'sensor',
  atHours,
  tag,
  fault: overS === 0 ? 'zeroStep' : 'zeroDrift',
  lastsHours: null,
  size: bar,
  overS,
})

describe('zeros of pressure taps off, on a clean skid', () => {
  it('a tap that shifts by 150 mbar and two hours later by 130 mbar more is told twice, each within 8 min, and nothing else is alarmed', () => {
    for (const seed of [1, 2]) {
      const found = alarms(5, seed, [shift('PT-112', 1.5, 0.15), shift('PT-112', 3.3, 0.13)])
      expect(found.map((a) => [a.kind, a.tag])).toEqual([
        ['sensor', 'PT-112'],
        ['sensor', 'PT-112'],
      ])
      expect(found[0]!.minutes - 90).toBeLessThan(8)
      expect(found[1]!.minutes - 198).toBeGreaterThan(0)
      expect(found[1]!.minutes - 198).toBeLessThan(8)
    }
  })
  it('a tap that shifts by −150 mbar under two precoolers leaves no trace in the charts: no growth is alarmed in 4 h after', () => {
    for (const seed of [1, 2, 3]) {
      const found = alarms(6, seed, [shift('PT-111', 2, -0.15)])
      expect(found.map((a) => [a.kind, a.tag])).toEqual([['sensor', 'PT-111']])
    }
  })
  it('an end tap that drifts so that its one segment falls below clean by 150 mbar in an hour is named within 50 min: no deposit does that', () => {
    for (const [tag, bar] of [
      ['PT-114', 0.15],
      ['PT-101', -0.15],
    ] as const) {
      // biome-ignore format: a table
      const found = alarms(5, 4, [shift(tag, 2, bar, 3600)])
      expect(found.map((a) => [a.kind, a.tag])).toEqual([['sensor', tag]])
      expect(found[0]!.minutes - 120).toBeGreaterThan(0)
      expect(found[0]!.minutes - 120).toBeLessThan(50)
      expect(found[0]!.evidence.notExcluded.length).toBeGreaterThan(0)
    }
  })
  it('15 and 20 mbar of a span of 25 bar are within the accuracy: noted and allowed for, not alarmed', () => {
    for (const [tag, bar] of [
      ['PT-112', 0.015],
      ['PT-111', -0.015],
      ['PT-112', 0.02],
    ] as const) {
      // biome-ignore format: a table
      const { alarms, notes } = run(3, 2, [shift(tag, 1.5, bar)])
      expect(alarms).toEqual([])
      expect(notes.filter((n) => n.includes(`${tag}: its zero moved`))).toHaveLength(1)
    }
  })
  it('a lot of feed C thinner by 6 or thicker by 8 %, which shows in its own precooler almost alone, is put down neither to PT-103 nor to a deposit', () => {
    for (const [seed, viscosityFactor] of [
      [1, 0.94],
      [2, 1.08],
      [3, 1.06],
    ] as const) {
      // biome-ignore format: a table
      const event: SimEvent = { kind: 'feedConcentration', atHours: 1.5, stream: 'C', viscosityFactor, heatFactor: 1 }
      expect(alarms(4, seed, [event]).filter((a) => a.kind === 'sensor' || a.cause === 'fouling')).toEqual([])
    }
  })
})
