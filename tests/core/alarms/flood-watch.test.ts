import fc from 'fast-check'
import { expect, it } from 'vitest'
import { createFloodWatch, flood } from '../../../server/core/alarms/flood.ts'

const minute = 60_000

// ALM-14
it('eleven alarms in ten minutes are a flood from the eleventh on; its first is the first of them, also when it has left the window, until fewer than five are left', () => {
  const watch = createFloodWatch()
  for (let i = 0; i < 10; i++) watch.take(i * 10_000, i + 1)
  expect(watch.now(90_000)).toBeNull()
  watch.take(100_000, 11)
  expect(watch.now(100_000)).toEqual({ sinceMs: 100_000, count: 11, firstAlarm: 1 })
  for (let i = 0; i < 6; i++) watch.take(8 * minute + i * 10_000, 20 + i)
  // At 15 min the first eleven are gone from the window; the six of minute 8 hold the flood.
  expect(watch.now(15 * minute)).toEqual({ sinceMs: 100_000, count: 17, firstAlarm: 1 })
  // The second of the six leaves at 18:10: four are left.
  expect(watch.now(18 * minute + 9_999)?.firstAlarm).toBe(1)
  expect(watch.now(18 * minute + 10_000)).toBeNull()
})

// ALM-13, ALM-14
it('one alarm after the other it tells the same floods as the report counts, wherever one asks', () => {
  const gaps = fc.array(fc.constantFrom(0, 1000, 20_000, 60_000, 150_000, 600_000), { maxLength: 80 })
  fc.assert(
    fc.property(gaps, fc.array(fc.nat(8_000_000), { minLength: 1, maxLength: 20 }), (steps, asks) => {
      let t = 0
      const times = steps.map((s) => (t += s))
      const floods = flood(times, 1e12)
      for (const at of asks) {
        const watch = createFloodWatch()
        for (const [i, tMs] of times.entries()) if (tMs <= at) watch.take(tMs, i)
        const want = floods.find((f) => f.fromMs <= at && at < f.toMs) ?? null
        expect(watch.now(at)?.sinceMs ?? null).toBe(want?.fromMs ?? null)
      }
    }),
  )
})
