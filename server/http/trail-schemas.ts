import { type Static, type TProperties, type TSchema, Type } from 'typebox'
import type * as wire from '../wire/trail.ts'

const closed = <T extends TProperties>(properties: T) => Type.Object(properties, { additionalProperties: false })
const maybe = <T extends TSchema>(schema: T) => Type.Union([schema, Type.Null()])
const text = Type.String()
const num = Type.Number()
const textOrNull = maybe(text)
const count = Type.Integer({ minimum: 0, maximum: Number.MAX_SAFE_INTEGER })
const counts = closed({ run: count, site: count })
export const trailGroups = ['act', 'change', 'shelve', 'refused', 'alarm', 'access', 'run', 'review'] as const
const group = Type.Unsafe<wire.TrailGroup>({ type: 'string', enum: [...trailGroups] })

export const trailSchema = closed({
  run: maybe(num),
  rows: Type.Array(
    closed({
      chain: Type.Union([Type.Literal('run'), Type.Literal('site')]), n: num, tMs: maybe(num), recordedMs: num, group, what: text, about: textOrNull,
      person: textOrNull, old: textOrNull, new: textOrNull, reason: textOrNull, isNew: Type.Boolean(),
    }), // biome-ignore format: a list
  ),
  total: num,
  from: num,
  fresh: num,
  people: Type.Array(text),
  review: maybe(closed({ person: text, atMs: num, remark: text, counts })),
  counts,
  head: text,
  signing: closed({ fingerprint: textOrNull, trouble: textOrNull }),
})

export const trailReviewSchema = closed({
  run: maybe(Type.Integer({ minimum: 1 })),
  counts,
  remark: Type.String({ maxLength: 2000 }),
})

type Fits<A, B extends A> = B
export type TrailFits = [Fits<wire.Trail, Static<typeof trailSchema>>, Fits<wire.TrailReviewSent, Static<typeof trailReviewSchema>>]
