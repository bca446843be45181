import fc from 'fast-check'
import { expect, it } from 'vitest'
import { flowAtDp, risingRoot, splitFlow } from '../../../server/core/hydraulics/branches.ts'
import { type ChannelGeometry, roundArea } from '../../../server/core/hydraulics/channel.ts'
import { cleanDp } from '../../../server/core/hydraulics/clean-dp.ts'

const tube = (diameterM: number, over: Partial<ChannelGeometry> = {}): ChannelGeometry => ({
  diameterM,
  lengthM: 10,
  parallel: 1,
  roughnessM: 1e-5,
  coilDiameterM: null,
  heightM: 0,
  bends: 0,
  areaM2: roundArea(diameterM),
  laminarFactor: 1,
  ...over,
})

it('equal bores share equally, and show what one channel with parallel branches shows', () => {
  const one = tube(0.0016, { coilDiameterM: 0.08 })
  const { dpPa, flowsKgS } = splitFlow([one, one, one], 3e-3, 900, 8e-4)
  for (const f of flowsKgS) expect(Math.abs(f / 1e-3 - 1)).toBeLessThan(1e-11)
  expect(Math.abs(dpPa / cleanDp({ ...one, parallel: 3 }, 3e-3, 900, 8e-4).dpPa - 1)).toBeLessThan(1e-10)
})

it('laminar bores share as the fourth power: 1 and 2 mm as 1 to 16', () => {
  const { flowsKgS } = splitFlow([tube(0.001), tube(0.002)], 1.7e-4, 900, 1e-3)
  expect(flowsKgS[1]! / flowsKgS[0]!).toBeCloseTo(16, 6)
})

it('any unlike branches: one ΔP, and flows that add up to 1e-9, laminar to turbulent', () => {
  const branch = fc.record({
    d: fc.double({ min: 0.0005, max: 0.004, noNaN: true }),
    coil: fc.constantFrom(null, 0.05, 0.2),
    bends: fc.constantFrom(0, 20),
  })
  fc.assert(
    fc.property(fc.array(branch, { minLength: 1, maxLength: 4 }), fc.double({ min: 1e-5, max: 0.02, noNaN: true }), (list, m) => {
      const branches = list.map((b) => tube(b.d, { coilDiameterM: b.coil, bends: b.bends }))
      const { dpPa, flowsKgS } = splitFlow(branches, m, 900, 8e-4)
      expect(Math.abs(flowsKgS.reduce((a, b) => a + b, 0) / m - 1)).toBeLessThan(1e-9)
      flowsKgS.forEach((f, i) => {
        expect(Math.abs(cleanDp(branches[i]!, f, 900, 8e-4).dpPa / dpPa - 1)).toBeLessThan(1e-8)
      })
    }),
    { numRuns: 40 },
  )
})

it('unlike heads drive a flow round even when none comes in: the branch that rises flows backwards', () => {
  const { flowsKgS } = splitFlow([tube(0.002, { heightM: 1 }), tube(0.002, { heightM: 0 })], 0, 900, 1e-3)
  expect(flowsKgS[0]!).toBeLessThan(0)
  expect(Math.abs(flowsKgS[0]! + flowsKgS[1]!)).toBeLessThan(1e-15)
})

it('flow at a pressure is the inverse of the pressure at a flow, to 1e-10, both ways and with head', () => {
  fc.assert(
    fc.property(
      fc.double({ min: 1e-6, max: 0.01, noNaN: true }),
      fc.constantFrom(null, 0.08),
      fc.constantFrom(-1, 1),
      (m, coil, sign) => {
        const c = tube(0.0016, { coilDiameterM: coil, heightM: 0.5, bends: 6 })
        const back = flowAtDp(c, cleanDp(c, sign * m, 900, 8e-4).dpPa, 900, 8e-4)
        expect(Math.abs(back / (sign * m) - 1)).toBeLessThan(1e-7)
      },
    ),
  )
  expect(flowAtDp(tube(0.001), 0, 900, 1e-3)).toBe(0)
})

it('nonsense is HYDRAULICS_RANGE', () => {
  expect(() => splitFlow([], 1, 900, 1e-3)).toThrow(/at least one branch/)
  expect(() => splitFlow([tube(0.001)], -1, 900, 1e-3)).toThrow(/0 or more/)
  expect(() => flowAtDp(tube(0.001), Number.NaN, 900, 1e-3)).toThrow(/finite/)
})

it('the root finder finds the cube root of 2 and keeps to its bracket', () => {
  expect(risingRoot((x) => x ** 3 - 2, 0, 2)).toBeCloseTo(Math.cbrt(2), 13)
  expect(risingRoot((x) => x + 1, 0, 2)).toBe(0)
  expect(risingRoot((x) => x - 3, 0, 2)).toBe(2)
})
