import type { Layout } from '../derive/layout.ts'
import type { Given } from '../figures/operation.ts'
import type { FlushPlan, FlushStep } from '../report.ts'
import { barFromPa, cFromK, kFromC, toSi, valueUnit } from '../units.ts'
import type { Point, Rule } from './course-state.ts'
import type { FlushSettings } from './input.ts'
import { activeStreams } from './inventory.ts'
import type { FlushPath, Leg } from './legs.ts'

interface Made {
  readonly point: Point
  readonly rule: Rule
}
interface From {
  readonly path: FlushPath
  readonly plan: FlushPlan
  readonly settings: FlushSettings
  readonly layout: Layout
  readonly given: Given
}

/** How long a reading must say so, s; common practice. */
const hold = { zero: 10, heat: 60, ratio: 60, control: 60 } as const
/** A stopped pump shows less than this share of its usual flow; a leg without flow less than this share of its clean ΔP. */
const zero = { flow: 0.02, dp: 0.1, dpOfSpan: 0.004 } as const
/** Ratio allowed at the end of F3, and of F5 and F6; common practice (10 to 20 % in water, 10 % in solvent). */
const ratioHigh = { water: 1.2, clean: 1.1 } as const
/** Back in control: flows and temperatures as before the flush within these. */
const control = { flow: 0.05, tempK: 3 } as const
const blockedInPa = 50_000
/** Why a point stands open before anything was read or seen. */
export const noReadingYet = 'no reading yet'
export const notSeenYet = 'to be seen and recorded by a person'

const made = (criterion: string, part: string | null, needs: string, rule: Rule, unit: string | null, source: string): Made => ({
  point: {
    criterion,
    part,
    needs,
    by: rule === null || rule.kind === 'at-most' ? 'person' : 'readings',
    state: rule === null || rule.kind === 'at-most' ? 'not-yet' : 'unknown',
    value: null,
    unit,
    from: null,
    ...lineOf(rule),
    source,
    why: rule === null || rule.kind === 'at-most' ? notSeenYet : noReadingYet,
    sinceMs: null,
    person: null,
    tMs: null,
    reason: null,
  },
  rule,
})
/** The line that a value must come to, in the unit it is shown in. */
function lineOf(rule: Rule): Pick<Point, 'limit' | 'allowed'> {
  switch (rule?.kind) {
    case 'warm':
      return { limit: cFromK(rule.aboveK), allowed: 'above' }
    case 'volume':
      return { limit: rule.ml, allowed: 'above' }
    case 'flow-zero':
      return { limit: 100 * zero.flow, allowed: 'below' }
    case 'dp-zero':
      return { limit: barFromPa(rule.belowPa), allowed: 'below' }
    case 'heat-gone':
      return { limit: rule.withinK, allowed: 'below' }
    case 'pressure-steady':
      return { limit: barFromPa(rule.risePa), allowed: 'below' }
    case 'no-heat':
      return { limit: rule.riseK, allowed: 'below' }
    case 'ratio':
      return { limit: rule.highest, allowed: 'below' }
    case 'no-ice':
      return { limit: cFromK(rule.coldK), allowed: 'below' }
    case 'at-most':
      return { limit: rule.limit, allowed: 'below' }
    default:
      return { limit: null, allowed: null }
  }
}
const person = (criterion: string, part: string | null, needs: string): Made => made(criterion, part, needs, null, null, '')

/** The points of a step: each criterion of the plan, split where it takes several readings, and the volume where the plan gives one. */
export function pointsOf(step: FlushStep, f: From): Made[] {
  const points = step.criteria.flatMap((c): Made[] => {
    const text = c.text
    switch (`${step.id} ${c.id}`) {
      case 'F0 reagent-stopped':
        return reagentStopped(f)
      case 'F1 volume':
      case 'F6 volume':
        return [volume(step)]
      case 'F1 reaction-heat-gone':
        return orPerson(heatGone(f), c.id, text)
      case 'F1 quench-isolated':
        return orPerson(quenchIsolated(f), c.id, text)
      case 'F2 all-warm':
        return f.path.legs.map((l) => warm(l, f))
      case 'F2 no-blocked-in':
        return orPerson(blockedIn(f), c.id, text)
      case 'F3 no-heat-no-gas':
        return [...noHeat(f, text), person('no-heat-no-gas', 'gas', 'no gas at the outlet')]
      case 'F3 ratio-flat':
        return asked(f).map((l) => ratio('ratio-flat', l, f, 'water'))
      case 'F4 karl-fischer-1':
      case 'F4 karl-fischer-2':
        return [made(c.id, null, text, { kind: 'at-most', limit: f.settings.waterPpmLimit }, 'ppm', '')]
      case 'F5 ratio-clean':
        return asked(f).map((l) => ratio('ratio-clean', l, f, 'drying'))
      case 'F5 no-ice':
        return f.path.legs.map((l) => noIce(l, f))
      case 'F6 in-control':
        return [...inControl(f), ...asked(f).map((l) => ratio('in-control', l, f, 'feeds'))]
      default:
        return [person(c.id, null, text)]
    }
  })
  return (step.id === 'F3' || step.id === 'F4') && step.volumeMl !== null ? [volume(step), ...points] : points
}

const asked = (f: From): Leg[] => f.path.legs.filter((l) => l.asked)
const orPerson = (points: Made[], criterion: string, needs: string): Made[] =>
  points.length > 0 ? points : [person(criterion, null, needs)]
const nameOf = (f: From, tag: number): string => f.layout.skid.tags[tag]?.tag ?? ''
const layoutOf = (f: From, leg: Leg) => f.layout.segments.find((g) => g.spec.id === leg.id)!
const usualSi = (f: From, id: string): number | null => {
  const flow = f.path.operation.streams.find((s) => s.id === id)
  const stream = f.layout.streams.find((s) => s.id === id)
  return flow === undefined || stream === undefined ? null : stream.isMass ? flow.massFlowKgS : flow.volumeFlowM3S
}

function flowZero(f: From, id: string, criterion: string, needs: string): Made[] {
  const stream = f.layout.streams.find((s) => s.id === id)
  const usual = usualSi(f, id)
  if (stream === undefined || stream.tag < 0 || usual === null) return []
  const rule: Rule = { kind: 'flow-zero', tag: stream.tag, belowSi: zero.flow * usual, holdS: hold.zero }
  return [made(criterion, `flow ${id}`, needs, rule, '% of usual', nameOf(f, stream.tag))]
}

function reagentStopped(f: From): Made[] {
  const { ids } = activeStreams(f.path)
  const onPath = f.path.operation.streams.filter((s) => f.path.legs.some((l) => l.op.spec.streams.includes(s.id))).map((s) => s.id)
  const active = onPath.filter((id) => ids.includes(id))
  const id = 'reagent-stopped'
  const flows = [...active, ...onPath.filter((s) => !ids.includes(s))].flatMap((s) =>
    flowZero(f, s, id, `flow of ${s} below ${100 * zero.flow} % of its usual for ${hold.zero} s`),
  )
  // The second sign of the organolithium: no pressure drop where it alone flows.
  const own = f.path.legs.filter((l) => l.op.spec.streams.every((s) => active.includes(s)) && l.op.channel !== null)
  const second = own.flatMap((l): Made[] => {
    const { fluid, channel, massFlowKgS, tempK } = l.op
    if (fluid === null || channel === null || massFlowKgS === null) return []
    const segment = f.layout.segments.findIndex((g) => g.spec.id === l.id)
    const layout = f.layout.segments[segment]!
    const spanPa = layout.dpSpanPa ?? (layout.tapIn === null ? null : f.layout.taps[layout.tapIn]!.spanPa) ?? 0
    const dpHighPa = (l.op.spec.limits.dpHighBar ?? 0) * 1e5
    const belowPa = Math.max(zero.dp * 0.4 * dpHighPa, zero.dpOfSpan * spanPa)
    if (belowPa <= 0 || tempK <= 0) return []
    const needs = `second sign: ΔP of ${l.id}, where it flows alone, below ${(belowPa / 1e5).toFixed(2)} bar for ${hold.zero} s`
    return [made(id, `ΔP ${l.id}`, needs, { kind: 'dp-zero', segment, belowPa, holdS: hold.zero }, 'bar', `ΔP of ${l.id}`)]
  })
  return [
    ...flows,
    ...(second.length > 0
      ? second
      : [person(id, 'second sign', `a second, independent sign that ${active.join(', ') || 'the organolithium'} has stopped`)]),
  ]
}

const volume = (step: FlushStep): Made =>
  step.volumeMl === null
    ? person('volume', null, 'volume passed as the site procedure sets it; none could be computed')
    : made(
        'volume',
        null,
        `${step.volumeMl.toFixed(0)} mL passed, counted by flow`,
        { kind: 'volume', ml: step.volumeMl },
        'mL',
        'flow meters of the path',
      )

/** Outlet against coolant where something reacts. Blank 0 K: no blank was recorded; the sensors' own uncertainty (2 sd) is added. */
function heatGone(f: From): Made[] {
  return f.path.legs.flatMap((l): Made[] => {
    const g = layoutOf(f, l)
    const out = g.temperatures.at(-1)
    if (l.op.spec.reaction === null || out === undefined || g.coolant === null) return []
    const withinK = 1 + 2 * l.op.differenceUK
    const needs = `outlet of ${l.id} within ${withinK.toFixed(1)} K of the coolant (1 K and the two sensors) for ${hold.heat} s`
    const rule: Rule = { kind: 'heat-gone', out, coolant: g.coolant, withinK, holdS: hold.heat }
    return [made('reaction-heat-gone', l.id, needs, rule, 'K', `${nameOf(f, out)} − ${nameOf(f, g.coolant)}`)]
  })
}

/** Streams that enter at a quench and not on the path. */
function quenchIsolated(f: From): Made[] {
  const quench = f.layout.skid.segments.filter((s) => s.kind === 'quench').flatMap((s) => s.streams)
  const onPath = new Set(f.path.legs.flatMap((l) => l.op.spec.streams))
  return [...new Set(quench)]
    .filter((id) => !onPath.has(id))
    .flatMap((id) =>
      flowZero(
        f,
        id,
        'quench-isolated',
        `quench ${id} isolated: its flow below ${100 * zero.flow} % of its usual for ${hold.zero} s`,
      ),
    )
}

function warm(l: Leg, f: From): Made {
  const { settings } = f
  const needs = `${l.id}: every reading above +${settings.warmC} °C for ${settings.warmHoldMinutes} min`
  const tags = layoutOf(f, l).temperatures
  if (tags.length === 0) return person('all-warm', l.id, needs)
  const rule: Rule = { kind: 'warm', tags, aboveK: kFromC(settings.warmC), holdS: 60 * settings.warmHoldMinutes }
  return made('all-warm', l.id, needs, rule, '°C', tags.map((t) => nameOf(f, t)).join(', '))
}

function blockedIn(f: From): Made[] {
  const tags = [...new Set(f.path.legs.flatMap((l) => layoutOf(f, l).inTag ?? []))]
  if (tags.length === 0) return []
  const rule: Rule = { kind: 'pressure-steady', tags, risePa: blockedInPa }
  const needs = `no inlet pressure more than ${blockedInPa / 1e5} bar above its lowest in this step`
  return [made('no-blocked-in', null, needs, rule, 'bar', tags.map((t) => nameOf(f, t)).join(', '))]
}

function noHeat(f: From, text: string): Made[] {
  const riseK = Number(/beyond ([\d.]+) K/.exec(text)?.[1] ?? 3)
  const legs = f.path.legs.filter((l) => layoutOf(f, l).temperatures.length > 0)
  if (legs.length === 0) return [person('no-heat-no-gas', 'heat', text)]
  return legs.map((l) => {
    const g = layoutOf(f, l)
    const rule: Rule = { kind: 'no-heat', tags: g.temperatures, coolant: g.coolant, riseK }
    const needs = `${l.id}: no temperature rise beyond ${riseK.toFixed(1)} K${g.coolant === null ? '' : ' against the coolant'}`
    return made('no-heat-no-gas', l.id, needs, rule, 'K', g.temperatures.map((t) => nameOf(f, t)).join(', '))
  })
}

function ratio(criterion: string, l: Leg, f: From, liquid: 'water' | 'drying' | 'feeds'): Made {
  const highest = liquid === 'water' ? ratioHigh.water : ratioHigh.clean
  const against =
    liquid === 'water' ? 'the water reference' : liquid === 'drying' ? 'clean, solvent to solvent' : 'the clean baseline'
  const flat = liquid === 'water'
  const needs = `${l.id}: ratio against ${against} ${flat ? 'flat, ' : ''}at most ${highest} for ${hold.ratio} s`
  if (l.op.channel === null) return person(criterion, liquid === 'feeds' ? `ratio ${l.id}` : l.id, needs)
  const segment = f.layout.segments.findIndex((g) => g.spec.id === l.id)
  const rule: Rule = { kind: 'ratio', segment, liquid, highest, flat, holdS: hold.ratio }
  return made(criterion, liquid === 'feeds' ? `ratio ${l.id}` : l.id, needs, rule, '× clean', `ΔP and flow of ${l.id}`)
}

function noIce(l: Leg, f: From): Made {
  const g = layoutOf(f, l)
  const needs = `${l.id}: no rise of ΔP while crossing 0 °C, down to its temperature before the flush`
  if (g.temperatures.length === 0 || l.op.channel === null) return person('no-ice', l.id, needs)
  const segment = f.layout.segments.findIndex((x) => x.spec.id === l.id)
  const rule: Rule = { kind: 'no-ice', segment, tags: g.temperatures, coldK: Math.min(l.op.tempK + 3, 270) }
  return made('no-ice', l.id, needs, rule, '°C', g.temperatures.map((t) => nameOf(f, t)).join(', '))
}

function inControl(f: From): Made[] {
  const onPath = f.layout.streams.filter((s) => f.path.legs.some((l) => l.op.spec.streams.includes(s.id)))
  const flows = onPath.flatMap((s): Made[] => {
    const usual = usualSi(f, s.id)
    if (usual === null || s.tag < 0) return []
    const rule: Rule = {
      kind: 'flow-normal',
      tag: s.tag,
      lowSi: usual * (1 - control.flow),
      highSi: usual * (1 + control.flow),
      holdS: hold.control,
    }
    const needs = `flow of ${s.id} within ${100 * control.flow} % of its usual for ${hold.control} s`
    return [made('in-control', `flow ${s.id}`, needs, rule, '% of usual', nameOf(f, s.tag))]
  })
  const tags = [...new Set(f.path.legs.flatMap((l) => layoutOf(f, l).temperatures))]
  const temps = tags.flatMap((tag): Made[] => {
    const spec = f.layout.skid.tags[tag]!
    const before = f.given.temperatures?.[spec.tag]
    if (before === undefined || before === null) return []
    const rule: Rule = {
      kind: 'temperature-normal',
      tag,
      atK: toSi(before, valueUnit(spec)),
      withinK: control.tempK,
      holdS: hold.control,
    }
    const needs = `${spec.tag} within ${control.tempK} K of ${(toSi(before, valueUnit(spec)) - 273.15).toFixed(1)} °C, its reading before the flush`
    return [made('in-control', spec.tag, needs, rule, '°C', spec.tag)]
  })
  const rule: Rule = { kind: 'no-alarm', segments: f.path.legs.map((l) => l.id) }
  const alarms = made(
    'in-control',
    'alarms',
    'no feed-ratio, heat, temperature or pressure alarm stands on the path',
    rule,
    null,
    'alarm list',
  )
  return [...flows, ...temps, alarms]
}
