import { MonitorError } from '../errors.ts'
import { fluidOf } from '../fluids/fluid.ts'
import { propertyTable } from '../fluids/property-table.ts'
import { channelOf } from '../hydraulics/channel.ts'
import type { SegmentSpec, Skid } from '../skid.ts'
import { kFromC, paFromBar } from '../units.ts'
import { setFlows } from './nominal.ts'
import { FEED_K, type Plant, type PlantSegment, type PlantStream } from './plant-model.ts'
import { randomOf } from './random.ts'
import type { Scenario } from './scenario.ts'

const ntuOf: Record<SegmentSpec['kind'], number> = {
  precooler: 3.2,
  mixer: 0.5,
  reactor: 3,
  quench: 1.2,
  filter: 0.15,
  tubing: 0.3,
}
/** The plant that a skid file describes, with its own small truths drawn from the scenario's seed. Errors: SIM_OPTION. */
export function plantOf(skid: Skid, scenario: Scenario): Plant {
  if (skid.streams.length === 0 || skid.segments.length === 0)
    throw new MonitorError('SIM_OPTION', 'cannot simulate a skid without streams and segments')
  const streams = skid.streams.map((spec): PlantStream => {
    const random = randomOf(scenario.seed, `stream ${spec.id}`)
    return {
      spec,
      fluid: propertyTable(fluidOf(spec.fluid ?? { kind: 'solvent', solvent: 'tetrahydrofuran' })),
      viscosityFactor: Math.exp(0.06 * random.between(-1, 1)),
      viscositySlopeK: 170 * random.between(-1, 1),
      nominalKgS: 0,
      tauS: random.between(3, 9),
    }
  })
  const coolants = coolantsOf(skid, streams, scenario)
  const segments = skid.segments.map((spec, n) => segmentOf(skid, spec, n, coolants, scenario))
  const plant: Plant = {
    skid,
    streams,
    segments,
    coolants,
    outletPa: paFromBar(randomOf(scenario.seed, 'outlet').between(1.2, 2.2)),
  }
  setFlows(plant, scenario)
  return plant
}

/** Coolant temperatures: 15 K under the tightest high limit, never above 20 °C, 4 K above what freezes a feed alone. */
function coolantsOf(skid: Skid, streams: readonly PlantStream[], scenario: Scenario): Plant['coolants'] {
  const tags = [...new Set(skid.segments.map((s) => s.coolantTemperature))]
  return tags.map((tag, n) => {
    const served = skid.segments.filter((s) => s.coolantTemperature === tag)
    const high = Math.min(...served.map((s) => s.limits.temperatureHighC ?? Number.POSITIVE_INFINITY))
    const low = Math.max(...served.map((s) => s.limits.temperatureLowC ?? Number.NEGATIVE_INFINITY))
    const coldC = tag === null ? 20 : Math.max(Math.min(high - 15, Number.isFinite(high) ? 20 : -15), low + 4)
    const nominal = n === 0 && scenario.coolantC !== null ? scenario.coolantC : coldC
    const alone = served.filter((s) => s.streams.length === 1).map((s) => skid.streams.findIndex((x) => x.id === s.streams[0]))
    let kelvin = kFromC(nominal)
    while (alone.some((i) => i >= 0 && streams[i]!.fluid.uncertain(kelvin - 4)) && kelvin < FEED_K) kelvin += 1
    return { tag, nominalK: kelvin }
  })
}

function segmentOf(skid: Skid, spec: SegmentSpec, n: number, coolants: Plant['coolants'], scenario: Scenario): PlantSegment {
  const random = randomOf(scenario.seed, `segment ${spec.id}`)
  const file = spec.channel === null ? null : channelOf(spec.channel)
  const geometry = file === null ? null : { ...file, coilDiameterM: file.coilDiameterM ?? random.between(0.07, 0.15) }
  const coolant = coolants.findIndex((c) => c.tag === spec.coolantTemperature)
  const limiting = skid.streams.findIndex((s) => s.id === spec.reaction?.limitingStream)
  // A twelfth of the adiabatic rise of the feed (roughly 2 kJ/(L K)) shows at the hottest place of a cooled channel.
  const reactionK =
    spec.reaction === null || limiting < 0
      ? 0
      : Math.min(9, (Math.abs(spec.reaction.enthalpyKJMol) * spec.reaction.concentrationMolL) / 1.8 / 12)
  return {
    spec,
    streams: spec.streams.map((id) => skid.streams.findIndex((s) => s.id === id)),
    geometry,
    dpFactor: Math.exp(0.1 * random.between(-1, 1)),
    lossK: spec.kind === 'filter' ? 0 : random.between(1.2, 8),
    assumed: null,
    volumeM3: (spec.volumeMl ?? 10) * 1e-6,
    coolant: Math.max(0, coolant),
    ntu: ntuOf[spec.kind] * random.between(0.8, 1.2),
    reactionK,
    hotSpot: random.between(0.3, 0.55),
    upstream: spec.streams.map((id) => skid.segments.findLastIndex((s, i) => i < n && s.streams.includes(id))),
    dpHighPa: spec.limits.dpHighBar === null ? null : paFromBar(spec.limits.dpHighBar),
  }
}
