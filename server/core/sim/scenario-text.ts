import { MonitorError } from '../errors.ts'
import { type EventKind, type Scenario, type SimEvent, scenarioOf } from './scenario.ts'

/** Every kind of event with all its keys, at the values taken where none is given; undefined: must be given. */
const templates: { readonly [K in EventKind]: Readonly<Record<string, string | number | null | undefined>> } = {
  fouling: { atHours: 0.5, segment: undefined, law: 'linear', hoursToLimit: 4, localFraction: null, sloughs: 0 },
  exotherm: { atHours: undefined, segment: undefined, what: 'ignition', amplitudeC: 6, lastsS: 120, stream: null, factor: 1.2 },
  flowStep: { atHours: undefined, factor: undefined },
  flowStepOne: { atHours: undefined, stream: undefined, factor: undefined },
  coolantStep: { atHours: undefined, degC: undefined },
  backPressure: { atHours: undefined, bar: undefined, overS: 1800 },
  gasSlug: { atHours: undefined, lastsS: 30 },
  feedConcentration: { atHours: undefined, stream: undefined, viscosityFactor: 1.05, heatFactor: 1.02 },
  pumpSlip: { atHours: undefined, stream: undefined, factor: undefined, overS: 1800 },
  flush: { atHours: undefined, minutes: 30, recovery: 0.95, startupMinutes: 10 },
  filterChange: { atHours: undefined, segment: undefined },
  sensor: { atHours: undefined, tag: undefined, fault: undefined, lastsHours: null, size: 0, overS: 3600 },
  nanGap: { atHours: undefined, minutes: 5, tags: 'all' },
}
export const eventKinds = Object.keys(templates) as readonly EventKind[]
export const eventKeys = (kind: EventKind): readonly string[] => Object.keys(templates[kind])

const fail = (message: string, hint: string | null = null): never => {
  throw new MonitorError('SIM_OPTION', message, hint === null ? {} : { hint })
}
const isKind = (name: unknown): name is EventKind => typeof name === 'string' && Object.hasOwn(templates, name)
const texts = new Set(['segment', 'law', 'what', 'stream', 'tag', 'fault'])

/** An event from its keys: what is missing is filled in, what is unknown or of the wrong type refused. Errors: SIM_OPTION. */
function eventFrom(raw: unknown, where: string): SimEvent {
  if (typeof raw !== 'object' || raw === null) return fail(`${where}: expected an object`)
  const { kind, ...given } = raw as Record<string, unknown>
  if (!isKind(kind)) return fail(`${where}: unknown kind of event '${String(kind)}'`, `one of ${eventKinds.join(', ')}`)
  const template = templates[kind]
  const keys = Object.keys(template)
  for (const [key, value] of Object.entries(given)) {
    if (!keys.includes(key)) fail(`${where}: ${kind} has no '${key}'`, `it has ${keys.join(', ')}`)
    const right =
      key === 'tags'
        ? value === 'all' || (Array.isArray(value) && value.every((v) => typeof v === 'string'))
        : typeof value === (texts.has(key) ? 'string' : 'number') || (value === null && template[key] === null)
    if (!right) fail(`${where}: ${key} of ${kind} must be a ${texts.has(key) ? 'text' : 'number'}, got ${JSON.stringify(value)}`)
  }
  const event = { kind, ...template, ...given }
  for (const key of keys) if (event[key as keyof typeof event] === undefined) fail(`${where}: ${kind} needs '${key}'`)
  return event as unknown as SimEvent
}

/** `KIND:key=value,key=value`, `at` short for atHours, as the command line has it. Errors: SIM_OPTION. */
export function eventFromText(text: string): SimEvent {
  const colon = text.indexOf(':')
  const kind = colon < 0 ? text : text.slice(0, colon)
  const given: Record<string, unknown> = { kind }
  for (const part of colon < 0 ? [] : text.slice(colon + 1).split(',')) {
    const [name, value, ...more] = part.split('=')
    if (name === undefined || value === undefined || more.length > 0)
      return fail(`'${part}' in event '${text}': expected key=value`, 'as flowStep:at=2,factor=1.1')
    const key = name.trim() === 'at' ? 'atHours' : name.trim()
    given[key] = texts.has(key) ? value.trim() : key === 'tags' ? (value === 'all' ? value : value.split('+')) : Number(value)
    if (typeof given[key] === 'number' && !Number.isFinite(given[key]))
      return fail(`'${part}' in event '${text}': expected a number`)
  }
  return eventFrom(given, `event '${text}'`)
}

const scenarioKeys = [
  'name',
  'category',
  'seed',
  'hours',
  'from',
  'logSeconds',
  'startupMinutes',
  'shutdownMinutes',
  'flows',
  'coolantC',
  'noise',
  'dirt',
  'events',
] as const
const numbers = new Set(['seed', 'hours', 'logSeconds', 'startupMinutes', 'shutdownMinutes', 'coolantC', 'noise'])

/** What a scenario file (JSON) gives; `from` is an RFC 3339 time. What it leaves out is as in `scenarioOf`. Errors: SIM_OPTION. */
export function scenarioFromJson(text: string, over: Partial<Scenario>): Scenario {
  let raw: unknown
  try {
    raw = JSON.parse(text)
  } catch (error) {
    return fail(`not JSON: ${error instanceof Error ? error.message : String(error)}`)
  }
  if (typeof raw !== 'object' || raw === null || Array.isArray(raw)) return fail('expected an object')
  const { from, events, ...rest } = raw as Record<string, unknown>
  for (const [key, value] of Object.entries(rest)) {
    if (!(scenarioKeys as readonly string[]).includes(key)) fail(`a scenario has no '${key}'`, `it has ${scenarioKeys.join(', ')}`)
    if (numbers.has(key) && typeof value !== 'number') fail(`${key} must be a number, got ${JSON.stringify(value)}`)
    if ((key === 'name' || key === 'category') && typeof value !== 'string')
      fail(`${key} must be a text, got ${JSON.stringify(value)}`)
    const inner = key === 'flows' || key === 'dirt'
    if (inner && !(typeof value === 'object' && value !== null && Object.values(value).every((v) => typeof v === 'number')))
      fail(`${key} must hold numbers, got ${JSON.stringify(value)}`)
  }
  const fromMs = from === undefined ? undefined : typeof from === 'string' ? Date.parse(from) : Number.NaN
  if (Number.isNaN(fromMs)) fail(`from must be an RFC 3339 time, got ${JSON.stringify(from)}`)
  if (events !== undefined && !Array.isArray(events)) return fail('events must be a list')
  const base = scenarioOf({ hours: 8, seed: 1, ...(rest as Partial<Scenario>), ...(fromMs === undefined ? {} : { fromMs }) })
  const list = ((events ?? []) as unknown[]).map((e, i) => eventFrom(e, `events[${i}]`))
  return { ...base, dirt: { ...scenarioOf({ hours: 1, seed: 1 }).dirt, ...base.dirt }, events: list, ...over }
}
