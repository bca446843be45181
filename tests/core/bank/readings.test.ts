import { describe, expect, it } from 'vitest'
import { createBank } from '../../../server/core/bank/bank.ts'
import { disturbances, type SegmentObservation, stateMap } from '../../../server/core/bank/model.ts'
import { createReadings } from '../../../server/core/bank/readings.ts'
import { duo, stepMs } from '../fouling/steps.ts'

/** Readings of two segments whose shared tap, PT-2, was found to read 6000 Pa too much. */
function shifted() {
  const map = stateMap(duo)
  const s = createBank(duo, stepMs).save()
  s.tapShiftPa = duo.taps.map((t) => (t.name === 'PT-2' ? 6000 : 0))
  const f = { x: new Float64Array(map.size), p: new Float64Array(map.size ** 2) }
  return { s, map, f, readings: createReadings({ layout: duo, map, f, s, d: disturbances }) }
}
const reading = (dpPa: number, y = 0): SegmentObservation => ({
  y, dpPa, lnFlow: 0, lnVisc: 0, n0: 1, k0: 1, share: duo.streams.map(() => 1), tapPa: duo.taps.map(() => null), profileSpreadK: 0, stepVar: 1e-6,
}) // biome-ignore format: a list
const left = (byPa: readonly number[]) => {
  const { s, readings } = shifted()
  readings.rested(byPa)
  return s.tapShiftPa![duo.taps.findIndex((t) => t.name === 'PT-2')]
}

describe('a shared tap that reads 60 mbar too much', () => {
  it('takes 60 mbar too little off the segment before it and too much off the one after: both are read right, ln ΔP with them', () => {
    const { readings } = shifted()
    expect(readings.corrected(0, reading(194_000))).toMatchObject({ dpPa: 200_000, y: Math.log(200 / 194) })
    expect(readings.corrected(1, reading(156_000))).toMatchObject({ dpPa: 150_000, y: Math.log(150 / 156) })
    expect(readings.corrected(1, reading(5000))).toBe(null)
  })
  it('is in the zeros once a zero check at standstill has learnt it, and not taken off twice: all, half, and never more or back', () => {
    expect(left([-6000, 6000])).toBe(0)
    expect(left([-3000, 3000])).toBe(3000)
    expect(left([-9000, 9000])).toBe(0)
    expect(left([2000, -2000])).toBe(6000)
  })
  it('shows in ln ΔP by the logarithmic mean: 150 mbar of 340 mbar are ln(340/190) = 0.582 over 150 mbar, 258 mbar', () => {
    const { readings } = shifted()
    const dp = readings.dpOfShift(0, reading(19_000, Math.log(19 / 34)))
    expect(dp).toBeCloseTo(15_000 / Math.log(34 / 19), 6)
    expect(readings.dpOfShift(0, reading(200_000, 0.01))).toBe(200_000)
  })
})
