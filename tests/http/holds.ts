import { Ajv } from 'ajv'
import type { TSchema } from 'typebox'
import { expect } from 'vitest'

const ajv = new Ajv({ strict: false, allErrors: true })

/** A reply is as its schema has it. */
export function holds(schema: TSchema, value: unknown): void {
  const check = ajv.compile(schema)
  expect({ ok: check(value), errors: check.errors }).toEqual({ ok: true, errors: null })
}
