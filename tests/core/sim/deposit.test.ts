import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { growthsOf, ratioOfThickness, sheared, thicknessOfRatio } from '../../../server/core/sim/deposit.ts'
import { growthLaws, type SimEvent, scenarioOf } from '../../../server/core/sim/scenario.ts'

const fouling = (over: Partial<Extract<SimEvent, { kind: 'fouling' }>> = {}): SimEvent => ({
  kind: 'fouling',
  segment: 'R1',
  law: 'linear',
  atHours: 1,
  hoursToLimit: 2,
  localFraction: null,
  sloughs: 0,
  ...over,
})
const growth = (event: SimEvent, noise = 0) =>
  growthsOf(
    scenarioOf({ hours: 10, seed: 4, noise, events: [event] }),
    () => 2.5,
    () => false,
  )[0]!

describe('deposits of the simulator', () => {
  it('narrows a bore by Hagen-Poiseuille: 10 % of the radius is 0.9^-4 = 1.5242, on half the length 1.2621', () => {
    expect(ratioOfThickness(0.1, 1)).toBeCloseTo(1.524158, 6)
    expect(ratioOfThickness(0.1, 0.5)).toBeCloseTo(1.262079, 6)
  })

  it('turns a ratio into the thickness that gives it', () => {
    fc.assert(
      fc.property(fc.double({ min: 1, max: 8, noNaN: true }), fc.double({ min: 0.1, max: 1, noNaN: true }), (ratio, fraction) => {
        expect(ratioOfThickness(thicknessOfRatio(ratio, fraction), fraction)).toBeCloseTo(ratio, 9)
      }),
    )
  })

  it.each(growthLaws)('%s: 1 at onset, the limit ratio 2.5 at the time to the limit when growth is not ragged', (law) => {
    const g = growth(fouling({ law, localFraction: 0.4 }))
    expect(g.pathAt(g.onsetMs)).toBe(1)
    expect(g.pathAt(g.onsetMs + 2 * 3_600_000)).toBeCloseTo(2.5, 3)
  })

  it('linear is linear in thickness: half the time, half the thickness; autocatalytic less than half, saturating more', () => {
    const half = (law: (typeof growthLaws)[number]) =>
      thicknessOfRatio(growth(fouling({ law })).pathAt(2 * 3_600_000 + growth(fouling()).onsetMs - 3_600_000), 1) /
      thicknessOfRatio(2.5, 1)
    expect(half('linear')).toBeCloseTo(0.5, 4)
    expect(half('autocatalytic')).toBeLessThan(0.42)
    expect(half('saturating')).toBeGreaterThan(0.58)
  })

  it('only ever grows when nothing breaks off, ragged as it is; with sloughs it falls at each one named', () => {
    const steady = growth(fouling(), 1)
    const at = (g: typeof steady, minutes: number) => g.pathAt(g.onsetMs + minutes * 60_000)
    for (let m = 1; m < 120; m++) expect(at(steady, m)).toBeGreaterThanOrEqual(at(steady, m - 1))
    const broken = growth(fouling({ sloughs: 2 }), 1)
    expect(broken.sloughsMs).toHaveLength(2)
    for (const s of broken.sloughsMs) expect(broken.pathAt(s + 1000)).toBeLessThan(broken.pathAt(s - 20_000))
  })

  it('bends towards twice the limit ratio far past it, and not at all up to 1.3 times it', () => {
    expect(sheared(3.2, 2.5)).toBe(3.2)
    expect(sheared(1e6, 2.5)).toBeCloseTo(5, 9)
    expect(sheared(3.2500001, 2.5)).toBeCloseTo(3.25, 5)
  })

  it('is dissolved by a flush but for what the recovery leaves: 1 + (r − 1) · 0.1, and the next growth starts from there', () => {
    const events: SimEvent[] = [
      fouling(),
      { kind: 'flush', atHours: 2.5, minutes: 30, recovery: 0.9, startupMinutes: 10 },
      fouling({ atHours: 5 }),
    ]
    const [first, second] = growthsOf(
      scenarioOf({ hours: 10, seed: 4, events }),
      () => 2.5,
      () => false,
    )
    expect(first!.endedBy).toBe('flush')
    expect(first!.ratioAfterFlush).toBeCloseTo(1 + (first!.pathAt(first!.endMs) - 1) * 0.1, 12)
    expect(second!.ratioAtOnset).toBe(first!.ratioAfterFlush)
    expect(second!.pathAt(second!.onsetMs)).toBeCloseTo(first!.ratioAfterFlush!, 12)
  })
})
