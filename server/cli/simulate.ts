import { readFile } from 'node:fs/promises'
import { parseArgs } from 'node:util'
import { MonitorError } from '../core/errors.ts'
import { checkScenario } from '../core/sim/check.ts'
import { demoScenario } from '../core/sim/demo.ts'
import { logText } from '../core/sim/log-text.ts'
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
import { eventFromText, eventKeys, eventKinds, scenarioFromJson } from '../core/sim/scenario-text.ts'
import { rowsOf } from '../core/sim/simulator.ts'
import { truthOf } from '../core/sim/truth-of.ts'
import type { Skid } from '../core/skid.ts'
import { loadSkid } from '../skid/check.ts'
import { nearest } from '../skid/nearest.ts'
import { openAtomic, writeAtomic } from './atomic-file.ts'
import type { Command } from './command.ts'
import { progressLine } from './progress-line.ts'

const help = `Usage: clearbore simulate --skid FILE --hours H --seed N --out LOG.csv [options]

Writes the log of an invented run on a skid, and what truly happened in it. The same options give the same bytes.

  --skid FILE           the skid file (YAML or JSON)
  --hours H             length of the run, hours
  --seed N              a whole number; other seed, other run
  --out LOG.csv         where the log goes; '-' writes it to stdout
  --truth FILE          where the truth goes (JSON)
  --fouling SEGMENT[:LAW[:ONSET[:TO_LIMIT]]]    a deposit; LAW ${growthLaws.join(', ')} (default linear), ONSET hours after the
                        start (default 0.5), TO_LIMIT hours from onset to the dP limit, about (default 4); repeatable
  --exotherm SEGMENT[:KIND[:AT]]                a temperature excursion; KIND ${exothermKinds.join(', ')} (default ignition),
                        AT hours after the start (default half way); repeatable
  --event KIND:key=value,...                    anything else, as flowStep:at=2,factor=1.1; repeatable. Kinds and their keys:
${eventKinds
  .map(
    (k) =>
      `                          ${k}: ${eventKeys(k)
        .map((key) => (key === 'atHours' ? 'at' : key))
        .join(', ')}`,
  )
  .join('\n')}
  --scenario FILE.json|random:KIND|demo         a whole scenario from a file, drawn from the seed (${scenarioKinds.join(', ')}), or the demo
  --log-seconds S       a row every S seconds (default 1)
  --from T              start, RFC 3339 (default 2031-05-05T18:00:00Z)
  --noise X             scales noise and disturbances (default 1; 0: none)
`

const usage = (message: string, hint = 'clearbore simulate --help'): never => {
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

function parsed(args: readonly string[]) {
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

const readText = async (file: string): Promise<string> => {
  try {
    return await readFile(file, 'utf8')
  } catch (cause) {
    throw new MonitorError('FILE_READ', `cannot read: ${cause instanceof Error ? cause.message : String(cause)}`, {
      place: { file },
      cause,
    })
  }
}

async function scenarioFrom(o: Options, skid: Skid): Promise<Scenario> {
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

/** Lines are gathered into pieces of about this many characters before they are written. */
const PIECE = 1 << 16

export const simulateCommand: Command = {
  name: 'simulate',
  summary: 'write the log of an invented run, with its truth',
  help,
  async run(args, io) {
    const o = parsed(args)
    const { skid: skidFile, out } = o
    if (skidFile === undefined) return usage('simulate needs --skid FILE')
    if (out === undefined) return usage('simulate needs --out LOG.csv')
    const skid = loadSkid(await readText(skidFile), skidFile)
    let scenario: Scenario
    try {
      scenario = await scenarioFrom(o, skid)
      checkScenario(skid, scenario)
    } catch (error) {
      // What the options ask for is a mistake of the command line; what a scenario file says has its place in the file.
      if (error instanceof MonitorError && error.code === 'SIM_OPTION' && error.place === null)
        throw new MonitorError('USAGE', error.message, { hint: error.hint ?? 'clearbore simulate --help', cause: error })
      throw error
    }
    const log = logText(skid, scenario)
    const file = out === '-' ? null : await openAtomic(out)
    const line = progressLine(io, 'simulate', rowsOf(scenario), 'rows')
    let piece = ''
    let rows = -1
    const flush = async () => {
      if (file === null) await io.out(piece)
      else await file.write(piece)
      piece = ''
    }
    try {
      for (const text of log.lines()) {
        piece += text
        rows++
        if (piece.length < PIECE) continue
        io.signal.throwIfAborted()
        line.update(rows)
        await flush()
      }
      await flush()
      const truth = o.truth === undefined ? null : `${JSON.stringify(truthOf(skid, scenario, log.dirty()), null, 1)}\n`
      if (o.truth !== undefined && truth !== null) await writeAtomic(o.truth, truth)
    } catch (error) {
      await file?.discard()
      throw error
    } finally {
      line.end()
    }
    await file?.commit()
    return 0
  },
}
