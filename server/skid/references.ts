import { alarmKinds } from '../core/report.ts'
import type { Quantity } from '../core/units.ts'
import { meant } from './nearest.ts'
import { keyText, type Path, quote } from './problem.ts'
import type { SegmentFile, SkidFile, TagFile } from './skid-shape.ts'
import type { Walk } from './walk.ts'

/** Every name that must be unique, and every name that must exist and be of the right kind. */
export function checkReferences(file: SkidFile, walk: Walk): void {
  const tags = new Map<string, TagFile>()
  for (const tag of file.tags ?? []) if (tag?.tag !== undefined && !tags.has(tag.tag)) tags.set(tag.tag, tag)
  const streams = new Set((file.streams ?? []).flatMap((s) => s?.id ?? []))

  once(
    walk,
    (file.tags ?? []).map((tag, i) => ({ name: tag?.tag, path: ['tags', i, 'tag'] })),
    'tag',
  )
  once(
    walk,
    (file.streams ?? []).map((s, i) => ({ name: s?.id, path: ['streams', i, 'id'] })),
    'stream',
  )
  once(
    walk,
    (file.segments ?? []).map((s, i) => ({ name: s?.id, path: ['segments', i, 'id'] })),
    'segment',
  )
  checkColumns(file, walk)
  checkSuppression(file, walk)

  const toTag = (name: string | undefined, path: Path, fitting: readonly Quantity[]) => {
    if (name === undefined || file.tags === undefined) return
    const tag = tags.get(name)
    if (tag === undefined) {
      const fits = [...tags.values()].flatMap((t) =>
        t.tag !== undefined && t.quantity !== undefined && fitting.includes(t.quantity) ? t.tag : [],
      )
      walk.say(
        path,
        `${keyText(path)} names ${quote(name)}, which is no tag`,
        `a tag of quantity ${fitting.join(' or ')}`,
        meant(name, fits) ?? meant(name, [...tags.keys()]),
      )
    } else if (tag.quantity !== undefined && !fitting.includes(tag.quantity)) {
      walk.say(
        path,
        `${keyText(path)} names ${quote(name)}, which measures ${tag.quantity}`,
        `a tag of quantity ${fitting.join(' or ')}`,
      )
    }
  }
  const toStream = (name: string | undefined, path: Path) => {
    if (name === undefined || file.streams === undefined || streams.has(name)) return
    walk.say(
      path,
      `${keyText(path)} names ${quote(name)}, which is no stream`,
      `one of ${[...streams].join(', ')}`,
      meant(name, [...streams]),
    )
  }

  file.tags?.forEach((tag, i) => {
    if (tag !== undefined) checkSetpoint(tag, ['tags', i, 'setpointFor'], tags, walk)
  })
  file.streams?.forEach((stream, i) => {
    toTag(stream?.flowTag, ['streams', i, 'flowTag'], ['massFlow', 'volumeFlow'])
  })
  file.segments?.forEach((segment, i) => {
    if (segment === undefined) return
    const at: Path = ['segments', i]
    once(
      walk,
      (segment.streams ?? []).map((name, n) => ({ name, path: [...at, 'streams', n] })),
      'stream',
    )
    segment.streams?.forEach((name, n) => {
      toStream(name, [...at, 'streams', n])
    })
    checkPressures(segment, at, walk)
    toTag(segment.pressureIn, [...at, 'pressureIn'], ['pressure'])
    const out = segment.pressureOut
    if (typeof out === 'object' && 'tag' in out) toTag(out.tag, [...at, 'pressureOut'], ['pressure'])
    toTag(segment.dpTag, [...at, 'dpTag'], ['differentialPressure'])
    once(
      walk,
      (segment.temperatures ?? []).map((name, n) => ({ name, path: [...at, 'temperatures', n] })),
      'tag',
    )
    segment.temperatures?.forEach((name, n) => {
      toTag(name, [...at, 'temperatures', n], ['temperature'])
    })
    toTag(segment.coolantTemperature, [...at, 'coolantTemperature'], ['temperature'])
    const inSegment = (name: string | undefined, path: Path) => {
      if (name === undefined || segment.streams === undefined || segment.streams.includes(undefined)) return
      if (segment.streams.includes(name)) return
      const own = segment.streams.flatMap((s) => s ?? [])
      walk.say(
        path,
        `${keyText(path)} names ${quote(name)}, which does not flow through ${segment.id ?? 'this segment'}`,
        `one of its streams: ${own.join(', ')}`,
        meant(name, own),
      )
    }
    inSegment(segment.reaction?.limitingStream, [...at, 'reaction', 'limitingStream'])
    segment.limits?.feedRatio?.of?.forEach((name, n) => {
      inSegment(name, [...at, 'limits', 'feedRatio', 'of', n])
    })
  })
  checkAlarmSegments(file, walk)
}

interface Named {
  readonly name: string | undefined
  readonly path: Path
}

function once(walk: Walk, all: readonly Named[], what: string): void {
  const seen = new Map<string, Path>()
  for (const { name, path } of all) {
    if (name === undefined) continue
    if (seen.has(name)) walk.say(path, `${what} ${quote(name)} stands twice`, `each ${what} once`, 'rename or remove one')
    else seen.set(name, path)
  }
}

/** No two tags may read one column, and none the phase's or a time column (a tag of words may share the phase's). */
function checkColumns(file: SkidFile, walk: Walk): void {
  const taken = new Map<string, string>()
  for (const log of file.log ?? []) for (const column of log?.time ?? []) if (column !== undefined) taken.set(column, 'the time')
  file.tags?.forEach((tag, i) => {
    const column = tag?.column ?? tag?.tag
    if (column === undefined) return
    const other = taken.get(column)
    const words = tag?.quantity === 'text' || tag?.quantity === 'state'
    const path = ['tags', i, 'column']
    if (other !== undefined && other !== tag?.tag)
      walk.say(path, `column ${quote(column)} is already ${other}`, 'a column of its own for each tag')
    else if (column === file.phaseColumn && !words)
      walk.say(path, `column ${quote(column)} is the phase`, 'a column of its own for each tag')
    taken.set(column, tag?.tag ?? 'taken')
  })
}

function checkSetpoint(tag: TagFile, path: Path, tags: ReadonlyMap<string, TagFile>, walk: Walk): void {
  if (tag.setpointFor === undefined) return
  const target = tags.get(tag.setpointFor)
  const says = 'the tag whose setpoint this is'
  if (target === undefined)
    walk.say(path, `setpointFor names ${quote(tag.setpointFor)}, which is no tag`, says, meant(tag.setpointFor, [...tags.keys()]))
  else if (target === tag || target.quantity === 'setpoint')
    walk.say(path, `setpointFor names ${quote(tag.setpointFor)}, ${target === tag ? 'itself' : 'which is a setpoint too'}`, says)
  else if (tag.quantity !== undefined && tag.quantity !== 'setpoint' && tag.quantity !== target.quantity)
    walk.say(path, `setpointFor on a tag of quantity ${tag.quantity}`, "quantity 'setpoint', or the quantity of its tag")
}

/** Either two taps (the outlet may be held or ambient) or one differential transmitter. */
function checkPressures(segment: SegmentFile, at: Path, walk: Walk): void {
  const gives = (key: string) => walk.has([...at, key])
  const name = segment.id === undefined ? 'the segment' : `segment ${segment.id}`
  if (gives('dpTag')) {
    for (const key of ['pressureIn', 'pressureOut']) {
      if (gives(key))
        walk.say([...at, key], `${name} has dpTag and ${key}`, 'dpTag alone, or pressureIn with pressureOut', 'remove one of them')
    }
    return
  }
  if (!gives('pressureIn'))
    walk.say(
      [...at, 'pressureIn'],
      `${name} has ${gives('pressureOut') ? 'pressureOut without pressureIn' : 'no pressures'}`,
      'pressureIn with pressureOut, or dpTag',
    )
  else if (!gives('pressureOut'))
    walk.say(
      [...at, 'pressureOut'],
      `${name} has pressureIn without pressureOut`,
      "pressureOut: a tag, a number of bar, or 'ambient'",
    )
  const out = segment.pressureOut
  if (typeof out === 'object' && 'tag' in out && out.tag === segment.pressureIn)
    walk.say([...at, 'pressureOut'], `pressureIn and pressureOut are both ${quote(out.tag)}`, 'two taps')
}

/** Suppression: its alarms exist, none is named by two, and the log says phases. */
function checkSuppression(file: SkidFile, walk: Walk): void {
  const ids = (file.segments ?? []).flatMap((s) => s?.id ?? [])
  const named: { readonly kind: string; readonly segment: string | null; readonly logic: string }[] = []
  for (const [name, logic] of file.suppression ?? []) {
    const at = ['suppression', name]
    if (file.phaseColumn === undefined)
      walk.say(
        at,
        `${quote(name)} suppresses by the phase`,
        'phaseColumn',
        'name the column of the log that holds the phase, or remove it',
      )
    for (const [i, key] of (logic?.alarms ?? []).entries()) {
      if (key === undefined) continue
      const [kind = '', segment = null] = key.split(':')
      const here = [...at, 'alarms', i]
      if (!(alarmKinds as readonly string[]).includes(kind))
        walk.say(here, `${quote(key)} is no alarm`, `one of ${alarmKinds.join(', ')}, or alarm:SEGMENT`, meant(kind, alarmKinds))
      else if (segment !== null && !ids.includes(segment))
        walk.say(here, `${quote(key)} names a segment that is not there`, `one of ${ids.join(', ')}`, meant(segment, ids))
      const before = named.find((n) => n.kind === kind && (n.segment === null || segment === null || n.segment === segment))
      if (before !== undefined)
        walk.say(
          here,
          `${quote(key)} is suppressed by ${quote(before.logic)} already`,
          'one logic for an alarm',
          'put all its phases into one',
        )
      named.push({ kind, segment, logic: name })
    }
  }
}

function checkAlarmSegments(file: SkidFile, walk: Walk): void {
  const ids = (file.segments ?? []).flatMap((s) => s?.id ?? [])
  for (const key of file.alarms?.keys() ?? []) {
    const colon = key.indexOf(':')
    const segment = key.slice(colon + 1)
    if (colon < 0 || ids.includes(segment)) continue
    const near = meant(segment, ids)
    walk.say(
      ['alarms', key],
      `${quote(key)} names a segment that is not there`,
      `alarm:SEGMENT with one of ${ids.join(', ')}`,
      near,
      walk.key(['alarms', key]),
    )
  }
}
