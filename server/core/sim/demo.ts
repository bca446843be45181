import { MonitorError } from '../errors.ts'
import type { SegmentSpec, Skid } from '../skid.ts'
import { limitRatio } from './nominal.ts'
import { plantOf } from './plant.ts'
import { type Scenario, type SimEvent, scenarioOf } from './scenario.ts'

/** Segments that can foul at the flows simulated, those where something reacts first. */
export function foulable(skid: Skid, scenario: Scenario): readonly SegmentSpec[] {
  const plant = plantOf(skid, scenario)
  const can = skid.segments.filter((s) => {
    try {
      return limitRatio(plant, s.id) >= 1.25
    } catch (error) {
      if (error instanceof MonitorError && error.code === 'SIM_OPTION') return false
      throw error
    }
  })
  return [...can.filter((s) => s.reaction !== null), ...can.filter((s) => s.reaction === null)]
}

/**
 * The demo: feed A is a little wet tonight. Water makes lithium hydroxide where the feeds meet: the reactor begins to foul 25 min into the run and
 * reaches its limit some four hours later; 75 min in, a small exotherm passes. Otherwise a quiet night. For any skid: its first reacting segment.
 */
export function demoScenario(skid: Skid, over: Partial<Scenario> = {}): Scenario {
  const quiet = scenarioOf({ name: 'demo', category: 'demo', seed: 2031, hours: 12, ...over })
  const target = foulable(skid, quiet)[0]
  if (target === undefined) return quiet
  const fouling: SimEvent = {
    kind: 'fouling',
    segment: target.id,
    law: 'linear',
    atHours: 25 / 60,
    hoursToLimit: 4,
    localFraction: null,
    sloughs: 0,
  }
  const exotherm: SimEvent = {
    kind: 'exotherm',
    segment: target.id,
    what: 'ignition',
    atHours: 1.25,
    amplitudeC: 4,
    lastsS: 60,
    stream: null,
    factor: 1,
  }
  return { ...quiet, events: target.temperatures.length === 0 ? [fouling] : [fouling, exotherm] }
}
