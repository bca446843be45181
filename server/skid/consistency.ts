import { plantUnit, unitsOf } from '../core/units.ts'
import { meant } from './nearest.ts'
import { keyText, type Path, quote } from './problem.ts'
import type { SegmentFile, SkidFile, StreamFile, TagFile } from './skid-shape.ts'
import type { Walk } from './walk.ts'

/** What must hold between the values of one group: units that fit, ranges and limits in order, ratios that can be computed. */
export function checkConsistency(file: SkidFile, walk: Walk): void {
  file.tags?.forEach((tag, i) => {
    if (tag !== undefined) checkTag(tag, ['tags', i], walk)
  })
  const streams = new Map((file.streams ?? []).flatMap((s) => (s?.id === undefined ? [] : [[s.id, s] as const])))
  file.segments?.forEach((segment, i) => {
    if (segment === undefined) return
    checkChannel(segment, ['segments', i, 'channel'], walk)
    checkLimits(segment, ['segments', i, 'limits'], streams, walk)
    if (segment.reaction?.enthalpyKJMol === 0)
      walk.say(
        ['segments', i, 'reaction', 'enthalpyKJMol'],
        'enthalpyKJMol is 0',
        'the heat of the reaction in kJ/mol',
        'remove the reaction when it is not known',
      )
  })
  checkLogs(file, walk)
}

function checkTag(tag: TagFile, at: Path, walk: Walk): void {
  const { quantity, unit, range } = tag
  if (quantity !== undefined) {
    const fitting = unitsOf[quantity]
    const borrowed = quantity === 'setpoint' && tag.setpointFor !== undefined
    if (unit === undefined) {
      if (fitting.length > 0 && !borrowed && !walk.has([...at, 'unit']))
        walk.say(at, `${tag.tag ?? 'the tag'} has no unit`, `unit: one of ${fitting.join(', ')}`)
    } else if (!fitting.includes(unit)) {
      const says = fitting.length === 0 ? `no unit for ${quantity}` : `one of ${fitting.join(', ')} for ${quantity}`
      walk.say(
        [...at, 'unit'],
        `unit ${quote(unit)} does not fit ${quantity}`,
        says,
        fitting.length === 0 ? 'remove the unit' : meant(unit, fitting),
      )
    }
    if (unit === 'mA' && fitting.includes('mA') && !walk.has([...at, 'range']))
      walk.say(
        [...at, 'unit'],
        `unit mA without a range`,
        `range: the ${plantUnit[quantity] ?? 'values'} at 4 and 20 mA`,
        'add range: [low, high]',
      )
    if (quantity === 'text' && walk.has([...at, 'range']))
      walk.say([...at, 'range'], 'a range on words', `no range for ${quantity}`, 'remove the range')
  }
  const [low, high] = range ?? []
  if (low !== undefined && high !== undefined && !(low < high))
    walk.say([...at, 'range'], `range runs from ${low} to ${high}`, 'low below high', low > high ? `[${high}, ${low}]` : null)
}

/** The cross-section is round (diameterMm), a ring (with coreMm) or rectangular (widthMm and depthMm). */
function checkChannel(segment: SegmentFile, at: Path, walk: Walk): void {
  const { diameterMm, widthMm, depthMm, coreMm, coilDiameterMm, roughnessUm } = segment.channel ?? {}
  const gives = (key: string) => walk.has([...at, key])
  for (const [side, other] of [
    ['widthMm', 'depthMm'],
    ['depthMm', 'widthMm'],
  ] as const) {
    if (gives(side) && !gives(other))
      walk.say([...at, side], `${side} without ${other}`, 'both sides of a rectangular channel', `add ${other}`)
    if (gives(side) && gives('diameterMm'))
      walk.say([...at, side], `${side} beside diameterMm`, 'diameterMm, or widthMm with depthMm', 'remove one of them')
  }
  if (gives('coreMm') && !gives('diameterMm'))
    walk.say([...at, 'coreMm'], 'coreMm without diameterMm', 'the bore around the core', 'add diameterMm')
  const bore = diameterMm ?? (widthMm !== undefined && depthMm !== undefined ? Math.min(widthMm, depthMm) : undefined)
  if (bore === undefined) return
  if (coreMm !== undefined && coreMm >= bore)
    walk.say([...at, 'coreMm'], `a core of ${coreMm} mm in a bore of ${bore} mm`, 'a core thinner than its bore (mm)')
  if (coilDiameterMm !== undefined && coilDiameterMm <= bore)
    walk.say(
      [...at, 'coilDiameterMm'],
      `a coil of ${coilDiameterMm} mm for a bore of ${bore} mm`,
      'a coil wider than its bore (mm)',
    )
  if (roughnessUm !== undefined && roughnessUm >= bore * 500)
    walk.say([...at, 'roughnessUm'], `a roughness of ${roughnessUm} µm in a bore of ${bore} mm`, 'less than half the bore (µm)')
}

function checkLimits(segment: SegmentFile, at: Path, streams: ReadonlyMap<string, StreamFile>, walk: Walk): void {
  const limits = segment.limits
  if (limits === undefined) return
  const rising = (low: keyof typeof limits, high: keyof typeof limits) => {
    const [a, b] = [limits[low], limits[high]]
    if (typeof a === 'number' && typeof b === 'number' && !(a < b))
      walk.say([...at, high], `${high} ${b} is not above ${low} ${a}`, `more than ${a}`)
  }
  rising('dpHighBar', 'dpHighHighBar')
  rising('temperatureHighC', 'temperatureHighHighC')
  rising('temperatureLowC', 'temperatureHighC')
  if (limits.temperatureHighC === undefined) rising('temperatureLowC', 'temperatureHighHighC')

  const ratio = limits.feedRatio
  if (ratio === undefined) return
  const here = [...at, 'feedRatio']
  if (ratio.low !== undefined && ratio.high !== undefined && !(ratio.low < ratio.high))
    walk.say([...here, 'high'], `feedRatio runs from ${ratio.low} to ${ratio.high}`, 'low below high')
  if (ratio.of?.length === 2 && ratio.of[0] !== undefined && ratio.of[0] === ratio.of[1])
    walk.say([...here, 'of'], `feedRatio of ${quote(ratio.of[0])} over itself`, 'two streams')
  ratio.of?.forEach((name, i) => {
    const stream = name === undefined ? undefined : streams.get(name)
    if (name === undefined || stream === undefined || !segment.streams?.includes(name)) return
    const index = [...streams.keys()].indexOf(name)
    if (stream.reagent === undefined && !walk.has(['streams', index, 'reagent'])) {
      const path = [...here, 'of', i]
      walk.say(
        path,
        `${keyText(path)} names stream ${quote(name)}, which has no reagent`,
        'streams with reagent.concentrationMolL, for a ratio in mol/mol',
        `add reagent: { name: …, concentrationMolL: … } to stream ${name}`,
      )
    }
  })
}

/** The first log entry whose pattern fits is taken, else the one without a pattern: a second of those would never be. */
function checkLogs(file: SkidFile, walk: Walk): void {
  const patterns = new Set<string>()
  let open = false
  file.log?.forEach((log, i) => {
    if (log === undefined) return
    const at: Path = walk.has(['log', i]) ? ['log', i] : ['log']
    if (log.files === undefined && !walk.has([...at, 'files'])) {
      if (open) walk.say(at, 'a second log entry for every file', "'files' on every entry but one", 'add files: "…"')
      open = true
    } else if (log.files !== undefined) {
      if (patterns.has(log.files)) walk.say([...at, 'files'], `files ${quote(log.files)} stands twice`, 'each pattern once')
      patterns.add(log.files)
    }
    if (log.time?.length === 2 && log.time[0] !== undefined && log.time[0] === log.time[1])
      walk.say([...at, 'time'], 'both time columns are the same', 'a date column and a time column')
  })
}
