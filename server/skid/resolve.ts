import type { ChannelSpec, DpSource, LimitsSpec, LogFormat, SegmentSpec, Skid, StreamSpec, TagSpec } from '../core/skid.ts'
import type { LogFile } from './log-shape.ts'
import type { SegmentFile, SkidFile, StreamFile, TagFile } from './skid-shape.ts'

/** A value that the checks have made sure of. */
function sure<T>(value: T | undefined): T {
  if (value === undefined) throw new TypeError('a checked skid file lacks a value that the checks require')
  return value
}
const all = <T>(values: readonly (T | undefined)[] | undefined): T[] => (values ?? []).map(sure)

/** Defaults filled in and references resolved. Only for a file without problems: throws a TypeError otherwise. */
export function resolveSkid(file: SkidFile): Skid {
  const scanSeconds = file.scanSeconds ?? 1
  const tags = all(file.tags)
  return {
    skid: sure(file.skid),
    title: file.title ?? sure(file.skid),
    timeZone: file.timeZone ?? 'UTC',
    scanSeconds,
    lateSeconds: file.lateSeconds ?? 2 * scanSeconds,
    phaseColumn: file.phaseColumn ?? null,
    log: all(file.log).map(logFormat),
    detection: { falseAlarmDays: file.detection?.falseAlarmDays ?? 30, riseToFindPct: file.detection?.riseToFindPct ?? 5 },
    tags: tags.map((tag) => tagSpec(tag, tags)),
    streams: all(file.streams).map(streamSpec),
    segments: all(file.segments).map(segmentSpec),
    alarms: Object.fromEntries([...(file.alarms ?? [])].map(([key, fields]) => [key, given(sure(fields))])),
    ...(file.suppression === undefined || file.suppression.size === 0
      ? {}
      : {
          suppression: Object.fromEntries(
            [...file.suppression].map(([name, logic]) => [name, { alarms: all(logic?.alarms), phases: all(logic?.phases) }]),
          ),
        }),
    ...(file.disturbances === undefined ? {} : { disturbances: given(file.disturbances) }),
  }
}

/** The keys that were given. */
const given = <V>(fields: Readonly<Record<string, V | undefined>>): Record<string, V> =>
  Object.fromEntries(Object.entries(fields).flatMap(([key, value]) => (value === undefined ? [] : [[key, value]])))

const logFormat = (log: LogFile): LogFormat => ({
  files: log.files ?? null,
  time: log.time === undefined ? null : all(log.time),
  timeFormat: all(log.timeFormat),
  missing: all(log.missing),
  clockOffsetSeconds: log.clockOffsetSeconds ?? 0,
})

function tagSpec(tag: TagFile, tags: readonly TagFile[]): TagSpec {
  const range = all(tag.range)
  const target = tags.find((other) => other.tag === tag.setpointFor)
  return {
    tag: sure(tag.tag),
    column: tag.column ?? sure(tag.tag),
    quantity: sure(tag.quantity),
    unit: tag.unit ?? (tag.quantity === 'setpoint' ? (target?.unit ?? null) : null),
    range: range.length === 2 ? [sure(range[0]), sure(range[1])] : null,
    accuracyPct: tag.accuracyPct ?? 0.25,
    accuracyAssumed: tag.accuracyPct === undefined,
    signal: tag.signal ?? null,
    sensor: tag.sensor ?? null,
    burnout: tag.burnout ?? null,
    setpointFor: tag.setpointFor ?? null,
  }
}

const streamSpec = (stream: StreamFile): StreamSpec => ({
  id: sure(stream.id),
  title: stream.title ?? sure(stream.id),
  flowTag: sure(stream.flowTag),
  fluid: stream.fluid ?? null,
  waterPpm: stream.waterPpm ?? null,
  reagent:
    stream.reagent === undefined
      ? null
      : { name: sure(stream.reagent.name), concentrationMolL: sure(stream.reagent.concentrationMolL) },
})

function segmentSpec(segment: SegmentFile): SegmentSpec {
  const reaction = segment.reaction
  return {
    id: sure(segment.id),
    title: segment.title ?? sure(segment.id),
    kind: sure(segment.kind),
    streams: all(segment.streams),
    dp: dpSource(segment),
    temperatures: all(segment.temperatures),
    coolantTemperature: segment.coolantTemperature ?? null,
    channel: segment.channel === undefined ? null : channelSpec(segment.channel),
    volumeMl: segment.volumeMl ?? null,
    warmUpKPerMin: segment.warmUpKPerMin ?? null,
    limits: limitsSpec(segment.limits),
    reaction:
      reaction === undefined
        ? null
        : {
            limitingStream: sure(reaction.limitingStream),
            concentrationMolL: sure(reaction.concentrationMolL),
            enthalpyKJMol: sure(reaction.enthalpyKJMol),
          },
  }
}

function dpSource({ dpTag, pressureIn, pressureOut }: SegmentFile): DpSource {
  if (dpTag !== undefined) return { kind: 'dp', dpTag }
  const out = sure(pressureOut)
  if (out === 'ambient') return { kind: 'held', pressureIn: sure(pressureIn), outBar: 0, ambient: true }
  return 'tag' in out
    ? { kind: 'taps', pressureIn: sure(pressureIn), pressureOut: out.tag }
    : { kind: 'held', pressureIn: sure(pressureIn), outBar: out.bar, ambient: false }
}

const channelSpec = (channel: NonNullable<SegmentFile['channel']>): ChannelSpec => ({
  diameterMm: channel.diameterMm ?? null,
  widthMm: channel.widthMm ?? null,
  depthMm: channel.depthMm ?? null,
  coreMm: channel.coreMm ?? null,
  bends: channel.bends ?? 0,
  lengthM: channel.lengthM ?? null,
  parallel: channel.parallel ?? 1,
  roughnessUm: channel.roughnessUm ?? 0,
  wallMm: channel.wallMm ?? null,
  coilDiameterMm: channel.coilDiameterMm ?? null,
  heightM: channel.heightM ?? 0,
  wallConductivityWMK: channel.wallConductivityWMK ?? null,
  outerFilmWM2K: channel.outerFilmWM2K ?? null,
})

function limitsSpec(limits: SegmentFile['limits']): LimitsSpec {
  const ratio = limits?.feedRatio
  return {
    dpHighBar: limits?.dpHighBar ?? null,
    dpHighHighBar: limits?.dpHighHighBar ?? null,
    pressureHighBar: limits?.pressureHighBar ?? null,
    temperatureHighC: limits?.temperatureHighC ?? null,
    temperatureHighHighC: limits?.temperatureHighHighC ?? null,
    temperatureLowC: limits?.temperatureLowC ?? null,
    flowLow: limits?.flowLow ?? null,
    feedRatio:
      ratio === undefined ? null : { of: [sure(ratio.of?.[0]), sure(ratio.of?.[1])], low: sure(ratio.low), high: sure(ratio.high) },
  }
}
