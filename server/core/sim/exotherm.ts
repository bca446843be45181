import type { Plant } from './plant-model.ts'
import { randomOf } from './random.ts'
import { type ExothermKind, eventsOf, type Scenario, timeOf } from './scenario.ts'

/** One temperature excursion as the plant knows it; its course is fixed before the run starts. */
export interface Exotherm {
  readonly segment: number
  readonly kind: ExothermKind
  readonly startMs: number
  readonly peakMs: number
  /** When a tenth of the height is left. */
  readonly endMs: number
  readonly amplitudeK: number
  readonly riseS: number
  /** Where along the segment, 0 inlet to 1 outlet, and how wide (sd). */
  readonly hotSpot: number
  readonly width: number
  /** dosing-ratio: which stream runs high, how many times, until when; -1 none. */
  readonly feed: number
  readonly factor: number
  readonly feedEndMs: number
}

/** Seconds from start to nine tenths of the height, and the time constant of the fall, both from-to. */
const pace: Record<ExothermKind, { rise: readonly [number, number]; fall: readonly [number, number]; width: number }> = {
  ignition: { rise: [5, 25], fall: [25, 60], width: 0.22 },
  'coolant-loss': { rise: [150, 450], fall: [90, 200], width: 0.8 },
  'dosing-ratio': { rise: [45, 90], fall: [25, 50], width: 0.35 },
  creep: { rise: [120, 400], fall: [60, 200], width: 0.25 },
}

export function exothermsOf(plant: Plant, scenario: Scenario): readonly Exotherm[] {
  return eventsOf(scenario, 'exotherm').map((e, n): Exotherm => {
    const random = randomOf(scenario.seed, `exotherm ${n}`)
    const { rise, fall, width } = pace[e.what]
    const segment = plant.segments.findIndex((s) => s.spec.id === e.segment)
    const startMs = timeOf(scenario, e)
    const riseS = Math.min(random.between(...rise), e.lastsS)
    const peakMs = startMs + Math.round(Math.max(riseS, e.what === 'ignition' ? riseS : e.lastsS)) * 1000
    return {
      segment,
      kind: e.what,
      startMs,
      peakMs,
      endMs: peakMs + Math.round(Math.LN10 * random.between(...fall)) * 1000,
      amplitudeK: e.amplitudeC,
      riseS,
      hotSpot: e.what === 'coolant-loss' ? 0.5 : plant.segments[segment]!.hotSpot * random.between(0.8, 1.2),
      width,
      feed: e.what === 'dosing-ratio' ? plant.streams.findIndex((s) => s.spec.id === e.stream) : -1,
      factor: e.factor,
      feedEndMs: peakMs,
    }
  })
}

/**
 * Share of the height at an instant. Up: 1 − e^(−2.3 (t/rise)^q), nine tenths at the rise time, q = 2 for an ignition (accelerates first), 1 for
 * a lag. Down: exponential to a tenth at the end. Continuous at the peak.
 */
function course(x: Exotherm, tMs: number): number {
  const s = (Math.min(tMs, x.peakMs) - x.startMs) / 1000
  if (s <= 0) return 0
  const top = 1 - Math.exp(-Math.LN10 * (s / x.riseS) ** (x.kind === 'ignition' ? 2 : 1))
  return tMs <= x.peakMs ? top : top * Math.exp((-Math.LN10 * (tMs - x.peakMs)) / (x.endMs - x.peakMs))
}

/** Excess over normal running at a place of a segment, K. A quarter of what leaves a segment is still seen at the inlet of the next. */
export function excessAt(exotherms: readonly Exotherm[], segment: number, place: number, tMs: number): number {
  let sum = 0
  for (const x of exotherms) {
    if (tMs <= x.startMs || tMs > x.endMs + 3 * (x.endMs - x.peakMs)) continue
    if (x.segment === segment) sum += x.amplitudeK * course(x, tMs) * Math.exp(-0.5 * ((place - x.hotSpot) / x.width) ** 2)
    else if (x.segment === segment - 1)
      sum += 0.25 * x.amplitudeK * course(x, tMs - 20_000) * Math.exp(-0.5 * ((1 - x.hotSpot) / x.width) ** 2 - 3 * place)
  }
  return sum
}
