import { type Fluid, fluidOf, mixByMass } from '../fluids/fluid.ts'
import { risingRoot } from '../hydraulics/branches.ts'
import { type ChannelGeometry, channelOf, channelVolumeM3 } from '../hydraulics/channel.ts'
import { cleanDp } from '../hydraulics/clean-dp.ts'
import { temperatureUncertainty } from '../instruments/tolerance.ts'
import type { SegmentSpec, Skid, StreamSpec, TagSpec } from '../skid.ts'
import { cFromK, kFromC, paFromBar, toSi, valueUnit } from '../units.ts'

/**
 * What is known of the present or intended operation; keys are stream ids and temperature tags, values in the unit of the tag. A flow of 0 (pump
 * stopped) says nothing of the normal flow and counts as not given.
 */
export interface Given {
  readonly flows?: Readonly<Record<string, number | null>>
  readonly temperatures?: Readonly<Record<string, number | null>>
}

export interface StreamFlow {
  readonly id: string
  readonly spec: StreamSpec
  readonly fluid: Fluid | null
  readonly massFlowKgS: number | null
  readonly volumeFlowM3S: number | null
  /** Feed temperature used for volume and density, K: 20 °C, feed drums stand at room temperature. */
  readonly tempK: number
}

export interface SegmentOperation {
  readonly spec: SegmentSpec
  readonly streams: readonly StreamFlow[]
  /** What flows there, feeds mixed by mass; null where a feed's liquid or flow is not known. */
  readonly fluid: Fluid | null
  readonly massFlowKgS: number | null
  /** Sum of the feeds' volumes at feed temperature, m³/s. */
  readonly volumeFlowM3S: number | null
  /** Mean and lowest of the segment's temperatures, K. */
  readonly tempK: number
  readonly coldestK: number
  readonly coolantK: number | null
  /** Temperatures read along the flow, inlet first, K; empty where none or not all are given. */
  readonly readK: readonly number[]
  /** Standard uncertainty of a reading of this segment against its coolant, by their sensors, K. */
  readonly differenceUK: number
  readonly channel: ChannelGeometry | null
  readonly volumeM3: number | null
}

export interface Operation {
  readonly streams: readonly StreamFlow[]
  readonly segments: readonly SegmentOperation[]
  readonly flowTags: readonly TagSpec[]
  readonly assumptions: readonly string[]
}

const feedK = kFromC(20)

/** Feed streams with the flow given, by the feed ratio from another feed, or `scale` of half the flow tag's range. */
function streamFlows(skid: Skid, given: Given, scale: number, assumptions: string[]): StreamFlow[] {
  const volumes = new Map<string, number | null>()
  const fluids = new Map(skid.streams.map((s) => [s.id, s.fluid === null ? null : fluidOf(s.fluid)]))
  const density = (id: string): number | null => fluids.get(id)?.at(feedK).rhoKgM3 ?? null
  const asVolume = (stream: StreamSpec, value: number): number | null => {
    const tag = skid.tags.find((t) => t.tag === stream.flowTag)
    if (tag === undefined) return null
    const si = toSi(value, valueUnit(tag))
    if (tag.quantity === 'volumeFlow') return si
    const rho = density(stream.id)
    return rho === null ? null : si / rho
  }
  for (const s of skid.streams) {
    const value = given.flows?.[s.id]
    if (value !== undefined && value !== null && value > 0) volumes.set(s.id, asVolume(s, value))
  }
  const half = (s: StreamSpec): number | null => {
    const range = skid.tags.find((t) => t.tag === s.flowTag)?.range
    if (range === undefined || range === null) return null
    assumptions.push(
      scale === 1
        ? `flow of ${s.id} not given: half the range of ${s.flowTag} assumed`
        : `flow of ${s.id} not given: ${(50 * scale).toFixed(0)} % of the range of ${s.flowTag} assumed, where no clean pressure drop passes ${100 * loaded} % of its high limit`,
    )
    return asVolume(s, (scale * (range[0] + range[1])) / 2)
  }
  for (const s of skid.streams) {
    if (volumes.has(s.id)) continue
    const rule = skid.segments.map((g) => g.limits.feedRatio).find((r) => r !== null && r.of[0] === s.id)
    const base = rule == null ? undefined : skid.streams.find((o) => o.id === rule.of[1])
    if (rule == null || base === undefined || s.reagent === null || base.reagent === null) {
      volumes.set(s.id, half(s))
      continue
    }
    if (!volumes.has(base.id)) volumes.set(base.id, half(base))
    const baseVolume = volumes.get(base.id) ?? null
    const mid = (rule.low + rule.high) / 2
    volumes.set(
      s.id,
      baseVolume === null ? null : (baseVolume * base.reagent.concentrationMolL * mid) / s.reagent.concentrationMolL,
    )
    assumptions.push(
      `flow of ${s.id} not given: taken from ${base.id} at the middle of the feed-ratio limits, ${mid.toPrecision(3)} mol/mol`,
    )
  }
  return skid.streams.map((spec) => {
    const volumeFlowM3S = volumes.get(spec.id) ?? null
    const rho = density(spec.id)
    return {
      id: spec.id,
      spec,
      fluid: fluids.get(spec.id) ?? null,
      volumeFlowM3S,
      massFlowKgS: volumeFlowM3S === null || rho === null ? null : volumeFlowM3S * rho,
      tempK: feedK,
    }
  })
}

const uOf = (tag: TagSpec | undefined, tempK: number): number => temperatureUncertainty(tag?.sensor ?? null, cFromK(tempK)).uK

const sum = (values: readonly (number | null)[]): number | null =>
  values.reduce<number | null>((a, b) => (a === null || b === null ? null : a + b), 0)

function temperatureOf(
  skid: Skid,
  spec: SegmentSpec,
  given: Given,
  assumptions: string[],
): { readonly meanK: number; readonly coldestK: number; readonly readK: readonly number[] } {
  const read = spec.temperatures.flatMap((name) => {
    const value = given.temperatures?.[name]
    const tag = skid.tags.find((t) => t.tag === name)
    return value === undefined || value === null || tag === undefined ? [] : [toSi(value, valueUnit(tag))]
  })
  if (read.length > 0) {
    if (read.length < spec.temperatures.length)
      assumptions.push(
        `${spec.id}: ${spec.temperatures.length - read.length} of ${spec.temperatures.length} temperatures not given`,
      )
    return {
      meanK: read.reduce((a, b) => a + b, 0) / read.length,
      coldestK: Math.min(...read),
      readK: read.length === spec.temperatures.length ? read : [],
    }
  }
  const workingC = workingFromLimits(skid, spec)
  const tempC = workingC ?? 20
  assumptions.push(
    workingC === null
      ? `${spec.id}: no temperature given, ${tempC} °C assumed`
      : `${spec.id}: no temperature given, ${tempC.toFixed(0)} °C assumed (${alarmMarginK} K below the high limit on its coolant)`,
  )
  return { meanK: kFromC(tempC), coldestK: kFromC(tempC), readK: [] }
}

/** A high temperature limit stands about this far above the working temperature (common practice for cooled flow reactors). */
const alarmMarginK = 15

/** Working temperature from the high limit, its own or that of a segment on the same coolant, held above the low limit; null without one. */
function workingFromLimits(skid: Skid, spec: SegmentSpec): number | null {
  const shares = skid.segments.filter((s) => spec.coolantTemperature !== null && s.coolantTemperature === spec.coolantTemperature)
  const high =
    spec.limits.temperatureHighC ?? shares.find((s) => s.limits.temperatureHighC !== null)?.limits.temperatureHighC ?? null
  return high === null ? null : Math.max(high - alarmMarginK, spec.limits.temperatureLowC ?? Number.NEGATIVE_INFINITY)
}

/** Where no flow is given, a skid is taken to run with its clean pressure drops below this share of their high limits (common practice). */
const loaded = 0.45

/** Clean ΔP over `loaded` of its high limit, the highest of all segments, less 1; below 0 where no limit is near. */
function overload({ segments }: Operation): number {
  return segments.reduce((worst, { channel, fluid, massFlowKgS, tempK, spec }) => {
    const { dpHighBar } = spec.limits
    if (channel === null || fluid === null || massFlowKgS === null || dpHighBar === null) return worst
    if (tempK < fluid.limitK[0] || tempK > fluid.limitK[1]) return worst
    const { rhoKgM3, viscPaS } = fluid.at(tempK)
    return Math.max(worst, cleanDp(channel, massFlowKgS, rhoKgM3, viscPaS).dpPa / (loaded * paFromBar(dpHighBar)) - 1)
  }, -1)
}

/**
 * The working point of every segment from what is given, every gap filled by a stated assumption or left null. Where no flow is given at all, half
 * the range of the flow tags, or less where that would bring a clean pressure drop near its limit. Errors: FLUID_* from a stream's liquid.
 */
export function operationOf(skid: Skid, given: Given = {}): Operation {
  const half = operationAt(skid, given, 1)
  const anyGiven = Object.values(given.flows ?? {}).some((f) => f !== null && f > 0)
  if (anyGiven || overload(half) <= 0 || overload(operationAt(skid, given, leastScale)) >= 0) return half
  return operationAt(
    skid,
    given,
    risingRoot((scale) => overload(operationAt(skid, given, scale)), leastScale, 1),
  )
}
/** Below this the static head alone is what stands against the limit. */
const leastScale = 1e-3

function operationAt(skid: Skid, given: Given, scale: number): Operation {
  const assumptions: string[] = []
  const streams = streamFlows(skid, given, scale, assumptions)
  const segments = skid.segments.map((spec): SegmentOperation => {
    const own = streams.filter((s) => spec.streams.includes(s.id))
    const massFlowKgS = own.length === 0 ? null : sum(own.map((s) => s.massFlowKgS))
    const volumeFlowM3S = own.length === 0 ? null : sum(own.map((s) => s.volumeFlowM3S))
    const parts = own.flatMap((s) => (s.fluid === null || s.massFlowKgS === null ? [] : [{ fluid: s.fluid, mass: s.massFlowKgS }]))
    const total = parts.reduce((a, p) => a + p.mass, 0)
    const fluid =
      parts.length === own.length && total > 0
        ? mixByMass(parts.map((p) => ({ fluid: p.fluid, massFraction: p.mass / total })))
        : null
    const channel = spec.channel === null ? null : channelOf(spec.channel)
    const { meanK, coldestK, readK } = temperatureOf(skid, spec, given, assumptions)
    const coolant = spec.coolantTemperature === null ? undefined : given.temperatures?.[spec.coolantTemperature]
    const coolantTag = skid.tags.find((t) => t.tag === spec.coolantTemperature)
    const coolantK =
      coolant === undefined || coolant === null || coolantTag === undefined ? null : toSi(coolant, valueUnit(coolantTag))
    const volumeM3 = spec.volumeMl !== null ? spec.volumeMl * 1e-6 : channel === null ? null : channelVolumeM3(channel)
    return {
      spec,
      streams: own,
      fluid,
      massFlowKgS,
      volumeFlowM3S,
      tempK: meanK,
      coldestK: coolantK === null ? coldestK : Math.min(coldestK, coolantK),
      coolantK,
      readK,
      differenceUK: Math.hypot(
        uOf(
          skid.tags.find((t) => t.tag === spec.temperatures.at(-1)),
          meanK,
        ),
        uOf(coolantTag, coolantK ?? meanK),
      ),
      channel,
      volumeM3,
    }
  })
  return { streams, segments, flowTags: skid.tags.filter((t) => skid.streams.some((o) => o.flowTag === t.tag)), assumptions }
}
