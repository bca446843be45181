import { MonitorError } from '../errors.ts'

/** Right-hand side dy/dx = f(x, y) of a small system. */
export type Slope = (x: number, y: readonly number[]) => readonly number[]

export interface OdeOptions {
  readonly relTol?: number
  readonly absTol?: number
  /** Largest step; default the whole interval. */
  readonly maxStep?: number
  readonly maxSteps?: number
}

export interface OdePoint {
  readonly x: number
  readonly y: readonly number[]
}

const nodes = [0, 1 / 5, 3 / 10, 4 / 5, 8 / 9, 1, 1]
const rows: readonly (readonly number[])[] = [
  [],
  [1 / 5],
  [3 / 40, 9 / 40],
  [44 / 45, -56 / 15, 32 / 9],
  [19372 / 6561, -25360 / 2187, 64448 / 6561, -212 / 729],
  [9017 / 3168, -355 / 33, 46732 / 5247, 49 / 176, -5103 / 18656],
  [35 / 384, 0, 500 / 1113, 125 / 192, -2187 / 6784, 11 / 84],
]
/** Weights of the fifth less those of the fourth order: the error of a step. */
const errorWeights = [71 / 57600, 0, -71 / 16695, 71 / 1920, -17253 / 339200, 22 / 525, -1 / 40]

const along = (y: readonly number[], h: number, weights: readonly number[], k: readonly (readonly number[])[]): number[] =>
  y.map((yi, i) => {
    let sum = 0
    for (let s = 0; s < weights.length; s++) sum += (weights[s] ?? 0) * (k[s]?.[i] ?? 0)
    return yi + h * sum
  })

/**
 * Adaptive explicit Runge-Kutta integration of a small, non-stiff system from x0 to x1 > x0; gives every accepted point.
 *
 *   a step is taken where  rms( err_i / (absTol + relTol · max(|y_i|, |y_i,new|)) ) ≤ 1,   next step h · 0.9 · err^(−1/5) within 0.2 … 5
 *
 * Fifth-order result with a fourth-order companion for the error; the last stage of a step is the first of the next.
 * Validity: smooth f; stiff problems end in the step limit instead of a wrong answer.
 * Source: J. R. Dormand, P. J. Prince, J. Comput. Appl. Math. 6 (1980) 19-26; step rule: Hairer, Norsett, Wanner, Solving ODEs I, II.4.
 * Errors: THERMAL_RANGE for x1 not above x0, for a slope that is no number, and past `maxSteps` (default 20 000) steps.
 */
export function integrate(f: Slope, x0: number, y0: readonly number[], x1: number, options: OdeOptions = {}): OdePoint[] {
  const { relTol = 1e-8, absTol = 1e-10, maxStep = x1 - x0, maxSteps = 20_000 } = options
  if (!(x1 > x0)) throw new MonitorError('THERMAL_RANGE', `integration needs x1 > x0, got ${x0} to ${x1}`)
  const points: OdePoint[] = [{ x: x0, y: [...y0] }]
  let x = x0
  let y: readonly number[] = [...y0]
  let first = f(x, y)
  let h = Math.min(maxStep, (x1 - x0) / 100)
  for (let tries = 0; x < x1; tries++) {
    if (tries >= maxSteps)
      throw new MonitorError(
        'THERMAL_RANGE',
        `integration stopped at x = ${x} of ${x1} after ${maxSteps} steps (stiff or singular)`,
      )
    const last = h >= x1 - x
    if (last) h = x1 - x
    const k: (readonly number[])[] = [first]
    let next: readonly number[] = y
    for (let s = 1; s < 7; s++) {
      next = along(y, h, rows[s] ?? [], k)
      k.push(f(x + (nodes[s] ?? 0) * h, next))
    }
    const errors = along(new Array<number>(y.length).fill(0), h, errorWeights, k)
    let sum = 0
    for (const [i, e] of errors.entries())
      sum += (e / (absTol + relTol * Math.max(Math.abs(y[i] ?? 0), Math.abs(next[i] ?? 0)))) ** 2
    const error = Math.sqrt(sum / errors.length)
    if (!Number.isFinite(error)) throw new MonitorError('THERMAL_RANGE', `integration met a slope that is no number near x = ${x}`)
    if (error <= 1) {
      x = last ? x1 : x + h
      y = next
      first = k[6] ?? first
      points.push({ x, y })
    }
    h = Math.min(maxStep, h * Math.min(5, Math.max(0.2, 0.9 * error ** -0.2)))
  }
  return points
}
