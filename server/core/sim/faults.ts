import { toSi, valueUnit } from '../units.ts'
import { FEED_K, type Plant } from './plant-model.ts'
import { endOf, eventsOf, type FaultKind, hoursMs, type Scenario, timeOf } from './scenario.ts'

export interface Fault {
  readonly tag: string
  readonly fault: FaultKind
  readonly fromMs: number
  readonly toMs: number
  readonly size: number
  readonly overS: number
  /** What a frozen one is stuck at. */
  held: number | null
}

export const isHard = (fault: FaultKind): boolean => fault !== 'zeroDrift' && fault !== 'zeroStep'

/** Faults of one tag, or of all. */
export const faultsOf = (scenario: Scenario, tag: string | null): Fault[] =>
  eventsOf(scenario, 'sensor')
    .filter((e) => tag === null || e.tag === tag)
    .map((e) => ({
      tag: e.tag,
      fault: e.fault,
      fromMs: timeOf(scenario, e),
      toMs: e.lastsHours === null ? endOf(scenario) : timeOf(scenario, e) + hoursMs(e.lastsHours),
      size: e.size,
      overS: e.overS,
      held: null,
    }))

/** What a soft fault adds to the reading, in the tag's unit. */
export function errorOf(fault: Fault, tMs: number): number {
  if (fault.fault === 'zeroStep') return fault.size
  return fault.fault === 'zeroDrift' ? fault.size * Math.min(1, (tMs - fault.fromMs) / (1000 * Math.max(1, fault.overS))) : 0
}

/** Flow meters that read wrong: the controller holds the reading, so the true flow errs the other way by as much. */
export function meterFaultsOf(plant: Plant, scenario: Scenario) {
  return faultsOf(scenario, null).flatMap((f) => {
    const stream = plant.streams.findIndex((s) => s.spec.flowTag === f.tag)
    const tag = plant.skid.tags.find((t) => t.tag === f.tag)
    if (stream < 0 || tag === undefined || isHard(f.fault)) return []
    const rho = tag.quantity === 'volumeFlow' ? plant.streams[stream]!.fluid.rhoKgM3(FEED_K) : 1
    return [{ stream, fromMs: f.fromMs, toMs: f.toMs, errorKgS: (tMs: number) => rho * toSi(errorOf(f, tMs), valueUnit(tag)) }]
  })
}
