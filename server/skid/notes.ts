import { defaultRationales, type RationaleName } from '../core/alarms/default-rationale.ts'
import { responseSlackS } from '../core/alarms/priority.ts'
import { rationale } from '../core/alarms/rationale.ts'
import type { ChannelSpec, SegmentSpec, Skid, StreamSpec } from '../core/skid.ts'
import { valueUnit } from '../core/units.ts'

/** What the tool leaves out or assumes with this file, in plain words, in file order. None of it is a mistake. */
export function notesOn(skid: Skid): string[] {
  const notes: string[] = []
  if (skid.phaseColumn === null)
    notes.push('no phaseColumn: production is inferred from flows and temperatures, and shown as inferred')
  const assumed = skid.tags.filter((tag) => tag.accuracyAssumed && tag.unit !== null)
  if (assumed.length > 0)
    notes.push(`accuracyPct is not given on ${assumed.length} of ${skid.tags.length} tags: 0.25 % of span is assumed`)
  const open = skid.tags.filter((tag) => tag.range === null && tag.unit !== null && tag.quantity !== 'setpoint')
  if (open.length > 0)
    notes.push(`no range on ${open.map((tag) => tag.tag).join(', ')}: readings are not checked against the instrument's range`)
  for (const tag of skid.tags) {
    if (tag.unit === 'mA' && tag.range !== null)
      notes.push(`tag ${tag.tag}: its range ${tag.range.join(' to ')} is taken in ${valueUnit(tag) ?? 'its unit'}, at 4 and 20 mA`)
  }
  for (const stream of skid.streams) for (const note of streamNotes(stream, skid)) notes.push(`stream ${stream.id}: ${note}`)
  for (const segment of skid.segments) for (const note of segmentNotes(segment, skid)) notes.push(`segment ${segment.id}: ${note}`)
  for (const key of Object.keys(skid.alarms)) {
    const slackS = slackOf(skid, key)
    if (slackS < 0)
      notes.push(
        `alarms.${key}: its delays and a minute to understand and act take ${(-slackS).toFixed(0)} s more than its timeToRespondSeconds: it cannot be relied on`,
      )
  }
  return notes
}

/** What the tool itself takes, and what a person needs to understand and to act, s (common practice). */
const response = { detectionScans: 2, displayS: 1, diagnosisS: 30, actionS: 30 }

/** Time to respond less every delay on the way (ALM-04) of an alarm that the file names; of several variants the tightest, s. */
function slackOf(skid: Skid, key: string): number {
  const [kind, segment] = key.split(':')
  const names = (Object.keys(defaultRationales) as RationaleName[]).filter((n) => defaultRationales[n].kind === kind)
  return Math.min(
    ...names.map((name) => {
      const r = rationale(name, segment ?? null, { scanS: skid.scanSeconds, residenceS: null }, skid.alarms)
      const { detectionScans, ...rest } = response
      return responseSlackS(
        { ...rest, detectionS: detectionScans * skid.scanSeconds, onDelayS: r.onDelaySeconds, deadTimeS: 0 },
        r.timeToRespondSeconds,
      )
    }),
  )
}

function streamNotes(stream: StreamSpec, skid: Skid): string[] {
  const notes: string[] = []
  const mass = skid.tags.find((tag) => tag.tag === stream.flowTag)?.quantity === 'massFlow'
  if (stream.fluid === null)
    notes.push(
      `no fluid: viscosity and density are not taken out${mass ? ', volume flow and residence time are left out' : ', mass flow is left out'}`,
    )
  if (!skid.segments.some((segment) => segment.streams.includes(stream.id))) notes.push('flows through no segment')
  return notes
}

function segmentNotes(segment: SegmentSpec, skid: Skid): string[] {
  const notes: string[] = []
  const { limits, channel } = segment
  const streams = skid.streams.filter((stream) => segment.streams.includes(stream.id))
  if (segment.dp.kind === 'held')
    notes.push(`the outlet is ${segment.dp.ambient ? 'ambient' : 'held'}, not measured: its drift is in the interval of the ratio`)
  if (segment.temperatures.length === 0) {
    notes.push('no temperatures: no viscosity correction and no exotherm watch')
    if (limits.temperatureHighC !== null || limits.temperatureHighHighC !== null || limits.temperatureLowC !== null)
      notes.push('its temperature limits are NOT watched: there is no temperature to hold against them')
  }
  if (segment.coolantTemperature === null && segment.kind === 'reactor')
    notes.push('no coolantTemperature: a temperature excursion cannot be told from a warmer coolant')
  const mlFromChannel = channel === null ? null : channelMl(channel)
  if (mlFromChannel === null)
    notes.push(
      'no bore and length of the channel: no clean pressure drop from geometry (it is fitted on the baseline) and no deposit thickness',
    )
  if (segment.volumeMl === null)
    notes.push(
      mlFromChannel === null
        ? 'no volumeMl: no residence time'
        : `no volumeMl: the channel's ${mlFromChannel.toPrecision(3)} mL is taken`,
    )
  else if (mlFromChannel !== null && Math.abs(segment.volumeMl / mlFromChannel - 1) > 0.2)
    notes.push(
      `volumeMl is ${segment.volumeMl}, the channel holds ${mlFromChannel.toPrecision(3)} mL: check diameterMm, lengthM and parallel`,
    )
  if (limits.dpHighBar === null) notes.push('no dpHighBar: no forecast and no pressure drop alarm')
  if (limits.feedRatio !== null) {
    for (const stream of streams) {
      const mass = skid.tags.find((tag) => tag.tag === stream.flowTag)?.quantity === 'massFlow'
      if (limits.feedRatio.of.includes(stream.id) && mass && stream.fluid === null)
        notes.push(`the feed ratio is NOT watched: the fluid of stream ${stream.id} is needed to turn its mass flow into mol/h`)
    }
  }
  if (segment.kind === 'reactor' && segment.reaction === null)
    notes.push('no reaction: no adiabatic temperature rise as the scale of what could come')
  const fed = streams.find((stream) => stream.id === segment.reaction?.limitingStream)?.reagent
  if (fed && segment.reaction && Math.abs(fed.concentrationMolL / segment.reaction.concentrationMolL - 1) > 0.01)
    notes.push(
      `reaction.concentrationMolL ${segment.reaction.concentrationMolL} differs from the reagent's ${fed.concentrationMolL} in stream ${segment.reaction.limitingStream}`,
    )
  if (segment.warmUpKPerMin === null && segment.temperatures.length > 0)
    notes.push('no warmUpKPerMin: the flush plan gives no time for the warm-up')
  return notes
}

/**
 * Volume of `parallel` bores, mL, or null without bore or length: cross-section [mm²] · length [m] · n (mm² · m = mL), the cross-section
 * π/4 · (d² − core²) or width · depth.
 */
function channelMl({ diameterMm, widthMm = null, depthMm = null, coreMm, lengthM, parallel }: ChannelSpec): number | null {
  const rectangle = widthMm !== null && depthMm !== null ? widthMm * depthMm : null
  const section = diameterMm !== null ? (Math.PI / 4) * (diameterMm ** 2 - (coreMm ?? 0) ** 2) : rectangle
  return section === null || lengthM === null ? null : section * lengthM * parallel
}
