import { Type } from 'typebox'
import { roles } from '../people/roles.ts'

const closed = <T extends Parameters<typeof Type.Object>[0]>(properties: T) =>
  Type.Object(properties, { additionalProperties: false })
const role = Type.Unsafe<(typeof roles)[number]>({ type: 'string', enum: [...roles] })
const name = Type.String({ minLength: 1, maxLength: 200 })
/** Far above what is taken, so that the mend is told, and far below what costs. */
const password = Type.String({ minLength: 1, maxLength: 1000 })
const reason = Type.String({ maxLength: 500 })
const maybe = Type.Union

export const sessionSchema = closed({
  person: maybe([closed({ name: Type.String(), role }), Type.Null()]),
  how: Type.Unsafe<'none' | 'demo' | 'signed-in'>({ type: 'string', enum: ['none', 'demo', 'signed-in'] }),
  resting: Type.Boolean(),
  endsMs: maybe([Type.Number(), Type.Null()]),
  mayRead: Type.Boolean(),
  hasPeople: Type.Boolean(),
  idleMs: Type.Number(),
})
export const signInSchema = closed({ name, password })
export const passwordSchema = closed({ old: password, password })
export const linkSchema = closed({ token: Type.String({ maxLength: 100 }), name: maybe([name, Type.Null()]), password })
export const linkFactsSchema = closed({ name: maybe([Type.String(), Type.Null()]), endsMs: Type.Number() })
export const personSchema = closed({
  id: Type.Integer(),
  name: Type.String(),
  role,
  disabled: Type.Boolean(),
  hasPassword: Type.Boolean(),
  addedMs: Type.Number(),
  signedInMs: maybe([Type.Number(), Type.Null()]),
})
export const addSchema = closed({ name, role, reason })
export const roleChangeSchema = closed({ role, reason })
export const reasonSchema = closed({ reason })
export const oneTimeSchema = closed({ id: Type.Integer(), path: Type.String() })
