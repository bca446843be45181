import { expect, it } from 'vitest'
import { createAdviser, type SegmentForAdvice } from '../../../server/core/advice/adviser.ts'
import { MonitorError } from '../../../server/core/errors.ts'

const minute = 60_000
const growing: SegmentForAdvice = {
  id: 'R1',
  kind: 'reactor',
  ratio: 1.4,
  growth: {
    onset: null,
    raisedMs: 0,
    forecast: { limit: 'dpHighBar', atMs: 40 * minute, lowMs: 30 * minute, highMs: 50 * minute, level: 0.8 },
  },
}

it('advises the flush though its plan cannot be computed, with plan null and the reason in words', () => {
  const adviser = createAdviser(undefined, () => {
    throw new MonitorError('FLUID_RANGE', 'tetrahydrofuran has no properties at -180.0 °C')
  })
  const [advice] = adviser.step(0, [growing])
  expect(advice).toMatchObject({ action: 'flush', segments: ['R1'], plan: null })
  expect(advice!.reason).toMatch(/no plan can be computed: tetrahydrofuran has no properties at -180\.0 °C$/)
})

it('hides no other fault', () => {
  const adviser = createAdviser(undefined, () => {
    throw new TypeError('a mistake of the program')
  })
  expect(() => adviser.step(0, [growing])).toThrow(TypeError)
})
