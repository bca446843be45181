import { type Static, type TProperties, type TSchema, Type } from 'typebox'
import type { SettingsSent } from '../wire/settings.ts'

const closed = <T extends TProperties>(properties: T) => Type.Object(properties, { additionalProperties: false })
const maybe = <T extends TSchema>(schema: T) => Type.Union([schema, Type.Null()])
const text = Type.String()
const num = Type.Number()
/** A setting: number, text, flag, list of texts or numbers; null is not set. */
const value = Type.Union([
  num,
  Type.String({ maxLength: 2000 }),
  Type.Boolean(),
  Type.Null(),
  Type.Array(Type.Union([Type.String({ maxLength: 200 }), num]), { maxItems: 100 }),
])
const stored = Type.Union([num, text, Type.Boolean(), Type.Null(), Type.Array(Type.Union([text, num]))])
const row = closed({ path: text, unit: maybe(text), old: stored, new: stored })

export const settingsPageSchema = closed({
  skid: text,
  title: text,
  run: maybe(num),
  version: num,
  versions: Type.Array(
    closed({
      version: num,
      kind: Type.Union([Type.Literal('file'), Type.Literal('change')]),
      decidedMs: num,
      effectiveMs: num,
      person: text,
      reason: text,
      run: maybe(num),
      planned: Type.Boolean(),
      changes: Type.Array(row),
    }),
  ),
  settings: Type.Array(closed({ path: text, unit: maybe(text), value: stored, group: text, name: text })),
  fixed: text,
})
export const settingsComparisonSchema = closed({
  from: num,
  to: num,
  changes: Type.Array(row),
  added: Type.Array(text),
  removed: Type.Array(text),
})
export const settingsBodySchema = closed({
  reason: Type.String({ maxLength: 2000 }),
  effectiveMs: maybe(Type.Number({ minimum: 0, maximum: 8.64e15 })),
  changes: Type.Array(closed({ path: Type.String({ minLength: 1, maxLength: 300 }), new: value }), { minItems: 1, maxItems: 100 }),
})

type Fits<A extends B, B> = A
export type Checked = Fits<Static<typeof settingsBodySchema>, SettingsSent>
