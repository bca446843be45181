import { type TProperties, Type } from 'typebox'
import { alarmRowSchema } from './schemas.ts'

// Replies of the alarm-performance page, the hand-over note and the way from an alarm to what led to it.

const closed = <T extends TProperties>(properties: T) => Type.Object(properties, { additionalProperties: false })
const text = Type.String()
const num = Type.Number()
const texts = Type.Array(text)
const numOrNull = Type.Union([num, Type.Null()])
const textOrNull = Type.Union([text, Type.Null()])
const counted = Type.Array(closed({ key: text, count: num }))
const line = closed({ tMs: num, what: text, alarm: numOrNull, text, person: textOrNull })
const rows = Type.Array(alarmRowSchema)

export const performanceSchema = closed({
  run: num,
  fromMs: num,
  toMs: num,
  hours: num,
  records: num,
  label: textOrNull,
  annunciated: num,
  ratePerHour: num,
  tenMinutes: closed({ windows: num, over10: num, most: num }),
  hoursOver30: closed({ windows: num, over30: num }),
  floodShare: num,
  floods: Type.Array(closed({ fromMs: num, toMs: num, count: num })),
  mostFrequent: Type.Array(closed({ key: text, count: num, share: num })),
  topTenShare: num,
  chattering: Type.Array(closed({ key: text, atMs: num })),
  fleeting: Type.Array(closed({ key: text, atMs: num, lastedS: num })),
  stale: Type.Array(closed({ key: text, fromMs: num, hours: num })),
  priorityShare: closed({ low: num, medium: num, high: num }),
  suppressed: counted,
  outsideProcedure: num,
  refused: num,
  table: Type.Array(
    closed({
      metric: text,
      target: text,
      value: numOrNull,
      unit: text,
      basis: text,
      met: Type.Union([Type.Boolean(), Type.Null()]),
    }),
  ),
  names: Type.Record(Type.String(), text),
})

export const storySchema = closed({
  alarm: alarmRowSchema,
  firstOut: alarmRowSchema,
  fromMs: num,
  toMs: num,
  lines: Type.Array(line),
})

export const handOverSchema = closed({
  run: num,
  fromMs: num,
  toMs: num,
  production: Type.Boolean(),
  segments: Type.Array(closed({ segment: text, ratio: numOrNull, limitFromMs: numOrNull, limitToMs: numOrNull })),
  open: rows,
  shelved: rows,
  suppressed: rows,
  outOfService: rows,
  raised: closed({ high: num, medium: num, low: num, over: num }),
  flush: Type.Array(closed({ segment: text, step: text, state: text, atMs: num, person: text })),
  advice: Type.Array(closed({ atMs: num, action: text, segments: texts, reason: text })),
  gaps: Type.Array(closed({ fromMs: num, toMs: num })),
  gapStepMs: num,
  badTags: Type.Array(closed({ tag: text, reason: textOrNull })),
  changes: Type.Array(line),
  comments: Type.Array(line),
})
