import { checkAlarmField } from '../alarms/rationale.ts'
import { disturbances } from '../bank/model.ts'
import { MonitorError } from '../errors.ts'
import { phases } from '../reading.ts'
import { alarmKinds } from '../report.ts'
import { type LimitName, limitNames } from '../sequence.ts'
import type { SegmentSpec, Skid, StreamSpec, SuppressionSpec } from '../skid.ts'
import { type SettingChange, type SettingValue, sameSetting } from './flat.ts'

/** One place of a configuration that may change within a run. */
interface Slot {
  readonly value: SettingValue
  /** Why a value may not stand there; null where it may. Ranges between settings are the reader's of the skid file. */
  why(v: SettingValue): string | null
  with(v: SettingValue): Skid
}

const needs = (v: SettingValue, least: number, orNone: boolean, above = false): string | null =>
  v === null && orNone
    ? null
    : typeof v !== 'number' || !Number.isFinite(v) || v < least || (above && v <= least)
      ? `a number ${above ? 'above' : 'of at least'} ${least}${orNone ? ', or null for none' : ''} is needed`
      : null
const names = (v: SettingValue, fits: (name: string) => boolean, what: string): string | null =>
  v === null || (Array.isArray(v) && v.length > 0 && v.every((x) => typeof x === 'string' && fits(x)))
    ? null
    : `a list of ${what} is needed`

const segmentWith = (skid: Skid, i: number, more: Partial<SegmentSpec>): Skid => ({
  ...skid,
  segments: skid.segments.map((s, j) => (j === i ? { ...s, ...more } : s)),
})
const streamWith = (skid: Skid, i: number, more: Partial<StreamSpec>): Skid => ({
  ...skid,
  streams: skid.streams.map((s, j) => (j === i ? { ...s, ...more } : s)),
})
/** A group with one member set, or taken away by null. */
function member<V>(group: Readonly<Record<string, V>> | undefined, key: string, v: V | null): Record<string, V> {
  const { [key]: _, ...rest } = group ?? {}
  return v === null ? rest : { ...rest, [key]: v }
}

function segmentSlot(skid: Skid, id: string, rest: readonly string[]): Slot | null {
  const i = skid.segments.findIndex((s) => s.id === id)
  const spec = skid.segments[i]
  if (spec === undefined) return null
  const { limits } = spec
  if (rest.length === 1 && rest[0] === 'baselineVersion')
    return {
      value: spec.baselineVersion ?? null,
      why: (v) => needs(v, 0, false),
      with: (v) => segmentWith(skid, i, { baselineVersion: v as number }),
    }
  const name = rest[1] as LimitName
  if (rest.length === 2 && rest[0] === 'limits' && limitNames.includes(name))
    return {
      value: limits[name],
      why: (v) => (name.startsWith('temperature') ? needs(v, -273.15, true) : needs(v, 0, true, name !== 'flowLow')),
      with: (v) => segmentWith(skid, i, { limits: { ...limits, [name]: v as number | null } }),
    }
  const ratio = limits.feedRatio
  const side = rest[2]
  if (ratio !== null && rest[0] === 'limits' && rest[1] === 'feedRatio' && (side === 'low' || side === 'high') && rest.length === 3)
    return {
      value: ratio[side],
      why: (v) => needs(v, 0, false),
      with: (v) => segmentWith(skid, i, { limits: { ...limits, feedRatio: { ...ratio, [side]: v as number } } }),
    }
  return null
}

function streamSlot(skid: Skid, id: string, rest: string): Slot | null {
  const i = skid.streams.findIndex((s) => s.id === id)
  const spec = skid.streams[i]
  if (spec === undefined) return null
  if (rest === 'waterPpm')
    return {
      value: spec.waterPpm,
      why: (v) => needs(v, 0, true) ?? (Number(v) > 1e6 ? 'at most 1000000 ppm' : null),
      with: (v) => streamWith(skid, i, { waterPpm: v as number | null }),
    }
  const { reagent } = spec
  if (rest === 'reagent.concentrationMolL' && reagent !== null)
    return {
      value: reagent.concentrationMolL,
      why: (v) => needs(v, 0, false, true),
      with: (v) => streamWith(skid, i, { reagent: { ...reagent, concentrationMolL: v as number } }),
    }
  return null
}

/** `kind` or `kind:SEGMENT` of an alarm that this skid can have. */
const isAlarm = (skid: Skid, key: string): boolean => {
  const [kind = '', ...segment] = key.split(':')
  const isKind = (alarmKinds as readonly string[]).includes(kind)
  return isKind && (segment.length === 0 || (segment.length === 1 && skid.segments.some((s) => s.id === segment[0])))
}

function alarmSlot(skid: Skid, key: string, field: string): Slot | null {
  if (!isAlarm(skid, key)) return null
  const fields = skid.alarms[key]
  return {
    value: fields !== undefined && Object.hasOwn(fields, field) ? fields[field]! : null,
    why(v) {
      if (v === null) return null
      if (typeof v === 'object') return 'one value is needed'
      try {
        checkAlarmField(key, field, v)
        return null
      } catch (error) {
        if (error instanceof MonitorError) return error.message
        throw error
      }
    },
    with(v) {
      const now = member(fields, field, v as string | number | boolean | null)
      return { ...skid, alarms: member(skid.alarms, key, Object.keys(now).length === 0 ? null : now) }
    },
  }
}

function suppressionSlot(skid: Skid, name: string, part: string): Slot | null {
  if (!/^[A-Za-z0-9-]{1,64}$/.test(name) || (part !== 'alarms' && part !== 'phases')) return null
  const logic: Partial<SuppressionSpec> =
    skid.suppression !== undefined && Object.hasOwn(skid.suppression, name) ? skid.suppression[name]! : {}
  const list = logic[part] ?? []
  return {
    value: list.length === 0 ? null : list,
    why: (v) =>
      part === 'alarms'
        ? names(v, (x) => isAlarm(skid, x), 'alarm kinds or kind:SEGMENT')
        : names(v, (x) => (phases as readonly string[]).includes(x), `phases (${phases.join(', ')})`),
    with(v) {
      const now = { alarms: [], phases: [], ...logic, [part]: v ?? [] } as SuppressionSpec
      const gone = now.alarms.length === 0 && now.phases.length === 0
      return { ...skid, suppression: member(skid.suppression, name, gone ? null : now) }
    },
  }
}

/** The place that a path names; null where nothing there can change within a run: such a change is of the skid file and needs a new run. */
function slotOf(skid: Skid, path: string): Slot | null {
  const [top, name = '', ...rest] = path.split('.')
  switch (top) {
    case 'detection': {
      const key = name as keyof Skid['detection']
      if (rest.length > 0 || (name !== 'falseAlarmDays' && name !== 'riseToFindPct')) return null
      return {
        value: skid.detection[key],
        why: (v) => needs(v, 0, false, true) ?? (Number(v) > (name === 'riseToFindPct' ? 100 : 3650) ? 'too large' : null),
        with: (v) => ({ ...skid, detection: { ...skid.detection, [key]: v as number } }),
      }
    }
    case 'segments':
      return segmentSlot(skid, name, rest)
    case 'streams':
      return streamSlot(skid, name, rest.join('.'))
    case 'alarms':
      return rest.length === 1 ? alarmSlot(skid, name, rest[0]!) : null
    case 'suppression':
      return rest.length === 1 ? suppressionSlot(skid, name, rest[0]!) : null
    case 'disturbances':
      return rest.length > 0 || !Object.hasOwn(disturbances, name)
        ? null
        : {
            value: skid.disturbances?.[name] ?? null,
            why: (v) => needs(v, 0, true, name === 'wanderTauH' || name === 'meterTauH'),
            with: (v) => ({ ...skid, disturbances: member(skid.disturbances, name, v as number | null) }),
          }
    default:
      return null
  }
}

/** Whether a setting may change within a run. What may not is of the skid file itself: tags, columns, streams, geometry. */
export const isChangeable = (skid: Skid, path: string): boolean => slotOf(skid, path) !== null

/** The value of a setting that may change within a run; null where it is not set or there is none such. */
export const settingOf = (skid: Skid, path: string): SettingValue => slotOf(skid, path)?.value ?? null

/** Changes laid over a configuration, one after the other. One that cannot stand is left out and said. */
export function applyChanges(
  skid: Skid,
  changes: readonly Pick<SettingChange, 'path' | 'new'>[],
): { readonly skid: Skid; readonly left: readonly string[] } {
  const left: string[] = []
  let now = skid
  for (const { path, new: v } of changes) {
    const slot = slotOf(now, path)
    const why = slot === null ? 'cannot change within a run' : slot.why(v)
    if (why !== null) left.push(`${path}: ${why}`)
    else if (!sameSetting(slot!.value, v)) now = slot!.with(v)
  }
  return { skid: now, left }
}
