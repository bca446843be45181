import fc from 'fast-check'
import { expect, it } from 'vitest'
import { MonitorError } from '../../../server/core/errors.ts'
import { integrate } from '../../../server/core/thermal/ode.ts'

const end = (points: readonly { readonly y: readonly number[] }[]) => points.at(-1)?.y ?? []

it('decays exp(-k x) to 1e-7 for k from 0.01 to 50', () => {
  fc.assert(
    fc.property(fc.double({ min: 0.01, max: 50, noNaN: true }), (k) => {
      const [y = 0] = end(integrate((_x, [v = 0]) => [-k * v], 0, [1], 1, { relTol: 1e-9, absTol: 1e-14 }))
      expect(Math.abs(y - Math.exp(-k))).toBeLessThan(1e-7 * Math.exp(-k) + 1e-13)
    }),
    { numRuns: 40 },
  )
})

it('keeps an oscillator on its circle for ten turns, phase and radius to 1e-6', () => {
  const [c = 0, s = 0] = end(integrate((_x, [a = 0, b = 0]) => [-b, a], 0, [1, 0], 20 * Math.PI, { relTol: 1e-10 }))
  expect(Math.abs(c - 1)).toBeLessThan(1e-6)
  expect(Math.abs(s)).toBeLessThan(1e-6)
})

it('follows the logistic curve 1/(1 + 9 e^-x) at every accepted point and ends exactly at x1', () => {
  const points = integrate((_x, [y = 0]) => [y * (1 - y)], 0, [0.1], 12)
  expect(points.at(-1)?.x).toBe(12)
  for (const {
    x,
    y: [y = 0],
  } of points)
    expect(Math.abs(y - 1 / (1 + 9 * Math.exp(-x)))).toBeLessThan(1e-7)
})

it('is exact on a quartic, whose fifth-order error vanishes', () => {
  const [y = 0] = end(integrate((x) => [5 * x ** 4 - 3 * x ** 2], -1, [0], 2, { maxStep: 3 }))
  expect(Math.abs(y - (2 ** 5 + 1 - (2 ** 3 + 1)))).toBeLessThan(1e-10)
})

it('gains accuracy by about the ratio of the tolerances: 1e-4 to 1e-8 cuts the error more than a thousandfold', () => {
  const error = (relTol: number) =>
    Math.abs(
      (end(integrate((x, [y = 0]) => [y * Math.cos(x)], 0, [1], 10, { relTol, absTol: relTol * 1e-2 }))[0] ?? 0) -
        Math.exp(Math.sin(10)),
    )
  expect(error(1e-4) / error(1e-8)).toBeGreaterThan(1e3)
})

it('refuses a slope that is no number, a finite-time blow-up and an empty interval', () => {
  expect(() => integrate(() => [Number.NaN], 0, [1], 1)).toThrow(MonitorError)
  expect(() => integrate((_x, [y = 0]) => [y * y], 0, [1], 2, { maxSteps: 2000 })).toThrow(MonitorError)
  expect(() => integrate(() => [0], 1, [1], 1)).toThrow(MonitorError)
})
