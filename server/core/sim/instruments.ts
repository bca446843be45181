import type { SegmentSpec, TagSpec } from '../skid.ts'
import { fromSi, kFromC, toSi, valueUnit } from '../units.ts'
import type { Disturbances } from './disturbances.ts'
import { excessAt } from './exotherm.ts'
import { errorOf, faultsOf } from './faults.ts'
import { CELLS, FEED_K, type Plant } from './plant-model.ts'
import type { Process } from './process.ts'
import { randomOf } from './random.ts'
import { eventsOf, type Scenario, timeOf } from './scenario.ts'

/** One reading taken now, in the unit of the tag; null where there is none. */
export type Instrument = (tMs: number, dtS: number) => number | null

/**
 * Noise of an instrument as sd of one reading, at noise 1 (project's choice, near what data sheets of pilot instruments give):
 * pressure and dP 0.04 % of range; mass and volume flow 0.15 % of nominal and 0.02 % of range; temperature 0.06 K; one reading in 2000 has
 * five times that. Offsets drawn once: pressure zero 0.03 % of range (follows the ambient by a tenth of that per K), gain 0.1 %; thermocouple 0.3 K.
 * Readings stop at 3.8 and 20.5 mA of their range. Without a range: pressure 25 bar, flow three times the nominal.
 */
export const instrumentNoise = {
  pressureOfRange: 0.0004,
  flowOfValue: 0.0015,
  flowOfRange: 0.0002,
  temperatureK: 0.06,
  zeroOfRange: 0.0003,
  gain: 0.001,
  thermocoupleK: 0.3,
} as const

/** The step a logger shows: the power of ten at or below a 2000th of the range, as 0.01 bar of 25 bar; 0.1 K; flows ten times finer. */
export function resolutionOf(tag: TagSpec): number {
  if (tag.quantity === 'temperature' || tag.quantity === 'dewPoint') return 0.1
  const span = tag.range === null ? 25 : tag.range[1] - tag.range[0]
  const fine = tag.quantity === 'massFlow' || tag.quantity === 'volumeFlow' ? 20_000 : 2000
  return 10 ** Math.floor(Math.log10(span / fine))
}

export const decimalsOf = (tag: TagSpec): number =>
  tag.unit === 'mA' ? 3 : Math.max(0, -Math.round(Math.log10(resolutionOf(tag))))

const places = (segment: SegmentSpec, tag: string): number =>
  (segment.temperatures.indexOf(tag) + 0.5) / segment.temperatures.length

/** Cells read between their centres. */
function along(cells: Float64Array, place: number): number {
  const x = Math.min(CELLS - 1, Math.max(0, place * CELLS - 0.5))
  const i = Math.min(CELLS - 2, Math.floor(x))
  return cells[i]! + (x - i) * (cells[i + 1]! - cells[i]!)
}

/** What a tag truly stands at, SI, before its sensor: by what the skid file says of it. */
function trueValue(plant: Plant, process: Process, noise: Disturbances | null, tag: TagSpec): (tMs: number) => number {
  const { skid } = plant
  const stream = skid.streams.findIndex((s) => s.flowTag === tag.tag)
  const pulse = (i: number) => 1 + (noise === null ? 0 : noise.pulse[i]!)
  if (stream >= 0) {
    const rho = plant.streams[stream]!.fluid.rhoKgM3(FEED_K)
    // What the meter shows: the true flow with its own error back in, so that the controller's target is read.
    const read = () => process.massKgS[stream]! * pulse(stream) * (1 + (noise === null ? 0 : noise.flow[stream]!))
    return tag.quantity === 'volumeFlow' ? () => read() / rho : read
  }
  const dp = skid.segments.findIndex((s) => s.dp.kind === 'dp' && s.dp.dpTag === tag.tag)
  if (dp >= 0) return () => process.dpPa[dp]! * pulse(plant.segments[dp]!.streams[0]!)
  const sees = skid.segments.findIndex((s) => s.temperatures.includes(tag.tag))
  if (sees >= 0) {
    const place = places(skid.segments[sees]!, tag.tag)
    return (tMs) => along(process.cellsK[sees]!, place) + excessAt(process.exotherms, sees, place, tMs)
  }
  const coolant = plant.coolants.findIndex((c) => c.tag === tag.tag)
  if (coolant >= 0) return () => process.coolantK[coolant]!
  if (tag.quantity === 'pressure') {
    const main = () => pulse(0)
    return () => {
      const at = process.tapPa.get(tag.tag) ?? process.outletPa
      return process.outletPa + (at - process.outletPa) * main()
    }
  }
  const target = skid.streams.findIndex((s) => s.flowTag === tag.setpointFor)
  if (target >= 0) return () => plant.streams[target]!.nominalKgS
  if (tag.quantity === 'temperature') return () => kFromC(20) + (noise === null ? 0 : noise.ambientK)
  const middle = tag.range === null ? 1 : (tag.range[0] + tag.range[1]) / 2
  return () => toSi(middle, valueUnit(tag))
}

/** The instrument behind a tag: lag, zero, gain, noise, resolution, faults. Text tags give null. */
export function instrumentOf(
  plant: Plant,
  process: Process,
  noise: Disturbances | null,
  scenario: Scenario,
  tag: TagSpec,
): Instrument {
  if (tag.quantity === 'text') return () => null
  const random = randomOf(scenario.seed, `tag ${tag.tag}`)
  const unit = valueUnit(tag)
  const read = trueValue(plant, process, noise, tag)
  const flow = plant.skid.streams.findIndex((s) => s.flowTag === tag.tag)
  const thermal = tag.quantity === 'temperature'
  const pressing = tag.quantity === 'pressure' || tag.quantity === 'differentialPressure'
  const nominal =
    flow >= 0
      ? Math.abs(
          fromSi(tag.quantity === 'volumeFlow' ? plant.streams[flow]!.nominalKgS / 850 : plant.streams[flow]!.nominalKgS, unit),
        )
      : 0
  const span =
    tag.range === null ? (pressing ? fromSi(2.5e6, unit) - fromSi(0, unit) : 3 * nominal || 1) : tag.range[1] - tag.range[0]
  const kelvin = fromSi(1, unit) - fromSi(0, unit)
  const n = instrumentNoise
  const sd =
    scenario.noise *
    (thermal
      ? n.temperatureK * kelvin
      : pressing
        ? n.pressureOfRange * span
        : flow >= 0
          ? n.flowOfRange * span
          : n.pressureOfRange * span)
  const zero = scenario.noise * random.normal() * (thermal ? n.thermocoupleK * kelvin : pressing ? n.zeroOfRange * span : 0)
  const gain = 1 + (pressing ? scenario.noise * n.gain * random.normal() : 0)
  const lagS = thermal ? random.between(2, 6) : pressing ? 0 : 1
  const faults = faultsOf(scenario, tag.tag)
  const gaps = eventsOf(scenario, 'nanGap')
    .filter((e) => e.tags === 'all' || e.tags.includes(tag.tag))
    .map((e) => ({ fromMs: timeOf(scenario, e), toMs: timeOf(scenario, e) + Math.round(e.minutes * 60) * 1000 }))
  const step = resolutionOf(tag)
  const perUnit = Math.round(1 / step)
  // Dividing by a whole number gives the nearest double to the decimal; multiplying by 0.1 does not.
  const rounded = (x: number) => (step < 1 ? Math.round(x * perUnit) / perUnit : Math.round(x / step) * step)
  let lagged: number | null = null
  return (tMs, dtS) => {
    const si = read(tMs)
    lagged = lagged === null || lagS === 0 ? si : lagged + (1 - Math.exp(-dtS / lagS)) * (si - lagged)
    const value = fromSi(lagged, unit)
    const tail = random.chance(0.0005) ? 5 : 1
    const spread = sd + (flow >= 0 ? scenario.noise * n.flowOfValue * Math.abs(value) : 0)
    const drift = pressing && noise !== null ? 0.1 * zero * noise.ambientK : 0
    let shown = value * gain + zero + drift + tail * spread * random.normal()
    for (const f of faults) if (tMs >= f.fromMs && tMs < f.toMs) shown += errorOf(f, tMs)
    if (tag.range !== null) shown = Math.min(tag.range[1] + 0.031 * span, Math.max(tag.range[0] - 0.0125 * span, shown))
    let out: number | null = rounded(shown)
    for (const f of faults) {
      const on = tMs >= f.fromMs && tMs < f.toMs
      if (!on) f.held = null
      else if (f.fault === 'frozen') out = f.held ??= out
      else if (f.fault === 'dead') out = null
      else if (f.fault === 'open') out = tag.range === null ? null : tag.burnout === 'low' ? tag.range[0] : tag.range[1]
      else if (f.fault === 'spikes' && out !== null && random.chance(0.03))
        out = rounded(out + (random.chance(0.5) ? f.size : -f.size))
    }
    if (gaps.some((g) => tMs >= g.fromMs && tMs < g.toMs)) return null
    return out === null || tag.unit !== 'mA' ? out : loopCurrent(out, tag)
  }
}

/** 4 to 20 mA over the range, held between 3.8 and 20.5 mA as NE 43 has it, in steps of 1 uA. */
const loopCurrent = (value: number, tag: TagSpec): number => {
  const [low, high] = tag.range ?? [0, 1]
  return Math.round(1000 * Math.min(20.5, Math.max(3.8, 4 + (16 * (value - low)) / (high - low)))) / 1000
}
