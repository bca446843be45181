import { type Static, type TProperties, type TSchema, Type } from 'typebox'
import { alarmStates, inputKinds } from '../core/alarms/alarm-state.ts'
import { phases } from '../core/reading.ts'
import { actions, alarmKinds, causes } from '../core/report.ts'
import { limitNames } from '../core/sequence.ts'
import { comparedBy } from '../wire/comparison.ts'
import type * as wire from '../wire/index.ts'

// The schemas of what crosses the network: they check requests, make the OpenAPI text, and tests hold every reply to them.

const closed = <T extends TProperties>(properties: T) => Type.Object(properties, { additionalProperties: false })
const maybe = <T extends TSchema>(schema: T) => Type.Union([schema, Type.Null()])
const list = <T extends TSchema>(schema: T) => Type.Array(schema)
const oneOf = <const T extends readonly string[]>(names: T) => Type.Unsafe<T[number]>({ type: 'string', enum: [...names] })
const text = Type.String()
const num = Type.Number()
const numOrNull = maybe(num)
const textOrNull = maybe(text)
const flag = Type.Boolean()
const texts = list(text)
const priority = oneOf(['high', 'medium', 'low'])
const limitName = oneOf(limitNames)
const limits = closed({
  dpHighBar: numOrNull, dpHighHighBar: numOrNull, pressureHighBar: numOrNull, temperatureHighC: numOrNull, temperatureHighHighC: numOrNull,
  temperatureLowC: numOrNull, flowLow: numOrNull,
}) // biome-ignore format: a list
const intervalParts = { atMs: num, lowMs: num, highMs: num, level: num }

export const problemSchema = closed({
  code: text,
  message: text,
  hint: textOrNull,
  place: maybe(closed({ file: text, line: numOrNull, column: numOrNull })),
})

export const serviceSchema = closed({
  api: Type.Literal(1),
  tool: closed({ name: Type.Literal('clearbore'), version: text }),
  cautions: texts,
  demo: flag,
  uploadMaxBytes: num,
  wallMs: num,
})

const clock = closed({ kind: oneOf(['wall', 'simulated']), nowMs: num, speed: num })

const runParts = {
  run: num,
  skid: text,
  title: text,
  state: oneOf(['live', 'importing', 'ended', 'failed']),
  kind: oneOf(['simulated', 'followed', 'imported', 'uploaded']),
  source: text,
  fault: textOrNull,
  fromMs: numOrNull,
  toMs: numOrNull,
  rows: num,
  clock: maybe(clock),
  alarms: closed({ high: num, medium: num, low: num, unacknowledged: num }),
  fouling: maybe(closed({ segment: text, ratio: numOrNull })),
  progress: numOrNull,
}
export const runRowSchema = closed(runParts)

const segmentFacts = closed({
  id: text, title: text, kind: text, streams: texts, leadsTo: textOrNull, main: flag, share: numOrNull, volumeMl: numOrNull,
  channel: maybe(closed({ boreMm: numOrNull, lengthM: numOrNull, parallel: num })),
  pressureIn: textOrNull, pressureOut: textOrNull, dpTag: textOrNull, heldOutBar: numOrNull, temperatures: texts, coolantTemperature: textOrNull, limits,
  feedRatio: maybe(closed({ of: Type.Tuple([text, text]), low: num, high: num })),
}) // biome-ignore format: a list
export const runDetailSchema = closed({
  ...runParts,
  skidFacts: closed({
    skid: text,
    title: text,
    timeZone: text,
    scanSeconds: num,
    lateSeconds: num,
    stepSeconds: num,
    detection: closed({ falseAlarmDays: num, riseToFindPct: num }),
    tags: list(closed({ tag: text, quantity: text, unit: textOrNull, range: maybe(Type.Tuple([num, num])) })),
    streams: list(
      closed({ id: text, title: text, flowTag: text, reagent: textOrNull, waterPpm: numOrNull, molHPerFlowUnit: numOrNull }),
    ),
    segments: list(segmentFacts),
  }),
  toolVersion: text,
  cautions: texts,
})

const onsetReport = closed({ at: text, low: text, high: text, level: num })
export const alarmRowSchema = closed({
  id: num, key: text, kind: oneOf(alarmKinds), priority, segment: textOrNull, tag: textOrNull, state: oneOf(alarmStates), active: flag, needsAck: flag,
  badInput: flag, raisedMs: num, clearedMs: numOrNull, acknowledgedMs: numOrNull, acknowledgedBy: textOrNull, shelvedUntilMs: numOrNull,
  aside: maybe(closed({ sinceMs: num, person: textOrNull, logic: textOrNull, reason: textOrNull })), shelveMaxMin: num, value: numOrNull,
  limit: numOrNull, unit: textOrNull, message: text, cause: maybe(oneOf(causes)), onset: maybe(onsetReport), detector: text,
  evidence: closed({ for: texts, against: texts, notExcluded: texts }),
  help: maybe(closed({ title: text, causes: text, consequence: text, check: text, action: text, timeToRespondS: num, review: text })),
}) // biome-ignore format: a list
export const transitionRowSchema = closed({
  alarm: numOrNull, key: text, tMs: num, from: oneOf(alarmStates), to: oneOf(alarmStates), input: oneOf([...inputKinds, 'comment'] as const),
  outcome: oneOf(['moved', 'tracked', 'marked', 'refused']), sound: flag, priority, value: numOrNull, limit: numOrNull, unit: textOrNull, person: textOrNull,
  logic: textOrNull, reason: textOrNull,
}) // biome-ignore format: a list

/** A flush plan or a report as core/report.ts has it; the contract names its fields. */
export const flushPlanSchema = Type.Object({ steps: list(Type.Object({ id: text })), cautions: texts })
export const reportSchema = Type.Object({
  report: Type.Literal(1),
  run: Type.Object({ skid: text, scans: num }),
  segments: list(Type.Object({ segment: text })),
  alarms: list(Type.Object({ id: num, kind: oneOf(alarmKinds) })),
  advice: list(Type.Object({ at: text, action: oneOf(actions) })),
  timeline: list(Type.Object({ at: text, segment: text, ratio: numOrNull })),
  notes: texts,
})

const segmentState = closed({
  segment: text, atMs: numOrNull, ratio: numOrNull, dpBar: numOrNull, cleanDpBar: numOrNull, flowMlMin: numOrNull, tempC: numOrNull, ratioMax: numOrNull,
  dpNowBar: numOrNull, temperatures: list(closed({ tag: text, tempC: numOrNull })), growthPerHour: numOrNull, onset: maybe(closed(intervalParts)),
  forecast: maybe(closed({ ...intervalParts, limit: limitName, limitBar: numOrNull })),
  baseline: maybe(closed({ fromMs: num, toMs: num, dpBar: num, sigma: num, provisional: flag })), limits,
  standing: maybe(closed({ alarm: num, priority, needsAck: flag })),
}) // biome-ignore format: a list
export const liveStateSchema = closed({
  run: num,
  clock,
  mode: closed({ phase: maybe(oneOf(phases)), production: flag, inferred: flag }),
  data: closed({
    lastRowMs: numOrNull,
    ageS: numOrNull,
    cutOff: flag,
    lagS: numOrNull,
    source: closed({ state: oneOf(['running', 'waiting', 'failed', 'ended']), message: textOrNull }),
  }),
  comb: closed({ scanMs: num, endMs: numOrNull, received: list(flag) }),
  segments: list(segmentState),
  tags: list(
    closed({
      tag: text, value: numOrNull, unit: textOrNull, atMs: numOrNull, quality: oneOf(['good', 'uncertain', 'bad', 'none']), reason: textOrNull, held: flag,
    }),
  ),
  alarms: list(alarmRowSchema),
  flood: maybe(closed({ sinceMs: num, count: num, first: alarmRowSchema })),
  advice: list(closed({ at: text, atMs: num, action: oneOf(actions), segments: texts, reason: text, plan: maybe(flushPlanSchema) })),
  flush: maybe(Type.Object({ flush: num, state: text, steps: list(Type.Object({ step: text, state: text, passedMl: num })) })),
}) // biome-ignore format: a list

const points = list(numOrNull)
const band = { min: points, max: points, mean: points }
export const trendsSchema = closed({
  run: num,
  fromMs: num,
  bucketMs: num,
  buckets: num,
  segments: list(
    closed({
      segment: text, ratio: closed(band), dpBar: closed(band), flowMlMin: closed(band), tempC: closed(band), cusum: maybe(closed(band)),
      cusumLow: maybe(closed(band)),
    }), // biome-ignore format: a list
  ),
  tags: list(closed({ tag: text, unit: textOrNull, ...band })),
  production: list(maybe(flag)),
})
export const comparisonSchema = closed({
  segment: text,
  by: oneOf(comparedBy),
  unit: oneOf(['h', 'L']),
  runs: list(
    closed({
      run: num, title: text, skid: text, toolVersion: text, zeroMs: num, x: list(num), ratio: closed(band), dpBar: closed(band),
      baseline: maybe(closed({ fromMs: num, toMs: num, dpBar: num, sigma: num, provisional: flag })),
    }), // biome-ignore format: a list
  ),
})
export const marksSchema = closed({
  run: num,
  baselines: list(closed({ segment: text, fromMs: num, toMs: num, dpBar: num, sigma: num, provisional: flag })),
  onsets: list(closed({ segment: text, foundMs: num, ...intervalParts })),
  limits: list(closed({ segment: text, limit: limitName, fromMs: num, value: numOrNull, person: textOrNull, reason: textOrNull })),
  forecasts: list(closed({ segment: text, knownMs: num, limit: text, ...intervalParts })),
  notes: list(closed({ tMs: num, text })),
})

const words = Type.String({ maxLength: 2000 })
const id = Type.Integer({ minimum: 1 })
const kind = <const T extends string>(name: T) => Type.Literal(name)
const actBodies = [
  closed({ kind: kind('acknowledge'), alarm: id }),
  closed({ kind: kind('reset'), alarm: id, reason: words }),
  closed({ kind: kind('shelve'), alarm: id, minutes: Type.Number({ exclusiveMinimum: 0, maximum: 480 }), reason: words }),
  closed({ kind: kind('unshelve'), alarm: id, reason: words }),
  closed({ kind: kind('comment'), alarm: maybe(id), text: words }),
  closed({ kind: oneOf(['out-of-service', 'in-service']), key: Type.String({ minLength: 1, maxLength: 200 }), reason: words }),
  closed({
    kind: kind('event'), event: Type.String({ minLength: 1, maxLength: 60 }), value: numOrNull, unit: maybe(Type.String({ maxLength: 20 })),
    note: words, of: Type.Optional(maybe(Type.String({ maxLength: 64 }))), atMs: Type.Optional(numOrNull),
  }),
  closed({ kind: kind('limit'), segment: text, limit: limitName, value: numOrNull, reason: words }),
  closed({
    kind: kind('flush-step'), segment: text, step: Type.String({ maxLength: 20 }),
    state: oneOf(['started', 'accepted', 'refused', 'skipped', 'ended', 'aborted']), reason: words,
  }),
  closed({
    kind: kind('flush-check'), segment: text, step: Type.String({ maxLength: 20 }), criterion: Type.String({ maxLength: 80 }),
    verdict: oneOf(['met', 'failed', 'skipped']), value: Type.Union([num, Type.String({ maxLength: 200 }), Type.Null()]),
    source: Type.String({ maxLength: 200 }), reason: words,
  }),
] as const // biome-ignore format: a list
/** One branch by `kind`, so that a mistake is told of the act that was meant. */
export const actBodySchema = Type.Unsafe<Static<(typeof actBodies)[number]>>({
  type: 'object',
  discriminator: { propertyName: 'kind' },
  required: ['kind'],
  oneOf: actBodies,
})
export const actRowSchema = closed({ seq: numOrNull, act: Type.Object({ kind: text, tMs: num, person: text }) })
export const actReplySchema = closed({
  seq: numOrNull,
  act: Type.Object({ kind: text, tMs: num, person: text }),
  transitions: list(transitionRowSchema),
})

const fileText = closed({ name: Type.String({ minLength: 1, maxLength: 200 }), text: Type.String({ maxLength: 2 ** 20 }) })
export const uploadBodySchema = closed({
  title: Type.String({ minLength: 1, maxLength: 200 }),
  skid: Type.Union([fileText, closed({ ofRun: id })]),
  events: maybe(fileText),
  start: maybe(Type.String({ maxLength: 40 })),
})
export const uploadSchema = closed({ upload: text, logs: list(closed({ name: text, bytes: num })) })

/** What a schema lets through is what the pages are told they get; the other way round is tested on real replies. */
type Fits<A extends B, B> = A
export type Checked = [
  Fits<Static<typeof serviceSchema>, wire.Service>,
  Fits<Static<typeof runDetailSchema>, wire.RunDetail>,
  Fits<Static<typeof alarmRowSchema>, wire.AlarmRow>,
  Fits<Static<typeof transitionRowSchema>, wire.TransitionRow>,
  Fits<Static<typeof trendsSchema>, wire.Trends>,
  Fits<Static<typeof marksSchema>, wire.Marks>,
  Fits<Static<typeof problemSchema>, wire.Problem>,
  Fits<Static<typeof actBodySchema>, wire.ActSent>,
  Fits<Static<typeof uploadBodySchema>, wire.UploadBody>,
  Fits<Static<typeof uploadSchema>, wire.Upload>,
]

/** Replies of a route. Their compile-time type stays with the wire types (readonly, which a schema's is not); tests hold real replies to the schema. */
export const replies = (schema: TSchema) => ({
  200: Type.Unsafe<unknown>(schema),
  '4xx': Type.Unsafe<unknown>(problemSchema),
  '5xx': Type.Unsafe<unknown>(problemSchema),
})
