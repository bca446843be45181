import fc from 'fast-check'
import { expect, it } from 'vitest'
import { MonitorError } from '../../../server/core/errors.ts'
import { outletWindow } from '../../../server/core/rtd/outlet-window.ts'
import { type PathStep, pathVolume } from '../../../server/core/rtd/path.ts'
import { washoutVolumes } from '../../../server/core/rtd/rtd.ts'

const num = (min: number, max: number) => fc.double({ min, max, noNaN: true })
const tank = (volume: number, n = 1): PathStep => ({ rtd: { kind: 'tanks', n }, volume })

it('three equal stirred tanks in a row are three tanks in series, to 0.3 % of the volume at 1e-2 … 1e-5', () => {
  for (const r of [1e-2, 1e-3, 1e-4, 1e-5])
    expect(
      Math.abs(pathVolume([tank(2), tank(2), tank(2)], r) / (6 * washoutVolumes({ kind: 'tanks', n: 3 }, r)) - 1),
    ).toBeLessThan(3e-3)
})

it('two unlike stirred tanks leave (V1 e^(-v/V1) - V2 e^(-v/V2))/(V1 - V2) (closed solution), to 1 % of r', () => {
  fc.assert(
    fc.property(num(0.2, 0.9), num(-4, -1), (v2, log) => {
      const r = 10 ** log
      const v = pathVolume([tank(1), tank(v2)], r)
      expect(Math.abs((Math.exp(-v) - v2 * Math.exp(-v / v2)) / (1 - v2) / r - 1)).toBeLessThan(0.01)
    }),
    { numRuns: 25 },
  )
})

it('agrees with drawing 200 000 pairs of residence volumes: laminar tube then coil, 5 % and 1 % left, within 2 %', () => {
  let seed = 12345
  const uniform = () => {
    seed = (Math.imul(seed, 1664525) + 1013904223) >>> 0
    return (seed + 0.5) / 2 ** 32
  }
  const sums = Array.from(
    { length: 200_000 },
    () => 30 * washoutVolumes({ kind: 'laminar' }, uniform()) + 50 * washoutVolumes({ kind: 'coil' }, uniform()),
  ).sort((a, b) => a - b)
  const path: PathStep[] = [
    { rtd: { kind: 'laminar' }, volume: 30 },
    { rtd: { kind: 'coil' }, volume: 50 },
  ]
  expect(Math.abs(pathVolume(path, 0.05) / (sums[190_000] ?? 0) - 1)).toBeLessThan(0.02)
  expect(Math.abs(pathVolume(path, 0.01) / (sums[198_000] ?? 0) - 1)).toBeLessThan(0.04)
})

it('does not care about order or unit, falls with r, and never needs less than its largest vessel alone', () => {
  fc.assert(
    fc.property(num(5, 80), num(5, 80), num(-4, -0.5), num(0.001, 1000), (a, b, log, unit) => {
      const r = 10 ** log
      const path: PathStep[] = [{ rtd: { kind: 'coil' }, volume: a }, tank(b, 2)]
      const v = pathVolume(path, r)
      expect(pathVolume([...path].reverse(), r) / v).toBeCloseTo(1, 9)
      expect(
        pathVolume(
          path.map((s) => ({ ...s, volume: s.volume * unit })),
          r,
        ) /
          v /
          unit,
      ).toBeCloseTo(1, 9)
      expect(pathVolume(path, r / 2)).toBeGreaterThan(v)
      expect(v).toBeGreaterThan(pathVolume(path.slice(0, 1), r) * 0.995)
    }),
    { numRuns: 25 },
  )
})

// REC-14
it('opens the outlet window by volume: half the flow, twice the time; a gap in the flow delays and is told', () => {
  const path = [tank(6e-5, 20)]
  const flow = (q: number | null) =>
    Array.from({ length: 3000 }, (_, i) => ({ tMs: i * 1000, flowM3S: i > 100 && i < 110 ? q : 1e-6 }))
  const base = outletWindow({ path, epsilon: 0.005, flow: flow(1e-6), startMs: 20_000, endMs: 80_000 })
  const half = outletWindow({
    path,
    epsilon: 0.005,
    flow: flow(1e-6).map((s) => ({ ...s, flowM3S: 5e-7 })),
    startMs: 20_000,
    endMs: 80_000,
  })
  expect(base.fromMs).toBeCloseTo(20_000 + base.firstM3 * 1e9, 3)
  expect(base.toMs).toBeCloseTo(80_000 + base.lastM3 * 1e9, 3)
  expect(base.divertedM3).toBeCloseTo(6e-5 + base.lastM3 - base.firstM3, 9)
  expect(half.fromMs).toBeCloseTo(20_000 + base.firstM3 * 2e9, 3)
  const gap = outletWindow({ path, epsilon: 0.005, flow: flow(null), startMs: 20_000, endMs: 80_000 })
  expect(gap.unknownS).toBe(9)
  expect(gap.toMs).toBeCloseTo((base.toMs ?? 0) + 9000, 3)
})

it('leaves the end open while the outlet has not seen it, and refuses flow that starts too late', () => {
  const flow = [
    { tMs: 0, flowM3S: 1e-6 },
    { tMs: 60_000, flowM3S: 1e-6 },
  ]
  const open = outletWindow({ path: [tank(6e-5, 20)], epsilon: 0.005, flow, startMs: 0, endMs: 30_000 })
  expect([open.fromMs === null, open.toMs, open.divertedM3]).toEqual([false, null, null])
  expect(() => outletWindow({ path: [tank(1)], epsilon: 0.005, flow, startMs: -1, endMs: 5 })).toThrow(MonitorError)
  expect(() => pathVolume([], 0.1)).toThrow(MonitorError)
})
