import { expect, it } from 'vitest'
import { depositExamples } from '../../../server/core/deposit/worked.ts'
import { fluidExamples } from '../../../server/core/fluids/worked.ts'
import { hydraulicExamples } from '../../../server/core/hydraulics/worked.ts'

const all = [...fluidExamples, ...hydraulicExamples, ...depositExamples]

it.each(all.map((e) => [e.subject, e.printed, e.unit, e] as const))('%s: %d %s', (_subject, printed, _unit, e) => {
  expect(Math.abs(e.compute() / printed - 1)).toBeLessThanOrEqual(e.tolerance)
  expect(e.source.length).toBeGreaterThan(5)
})

it('there are 31 of them and no two of the same name and source', () => {
  expect(all).toHaveLength(31)
  expect(new Set(all.map((e) => `${e.subject} ${e.source}`)).size).toBe(31)
})
