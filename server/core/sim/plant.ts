import { MonitorError } from '../errors.ts'
import { fluidOf } from '../fluids/fluid.ts'
import { type PropertyTable, propertyTable } from '../fluids/property-table.ts'
import { type ChannelGeometry, channelOf } from '../hydraulics/channel.ts'
import { cleanDp } from '../hydraulics/clean-dp.ts'
import type { SegmentSpec, Skid, StreamSpec } from '../skid.ts'
import { fromSi, kFromC, paFromBar, toSi, valueUnit } from '../units.ts'
import { randomOf } from './random.ts'
import type { Scenario } from './scenario.ts'

/** Cells along a segment; temperatures and viscosities are resolved in them. */
export const CELLS = 5
export const FEED_K = 293.15

/** A stream as it truly is: near what the skid file says, not on it (viscosity ±6 %, its slope ±2 % a 10 K at most). */
export interface PlantStream {
  readonly spec: StreamSpec
  readonly fluid: PropertyTable
  readonly viscosityFactor: number
  readonly viscositySlopeK: number
  nominalKgS: number
  /** Lag of its pump and controller, s. */
  readonly tauS: number
}

/** A segment as it truly is: bore, coil and fittings differ a little from the file (ΔP ±10 %). */
export interface PlantSegment {
  readonly spec: SegmentSpec
  readonly streams: readonly number[]
  readonly geometry: ChannelGeometry | null
  readonly dpFactor: number
  readonly lossK: number
  /** Without geometry: ΔP = a (0.75 μ/μ0 Q/Q0 + 0.25 ρ/ρ0 (Q/Q0)²), a [Pa] at nominal. */
  assumed: { dpPa: number; viscPaS: number; rhoKgM3: number; kgS: number } | null
  readonly volumeM3: number
  /** Which coolant; the index in `Plant.coolants`. */
  readonly coolant: number
  /** Transfer units to the coolant at nominal flow. */
  readonly ntu: number
  /** Excess of the hottest place in normal production, K; 0 where nothing reacts. */
  readonly reactionK: number
  readonly hotSpot: number
  /** For each of its streams, the segment it comes from; -1 for the feed. */
  readonly upstream: readonly number[]
  readonly dpHighPa: number | null
}

export interface Plant {
  readonly skid: Skid
  readonly streams: readonly PlantStream[]
  readonly segments: readonly PlantSegment[]
  readonly coolants: readonly { readonly tag: string | null; readonly nominalK: number }[]
  /** Regulator at the outlet, gauge. */
  readonly outletPa: number
}

const ntuOf: Record<SegmentSpec['kind'], number> = {
  precooler: 3.2,
  mixer: 0.5,
  reactor: 3,
  quench: 1.2,
  filter: 0.15,
  tubing: 0.3,
}
/** Where the tightest limit stands against the clean ΔP when flows are chosen here. */
const LOADED = 0.42

/**
 * What a segment without deposit truly shows, Pa, with its static head apart.
 * massKgS and viscosity factors by stream; cellsK the fluid along it. Viscosity is averaged over the cells (exact for laminar friction).
 */
export function cleanPressure(
  plant: Plant,
  s: PlantSegment,
  massKgS: ArrayLike<number>,
  factors: ArrayLike<number>,
  cellsK: ArrayLike<number>,
): { flowPa: number; staticPa: number } {
  let total = 0
  for (const i of s.streams) total += massKgS[i]!
  if (total <= 0) return { flowPa: 0, staticPa: 0 }
  let visc = 0
  let volume = 0
  for (let c = 0; c < cellsK.length; c++) {
    const t = cellsK[c]!
    let lnMu = 0
    for (const i of s.streams) {
      const w = massKgS[i]! / total
      if (w <= 0) continue
      const stream = plant.streams[i]!
      lnMu +=
        w *
        (Math.log(stream.fluid.viscPaS(t) * stream.viscosityFactor * factors[i]!) + stream.viscositySlopeK * (1 / t - 1 / FEED_K))
      volume += w / stream.fluid.rhoKgM3(t)
    }
    visc += Math.exp(lnMu)
  }
  visc /= cellsK.length
  const rho = cellsK.length / volume
  if (s.geometry !== null) {
    const dp = cleanDp(s.geometry, total, rho, visc, { lossK: s.lossK })
    return { flowPa: s.dpFactor * (dp.dpPa - dp.staticPa), staticPa: dp.staticPa }
  }
  if (s.assumed === null) return { flowPa: 0, staticPa: 0 }
  const q = (total / s.assumed.kgS) * (s.assumed.rhoKgM3 / rho)
  return {
    flowPa: s.assumed.dpPa * (0.75 * (visc / s.assumed.viscPaS) * q + 0.25 * (rho / s.assumed.rhoKgM3) * q * q),
    staticPa: 0,
  }
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

/** Nominal flows: as the scenario says; else in the mol ratio that limits ask for, by range where nothing relates them, scaled to `LOADED`. */
function setFlows(plant: Plant, scenario: Scenario): void {
  const { skid, streams } = plant
  const rho = streams.map((s) => s.fluid.rhoKgM3(FEED_K))
  const tagOf = (i: number) => skid.tags.find((t) => t.tag === streams[i]!.spec.flowTag) ?? null
  const kgS = (i: number, value: number) => {
    const tag = tagOf(i)
    const si = toSi(value, tag === null ? 'kg/h' : valueUnit(tag))
    return tag?.quantity === 'volumeFlow' ? si * rho[i]! : si
  }
  const relative = streams.map((_, i) => {
    const top = tagOf(i)?.range?.[1]
    // Equal meters say nothing of the feeds: the first is taken to be the main one.
    const like = i > 0 && (top === undefined || top === tagOf(0)?.range?.[1]) ? 0.42 : 1
    return like * (top === undefined ? 1e-3 : kgS(i, top))
  })
  const litres = (i: number) => relative[i]! / rho[i]!
  for (const s of skid.segments) {
    const want = s.limits.feedRatio
    if (want === null) continue
    const [a, b] = want.of.map((id) => skid.streams.findIndex((x) => x.id === id))
    const ca = skid.streams[a ?? -1]?.reagent?.concentrationMolL
    const cb = skid.streams[b ?? -1]?.reagent?.concentrationMolL
    if (a === undefined || b === undefined || ca === undefined || cb === undefined) continue
    relative[a] = litres(b) * ((want.low + want.high) / 2) * (cb / ca) * rho[a]!
  }
  const apply = (scale: number) => {
    streams.forEach((s, i) => {
      const given = scenario.flows?.[s.spec.id]
      s.nominalKgS = given === undefined ? relative[i]! * scale : kgS(i, given)
    })
  }
  const loaded = (scale: number) => {
    apply(scale)
    return Math.max(
      0,
      ...plant.segments.map((s) => (s.geometry === null || s.dpHighPa === null ? 0 : nominalClean(plant, s) / s.dpHighPa)),
    )
  }
  let [low, high] = [1e-4, 0.6]
  for (let i = 0; i < 40; i++) {
    const mid = (low + high) / 2
    if (loaded(mid) > LOADED) high = mid
    else low = mid
  }
  apply(plant.segments.some((s) => s.geometry !== null && s.dpHighPa !== null) ? low : 0.3)
  for (const s of plant.segments) {
    if (s.geometry !== null) continue
    const kg = s.streams.reduce((sum, i) => sum + streams[i]!.nominalKgS, 0)
    const tK = plant.coolants[s.coolant]!.nominalK
    const main = streams[s.streams[0]!]!.fluid
    s.assumed = {
      dpPa: s.dpHighPa === null ? 25_000 : 0.38 * s.dpHighPa,
      viscPaS: main.viscPaS(tK),
      rhoKgM3: main.rhoKgM3(tK),
      kgS: kg,
    }
  }
}

/** Clean ΔP without static head at nominal flow, the fluid at the coolant's temperature (a precooler's: half way), Pa. */
export function nominalClean(plant: Plant, s: PlantSegment): number {
  const cold = plant.coolants[s.coolant]!.nominalK
  const cells = Array.from({ length: CELLS }, (_, c) =>
    s.upstream.includes(-1) ? cold + (FEED_K - cold) * Math.exp(-s.ntu * ((c + 0.5) / CELLS)) : cold,
  )
  return cleanPressure(
    plant,
    s,
    plant.streams.map((x) => x.nominalKgS),
    plant.streams.map(() => 1),
    cells,
  ).flowPa
}

/** dpHighBar over the clean ΔP at nominal flow; 2 where the skid file sets no limit. Errors: SIM_OPTION where clean is too near it to foul. */
export function limitRatio(plant: Plant, id: string): number {
  const s = plant.segments.find((x) => x.spec.id === id)!
  if (s.dpHighPa === null) return 2
  const ratio = s.dpHighPa / nominalClean(plant, s)
  if (ratio < 1.15) {
    throw new MonitorError(
      'SIM_OPTION',
      `segment ${id} cannot foul: its clean dP is ${(100 / ratio).toFixed(0)} % of dpHighBar at the flows simulated`,
      {
        hint: 'lower the flows of the scenario or raise dpHighBar in the skid file',
      },
    )
  }
  return ratio
}

/** dpHighBar, or what stands for it where the skid file has none, bar. */
export const limitBar = (plant: Plant, id: string): number => {
  const s = plant.segments.find((x) => x.spec.id === id)!
  return fromSi(s.dpHighPa ?? 2 * nominalClean(plant, s), 'bar')
}

/** True where an event loads a filter. */
export const isFilter = (plant: Plant, id: string): boolean =>
  plant.segments.some((s) => s.spec.id === id && s.spec.kind === 'filter')
