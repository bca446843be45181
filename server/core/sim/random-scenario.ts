import type { Skid, TagSpec } from '../skid.ts'
import { foulable } from './demo.ts'
import { type Random, randomOf } from './random.ts'
import { exothermKinds, faultKinds, growthLaws, type Scenario, type SimEvent, scenarioOf } from './scenario.ts'

/** clean: confounders only. flush-cycle: a growth, a flush, a second growth. dirty: clean with a bad logger. */
export const scenarioKinds = ['clean', 'fouling', 'exotherm', 'sensor', 'flush-cycle', 'dirty'] as const
export type ScenarioKind = (typeof scenarioKinds)[number]

const rounded = (x: number, digits = 4): number => Number(x.toFixed(digits))
const logBetween = (r: Random, low: number, high: number): number => Math.exp(r.between(Math.log(low), Math.log(high)))
const spanOf = (tag: TagSpec): number => (tag.range === null ? 25 : tag.range[1] - tag.range[0])
const sign = (r: Random): number => (r.chance(0.5) ? 1 : -1)

/** A step, slug, drift or the like that is no deposit, somewhere between two hours. `ratioHeld`: none that moves one feed alone. */
function confounder(skid: Skid, r: Random, fromH: number, toH: number, ratioHeld = false): SimEvent {
  const atHours = rounded(r.between(fromH, toH))
  const stream = r.pick(skid.streams).id
  const step = () => rounded(r.chance(0.5) ? r.between(0.78, 0.95) : r.between(1.05, 1.22))
  const kinds: readonly (() => SimEvent)[] = [
    () => ({ kind: 'flowStep', atHours, factor: step() }),
    () => ({ kind: 'flowStepOne', atHours, stream, factor: rounded(1 + (step() - 1) / 4) }),
    () => ({ kind: 'coolantStep', atHours, degC: rounded(sign(r) * r.between(2, 5)) }),
    () => ({
      kind: 'backPressure',
      atHours,
      bar: rounded(sign(r) * r.between(0.15, 0.5)),
      overS: Math.round(logBetween(r, 300, 9000)),
    }),
    () => ({ kind: 'gasSlug', atHours, lastsS: Math.round(r.between(15, 60)) }),
    () => ({
      kind: 'feedConcentration',
      atHours,
      stream,
      viscosityFactor: rounded(1 + sign(r) * r.between(0.03, 0.08)),
      heatFactor: rounded(1 + sign(r) * r.between(0.01, 0.03)),
    }),
    () => ({ kind: 'pumpSlip', atHours, stream, factor: rounded(r.between(0.85, 0.95)), overS: Math.round(r.between(600, 5400)) }),
    () => ({ kind: 'nanGap', atHours, minutes: rounded(r.between(2, 12)), tags: r.chance(0.5) ? 'all' : [r.pick(skid.tags).tag] }),
  ]
  for (;;) {
    const event = r.pick(kinds)()
    if (!ratioHeld || (event.kind !== 'flowStepOne' && event.kind !== 'pumpSlip')) return event
  }
}

function sensorFault(skid: Skid, r: Random, fromH: number, toH: number): SimEvent {
  const fault = r.pick(faultKinds)
  const fits = skid.tags.filter((t) =>
    fault === 'open'
      ? t.quantity === 'temperature'
      : fault === 'zeroDrift' || fault === 'zeroStep'
        ? t.quantity === 'pressure' || t.quantity === 'differentialPressure'
        : t.quantity !== 'text',
  )
  const tag = r.pick(fits.length > 0 ? fits : skid.tags)
  const soft = fault === 'zeroDrift' || fault === 'zeroStep'
  return {
    kind: 'sensor',
    atHours: rounded(r.between(fromH, toH)),
    tag: tag.tag,
    fault,
    lastsHours: soft ? null : rounded(r.between(0.3, 1)),
    size: rounded(spanOf(tag) * (soft ? sign(r) * r.between(0.003, 0.007) : 0.3)),
    overS: fault === 'zeroDrift' ? Math.round(r.between(1800, 9000)) : 0,
  }
}

/** A scenario of a kind, drawn from the seed: the same seed gives the same one. Sizes span what a pilot night may bring. */
export function randomScenario(skid: Skid, kind: ScenarioKind, seed: number, over: Partial<Scenario> = {}): Scenario {
  const r = randomOf(seed, `scenario ${kind}`)
  const startupMinutes = r.chance(0.5) ? Math.round(r.between(6, 25)) : 0
  const base = { seed, name: `${kind}-${seed}`, category: kind, startupMinutes, ...over }
  const h0 = startupMinutes / 60
  const several = (n: number, make: () => SimEvent) => Array.from({ length: n }, make)
  const confounders = (n: number, hours: number) => several(n, () => confounder(skid, r, h0 + 0.5, hours - 0.1))
  const can = foulable(skid, scenarioOf({ hours: 1, ...base }))
  const growth = (atHours: number, hoursToLimit: number, segment: string): SimEvent => ({
    kind: 'fouling',
    atHours: rounded(atHours),
    segment,
    law: r.pick(growthLaws),
    hoursToLimit: rounded(hoursToLimit),
    localFraction: r.chance(0.35) ? rounded(r.between(0.12, 0.6)) : null,
    sloughs: r.chance(0.2) ? 1 + Math.floor(r.between(0, 3)) : 0,
  })
  const log = (hours: number) => (hours > 5 ? r.pick([2, 5]) : r.pick([1, 1, 2]))
  if (kind === 'fouling' && can.length > 0) {
    const toLimit = logBetween(r, 0.4, 8)
    const onset = h0 + r.between(0.7, 2.2)
    const hours = rounded(onset + toLimit * r.between(0.9, 1.25))
    const first = r.pick(can).id
    const events = [growth(onset, toLimit, first), ...confounders(Math.floor(r.between(0, 3)), hours)]
    const others = can.filter((s) => s.id !== first)
    if (others.length > 0 && r.chance(0.2))
      events.push(growth(r.between(onset, onset + toLimit / 2), toLimit * r.between(0.8, 1.5), r.pick(others).id))
    return scenarioOf({ ...base, hours, logSeconds: log(hours), events })
  }
  if (kind === 'flush-cycle' && can.length > 0) {
    const toLimit = logBetween(r, 0.5, 3)
    const onset = h0 + r.between(0.7, 1.5)
    const flushAt = onset + toLimit * r.between(0.75, 0.97)
    const [minutes, startup] = [Math.round(r.between(20, 40)), Math.round(r.between(6, 15))]
    const back = flushAt + (minutes + startup) / 60
    const onset2 = back + r.between(0.8, 1.6)
    const segment = r.pick(can.filter((s) => s.kind !== 'filter').length > 0 ? can.filter((s) => s.kind !== 'filter') : can).id
    const hours = rounded(onset2 + toLimit * r.between(0.9, 1.2))
    const flush: SimEvent = {
      kind: 'flush',
      atHours: rounded(flushAt),
      minutes,
      recovery: rounded(r.between(0.85, 1)),
      startupMinutes: startup,
    }
    return scenarioOf({
      ...base,
      hours,
      logSeconds: log(hours),
      events: [growth(onset, toLimit, segment), flush, growth(onset2, toLimit, segment)],
    })
  }
  if (kind === 'exotherm') {
    const hours = rounded(h0 + r.between(2, 3.5))
    const where = skid.segments.filter((s) => s.temperatures.length > 0 && s.kind === 'reactor')
    const seen = where.length > 0 ? where : skid.segments.filter((s) => s.temperatures.length > 0)
    if (seen.length === 0) return scenarioOf({ ...base, hours, logSeconds: 1, events: [] })
    const n = 1 + Math.floor(r.between(0, 3))
    const slot = (hours - h0 - 0.9) / n
    const events = Array.from({ length: n }, (_, i): SimEvent => {
      const segment = r.pick(seen)
      const what = segment.streams.length > 1 ? r.pick(exothermKinds) : r.pick(['ignition', 'coolant-loss', 'creep'] as const)
      const factor = rounded(r.between(1.12, 1.4))
      return {
        kind: 'exotherm',
        segment: segment.id,
        what,
        atHours: rounded(h0 + 0.6 + slot * (i + r.between(0.1, 0.6))),
        amplitudeC: rounded(what === 'dosing-ratio' ? 18 * (factor - 1) * r.between(0.8, 1.3) : logBetween(r, 2, 22)),
        lastsS: Math.round(r.between(120, 600)),
        stream: what === 'dosing-ratio' ? segment.streams.at(-1)! : null,
        factor: what === 'dosing-ratio' ? factor : 1,
      }
    })
    return scenarioOf({ ...base, hours, logSeconds: 1, events: [...events, confounder(skid, r, h0 + 0.3, h0 + 0.5, true)] })
  }
  const hours = rounded(h0 + (kind === 'sensor' ? r.between(4, 6) : kind === 'dirty' ? r.between(2, 3) : r.between(8, 12)), 2)
  const events = confounders(Math.floor(kind === 'clean' ? r.between(3, 7) : r.between(1, 3)), hours)
  if (kind === 'sensor') events.push(...several(r.chance(0.4) ? 2 : 1, () => sensorFault(skid, r, h0 + 1, hours - 1.2)))
  const filters = can.filter((s) => s.kind === 'filter')
  if (kind === 'clean' && filters.length > 0 && r.chance(0.25))
    events.push({
      ...growth(h0 + r.between(1, hours / 2), r.between(1.5, 5), r.pick(filters).id),
      localFraction: null,
      sloughs: 0,
    } as SimEvent)
  const dirt = kind === 'dirty' ? { jitterMs: 40, missing: 0.002, duplicate: 0.003, outOfOrder: 0.002, broken: 0.001 } : undefined
  return scenarioOf({ ...base, hours, logSeconds: log(hours), events, ...(dirt === undefined ? {} : { dirt }) })
}
