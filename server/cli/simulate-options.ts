import { readFile } from 'node:fs/promises'
import { parseArgs } from 'node:util'
import { MonitorError } from '../core/errors.ts'
import { demoScenario } from '../core/sim/demo.ts'
import { randomScenario, scenarioKinds } from '../core/sim/random-scenario.ts'
import {
  type ExothermKind,
  exothermKinds,
  type GrowthLaw,
  growthLaws,
  type Scenario,
  type SimEvent,
  scenarioOf,
} from '../core/sim/scenario.ts'
import { eventFromText, scenarioFromJson } from '../core/sim/scenario-text.ts'
import type { Skid } from '../core/skid.ts'
import { cannotRead } from '../file-trouble.ts'
import { nearest } from '../skid/nearest.ts'

export const usage = (message: string, hint = 'clearbore simulate --help'): never => {
  throw new MonitorError('USAGE', message, { hint })
}

/** A name that must be one of some; the hint has the nearest. */
function named<T extends string>(what: string, name: string, known: readonly T[], option: string): T {
  if ((known as readonly string[]).includes(name)) return name as T
  const near = nearest(name, known)
  return usage(
    `${option}: unknown ${what} '${name}'`,
    `${near === null ? '' : `did you mean '${near}'? `}known: ${known.join(', ')}`,
  )
}

const numberOf = (text: string, option: string): number =>
  text.trim() === '' || !Number.isFinite(Number(text)) ? usage(`${option} needs a number, got '${text}'`) : Number(text)

const optionSpec = {
  skid: { type: 'string' },
  hours: { type: 'string' },
  seed: { type: 'string' },
  out: { type: 'string' },
  truth: { type: 'string' },
  fouling: { type: 'string', multiple: true },
  exotherm: { type: 'string', multiple: true },
  event: { type: 'string', multiple: true },
  scenario: { type: 'string' },
  'log-seconds': { type: 'string' },
  from: { type: 'string' },
  noise: { type: 'string' },
} as const

export function parsed(args: readonly string[]) {
  try {
    const { values } = parseArgs({ args: [...args], options: optionSpec })
    return values
  } catch (cause) {
    const unknown = args.find((a) => a.startsWith('--') && !Object.hasOwn(optionSpec, a.slice(2).split('=')[0]!))
    const near = unknown === undefined ? null : nearest(unknown.slice(2).split('=')[0]!, Object.keys(optionSpec))
    throw new MonitorError('USAGE', cause instanceof Error ? cause.message : String(cause), {
      hint: near === null ? 'clearbore simulate --help' : `did you mean '--${near}'?`,
      cause,
    })
  }
}
type Options = ReturnType<typeof parsed>

function foulingFrom(text: string, skid: Skid): SimEvent {
  const [segment = '', law = 'linear', onset = '0.5', toLimit = '4', ...more] = text.split(':')
  if (more.length > 0) usage(`--fouling takes SEGMENT:LAW:ONSET:TO_LIMIT, got '${text}'`)
  return {
    kind: 'fouling',
    segment: named(
      'segment',
      segment,
      skid.segments.map((s) => s.id),
      '--fouling',
    ),
    law: named<GrowthLaw>('growth law', law, growthLaws, '--fouling'),
    atHours: numberOf(onset, '--fouling ONSET'),
    hoursToLimit: numberOf(toLimit, '--fouling TO_LIMIT'),
    localFraction: null,
    sloughs: 0,
  }
}

function exothermFrom(text: string, skid: Skid, hours: number): SimEvent {
  const [id = '', kind = 'ignition', at = `${hours / 2}`, ...more] = text.split(':')
  if (more.length > 0) usage(`--exotherm takes SEGMENT:KIND:AT, got '${text}'`)
  const segment = named(
    'segment',
    id,
    skid.segments.map((s) => s.id),
    '--exotherm',
  )
  const what = named<ExothermKind>('kind of exotherm', kind, exothermKinds, '--exotherm')
  const stream = what === 'dosing-ratio' ? (skid.segments.find((s) => s.id === segment)?.streams.at(-1) ?? null) : null
  return {
    kind: 'exotherm',
    segment,
    what,
    atHours: numberOf(at, '--exotherm AT'),
    amplitudeC: 6,
    lastsS: 180,
    stream,
    factor: stream === null ? 1 : 1.3,
  }
}

export const readText = async (file: string): Promise<string> => {
  try {
    return await readFile(file, 'utf8')
  } catch (cause) {
    throw cannotRead(file, cause)
  }
}

export async function scenarioFrom(o: Options, skid: Skid): Promise<Scenario> {
  const from = o.from === undefined ? undefined : Date.parse(o.from)
  if (Number.isNaN(from)) usage(`--from needs an RFC 3339 time, got '${o.from}'`, 'as 2031-05-05T18:00:00Z')
  const over: Partial<Scenario> = {
    ...(o.seed === undefined ? {} : { seed: numberOf(o.seed, '--seed') }),
    ...(o.hours === undefined ? {} : { hours: numberOf(o.hours, '--hours') }),
    ...(from === undefined ? {} : { fromMs: from }),
    ...(o['log-seconds'] === undefined ? {} : { logSeconds: numberOf(o['log-seconds'], '--log-seconds') }),
    ...(o.noise === undefined ? {} : { noise: numberOf(o.noise, '--noise') }),
  }
  const base = await (async (): Promise<Scenario> => {
    const { scenario } = o
    if (scenario === undefined) {
      if (over.hours === undefined || over.seed === undefined) return usage('simulate needs --hours and --seed (or --scenario)')
      return scenarioOf({ ...over, hours: over.hours, seed: over.seed })
    }
    if (scenario === 'demo') return demoScenario(skid, over)
    if (scenario.startsWith('random:')) {
      if (over.seed === undefined) return usage('--scenario random:KIND needs --seed')
      const drawn = randomScenario(skid, named('kind of scenario', scenario.slice(7), scenarioKinds, '--scenario'), over.seed, over)
      return { ...drawn, ...over }
    }
    const text = await readText(scenario)
    try {
      return scenarioFromJson(text, over)
    } catch (error) {
      if (error instanceof MonitorError && error.code === 'SIM_OPTION')
        throw new MonitorError(error.code, error.message, {
          ...(error.hint === null ? {} : { hint: error.hint }),
          place: { file: scenario },
          cause: error,
        })
      throw error
    }
  })()
  const added = [
    ...(o.fouling ?? []).map((t) => foulingFrom(t, skid)),
    ...(o.exotherm ?? []).map((t) => exothermFrom(t, skid, base.hours)),
    ...(o.event ?? []).map(eventFromText),
  ]
  const all = { ...base, events: [...base.events, ...added] }
  return all.category === 'clean' && all.events.some((e) => e.kind === 'fouling') ? { ...all, category: 'fouling' } : all
}
