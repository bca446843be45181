import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { type Look, panned, within, zoomed } from '../../web/model/look.ts'

const bounds = { fromMs: 1000, toMs: 9000 }
const look = fc
  .tuple(fc.double({ min: -1e6, max: 1e6, noNaN: true }), fc.double({ min: 1e-3, max: 1e6, noNaN: true }))
  .map(([fromMs, span]): Look => ({ fromMs, toMs: fromMs + span }))

describe('the part of a run that a trend shows', () => {
  it('a quarter later and a quarter earlier again is where it was; twice in and twice out about a moment likewise', () => {
    expect(panned(panned({ fromMs: 0, toMs: 400 }, 0.25), -0.25)).toEqual({ fromMs: 0, toMs: 400 })
    expect(panned({ fromMs: 0, toMs: 400 }, 0.25)).toEqual({ fromMs: 100, toMs: 500 })
    expect(zoomed({ fromMs: 0, toMs: 400 }, 0.5, 100)).toEqual({ fromMs: 50, toMs: 250 })
    expect(zoomed(zoomed({ fromMs: 0, toMs: 400 }, 0.5, 100), 2, 100)).toEqual({ fromMs: 0, toMs: 400 })
  })

  it('at an end it is moved, not cut: it keeps its length', () => {
    expect(within({ fromMs: 500, toMs: 1500 }, bounds, 100)).toEqual({ fromMs: 1000, toMs: 2000 })
    expect(within({ fromMs: 8500, toMs: 9500 }, bounds, 100)).toEqual({ fromMs: 8000, toMs: 9000 })
    expect(within({ fromMs: 0, toMs: 50_000 }, bounds, 100)).toEqual(bounds)
  })

  it('always lies inside the bounds and is never shorter than the least, whatever is asked', () => {
    fc.assert(
      fc.property(look, (l) => {
        const w = within(l, bounds, 600)
        expect(w.fromMs).toBeGreaterThanOrEqual(bounds.fromMs - 1e-6)
        expect(w.toMs).toBeLessThanOrEqual(bounds.toMs + 1e-6)
        expect(w.toMs - w.fromMs).toBeGreaterThanOrEqual(600 - 1e-6)
      }),
    )
  })
})
