import { type DepositReadings, depositReadings, pluggedRatio } from '../deposit/readings.ts'
import { runLengthS, USUAL_CAPTURE } from '../deposit/run-length.ts'
import { liohRateM3S, reagentShareLost, waterProducts } from '../deposit/water-in-feed.ts'
import { MonitorError } from '../errors.ts'
import { channelVolumeM3 } from '../hydraulics/channel.ts'
import { type CleanDp, cleanDp } from '../hydraulics/clean-dp.ts'
import { temperatureUncertainty } from '../instruments/tolerance.ts'
import type { Skid } from '../skid.ts'
import { cFromK, paFromBar } from '../units.ts'
import { dpUncertainty } from './dp-uncertainty.ts'
import { type HeatFigures, heatFigures } from './heat-figures.ts'
import { type Given, type Operation, operationOf, type SegmentOperation } from './operation.ts'
import { carriesOrganolithium } from './organolithium.ts'

/** What the tool derives for one segment at its working point, SI; null where the file does not carry it. */
export interface SegmentFigures {
  readonly segment: string
  readonly title: string
  readonly volumeFlowM3S: number | null
  readonly tempK: number
  readonly volumeM3: number | null
  readonly residenceS: number | null
  readonly dp: CleanDp | null
  readonly heat: HeatFigures | null
  /** LiOH that forms here at the stated water contents, m³/s. */
  readonly liohM3S: number | null
  /** Time from clean to dpHigh when a tenth of it stays, s. */
  readonly runLengthS: number | null
  readonly dpUncertaintyPa: number | null
  /** Standard uncertainty of its thermometers, K; null where it has none. */
  readonly temperatureUK: number | null
  readonly temperatureBasis: string | null
  /** Share of the organolithium that this water takes, and twice that should LiOH go on to Li2O; null where not known or none meets water. */
  readonly reagentLost: number | null
  /** What would show a resistance of `exampleRatio` times clean. */
  readonly deposit: DepositReadings | null
  /** Resistance over clean with one of its parallel branches plugged; null with one branch. */
  readonly pluggedRatio: number | null
  readonly warnings: readonly string[]
  readonly missing: readonly string[]
}

/** A deposit that shows half as much again is the example of the page. */
export const exampleRatio = 1.5

export interface SkidFigures {
  readonly segments: readonly SegmentFigures[]
  readonly assumptions: readonly string[]
}

/**
 * Wet feeds that meet the organolithium in this segment for the first time. Where no feed is named as an organolithium: every feed where feeds first
 * meet. The organolithium's own water has reacted in its drum. None in a quench, where lithium hydroxide stays dissolved.
 */
function wettingStreams(op: SegmentOperation, all: Operation): SegmentOperation['streams'] {
  const active = all.streams.filter((s) => carriesOrganolithium(s.spec)).map((s) => s.id)
  const meets = (ids: readonly string[]) => (active.length > 0 ? ids.some((id) => active.includes(id)) : ids.length > 1)
  if (op.spec.kind === 'quench' || !meets(op.spec.streams)) return []
  const earlier = all.segments.slice(0, all.segments.indexOf(op)).filter((s) => meets(s.spec.streams))
  return op.streams.filter((s) => !active.includes(s.id) && !earlier.some((e) => e.spec.streams.includes(s.id)))
}

/** Moles of water that the wet feeds bring over moles of organolithium here; null where a flow, a content or a concentration is not known. */
function reagentLost(wet: SegmentOperation['streams'], op: SegmentOperation): number | null {
  const reagent = op.streams.find((s) => carriesOrganolithium(s.spec))
  const concentration = reagent?.spec.reagent?.concentrationMolL ?? null
  if (wet.length === 0 || reagent?.volumeFlowM3S == null || concentration === null) return null
  let share = 0
  for (const s of wet) {
    if (s.spec.waterPpm === null || s.fluid === null || s.volumeFlowM3S === null) return null
    const { waterMolM3 } = waterProducts(s.spec.waterPpm, s.fluid.at(s.tempK).rhoKgM3)
    share += reagentShareLost(waterMolM3, s.volumeFlowM3S, concentration * 1000, reagent.volumeFlowM3S)
  }
  return share
}

function figuresOf(skid: Skid, op: SegmentOperation, all: Operation): SegmentFigures {
  const warnings: string[] = []
  const missing: string[] = []
  const { channel, fluid, massFlowKgS, volumeFlowM3S, volumeM3, spec } = op
  const state = fluid === null ? null : fluid.at(op.tempK)
  if (channel === null) missing.push('Re, De, pressure drop, heat: need channel with bore and length')
  if (fluid === null) missing.push('Re, pressure drop, heat: need the liquid and flow (or flow range) of every stream')
  if (state?.uncertain) warnings.push('liquid properties outside their published range')
  const working =
    channel === null || state === null || massFlowKgS === null || massFlowKgS <= 0
      ? null
      : { channel, state, at: { massFlowKgS, rhoKgM3: state.rhoKgM3, viscPaS: state.viscPaS } }
  const dp = working === null ? null : cleanDp(working.channel, working.at.massFlowKgS, working.at.rhoKgM3, working.at.viscPaS)
  if (dp?.uncertain) warnings.push(`Re ${dp.re.toFixed(0)} lies between laminar and turbulent: pressure drop uncertain by 20 %`)
  const heat = working === null || dp === null ? null : heatFigures(op, working.state, dp.re)
  missing.push(...(heat?.missing ?? []))
  if (channel !== null && spec.volumeMl !== null && Math.abs(channelVolumeM3(channel) / (spec.volumeMl * 1e-6) - 1) > 0.1) {
    warnings.push(
      `volumeMl ${spec.volumeMl} and the channel's own ${(channelVolumeM3(channel) * 1e6).toPrecision(3)} mL differ by more than 10 %`,
    )
  }
  const u = dpUncertainty(skid, spec)
  missing.push(...u.missing)
  warnings.push(...u.assumed)
  if (u.uPa !== null && dp !== null && dp.dpPa < 3 * u.uPa) {
    warnings.push(
      dp.dpPa < u.uPa
        ? `clean pressure drop is below its own uncertainty u (${u.tags.join(', ')}): no baseline`
        : `clean pressure drop is below 3 u of its taps (${u.tags.join(', ')}): small rises cannot be told`,
    )
  }
  const probe = skid.tags.find((t) => t.tag === spec.temperatures[0])
  const sensor = probe === undefined ? null : temperatureUncertainty(probe.sensor, cFromK(op.tempK))
  const thermometers = { temperatureUK: sensor?.uK ?? null, temperatureBasis: sensor?.basis ?? null }
  const wet = wettingStreams(op, all)
  const liohM3S =
    wet.length === 0
      ? 0
      : liohRateM3S(
          wet.flatMap((s) =>
            s.volumeFlowM3S === null || s.fluid === null
              ? []
              : [{ waterPpm: s.spec.waterPpm, rhoKgM3: s.fluid.at(s.tempK).rhoKgM3, flowM3S: s.volumeFlowM3S }],
          ),
        )
  if (liohM3S === null) missing.push(`deposit rate: needs waterPpm and flow of ${wet.map((s) => s.id).join(', ')}`)
  const { dpHighBar } = spec.limits
  const clean = dp === null ? 0 : dp.frictionPa + dp.bendPa
  const limitRatio = dpHighBar === null || dp === null || clean <= 0 ? null : (paFromBar(dpHighBar) - dp.staticPa) / clean
  if (limitRatio !== null && limitRatio <= 1) warnings.push('clean pressure drop at this flow is at or above dpHigh')
  const run =
    working === null || limitRatio === null || limitRatio <= 1 || liohM3S === null
      ? null
      : runLengthS(working.channel, working.at, limitRatio, liohM3S, USUAL_CAPTURE)
  return {
    segment: spec.id,
    title: spec.title,
    volumeFlowM3S,
    tempK: op.tempK,
    volumeM3,
    residenceS: volumeM3 === null || volumeFlowM3S === null || volumeFlowM3S <= 0 ? null : volumeM3 / volumeFlowM3S,
    dp,
    heat,
    liohM3S,
    runLengthS: run,
    dpUncertaintyPa: u.uPa,
    ...thermometers,
    reagentLost: reagentLost(wet, op),
    pluggedRatio:
      working === null || clean <= 0 || working.channel.parallel < 2 ? null : pluggedRatio(working.channel, working.at, 1),
    deposit:
      working === null || clean <= 0
        ? null
        : depositReadings(working.channel, working.at, { value: exampleRatio, low: exampleRatio, high: exampleRatio }),
    warnings: [...warnings, ...(heat?.notes ?? [])],
    missing,
  }
}

/**
 * Derived figures of every segment at the given flows and temperatures, or at the stated assumptions (`operationOf`). A liquid outside the range of
 * its correlations leaves that segment's figures null and says so. Errors: FLUID_* from a stream's liquid itself.
 */
export function skidFigures(skid: Skid, given: Given = {}): SkidFigures {
  const operation = operationOf(skid, given)
  const segments = operation.segments.map((op): SegmentFigures => {
    try {
      return figuresOf(skid, op, operation)
    } catch (cause) {
      if (!(cause instanceof MonitorError)) throw cause
      return {
        segment: op.spec.id,
        title: op.spec.title,
        volumeFlowM3S: op.volumeFlowM3S,
        tempK: op.tempK,
        volumeM3: op.volumeM3,
        residenceS: null,
        dp: null,
        heat: null,
        liohM3S: null,
        runLengthS: null,
        dpUncertaintyPa: null,
        temperatureUK: null,
        temperatureBasis: null,
        reagentLost: null,
        deposit: null,
        pluggedRatio: null,
        warnings: [],
        missing: [cause.message],
      }
    }
  })
  const named = skid.streams.some((s) => carriesOrganolithium(s))
  const assumptions = named
    ? operation.assumptions
    : [...operation.assumptions, 'no feed is named as an organolithium: the water of every feed counted where feeds first meet']
  return { segments, assumptions }
}
