import { describe, expect, it } from 'vitest'
import { createWatch } from '../../../server/core/fouling/watch.ts'
import type { WatchEvent } from '../../../server/core/fouling/watch-state.ts'
import { duo, stepMs, stepper } from './steps.ts'

/** Slow fall of the first segment's resistance by so much a day; everything the watch said of it. */
function fall(perDay: number, days: number, seed: number): { k: number; event: WatchEvent }[] {
  const watch = createWatch(duo, stepMs)
  const step = stepper({ noisePa: 300, wander: 0.0022, seed })
  const said: { k: number; event: WatchEvent }[] = []
  for (let k = 0; k < days * 2880; k++)
    for (const event of watch.step(step(k, { ratio: [Math.exp((-perDay * k) / 2880), 1] }), [null, null]).events)
      said.push({ k, event })
  return said
}

// STA-01
describe('resistance that sinks below clean', () => {
  it('by 1 % a day is told once when it stands about 5 % below, as no alarm; its charts begin anew there', () => {
    const said = fall(0.01, 9, 1)
    const below = said.filter((s) => s.event.kind === 'below')
    expect(below).toHaveLength(1)
    expect(below[0]!.event).toMatchObject({ segment: 0 })
    if (below[0]!.event.kind !== 'below') throw new Error('no fall')
    expect(below[0]!.event.share).toBeGreaterThan(0.045)
    expect(below[0]!.event.share).toBeLessThan(0.08)
    expect(below[0]!.event.ratio).toBeLessThan(0.96)
    expect(said.filter((s) => s.event.kind === 'creep')).toEqual([])
  }, 30_000)
})
