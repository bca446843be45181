import { MonitorError } from '../errors.ts'
import { gaussLegendre } from './gauss-legendre.ts'
import { solve } from './solve.ts'

const density = (x: number): number => 0.3989422804014327 * Math.exp(-0.5 * x * x)

/**
 * Mean run length of the two-sided EWMA chart, E ← (1 − λ) E + λ z from 0, signal when |E| > c √(λ/(2 − λ)), for independent
 * z ~ N(δ, 1) [samples]: L(u) = 1 + ∫ L(y) φ((y − (1 − λ)u)/λ − δ) dy/λ by Nyström's method on Gauss–Legendre nodes.
 * lambda  weight of the newest reading, 0.02 to 1.  c  width of the limits [σ of E].  shift  δ [σ].
 * Sources: S. V. Crowder, Technometrics 29 (1987) 401; J. M. Lucas and M. S. Saccucci, Technometrics 32 (1990) 1. Checked against R
 * spc 0.6.7 and Montgomery's table (fixtures/statistics).
 */
export function ewmaRunLength(lambda: number, c: number, shift: number): number {
  const limit = c * Math.sqrt(lambda / (2 - lambda))
  const n = Math.min(110, 30 + Math.ceil((6 * limit) / lambda))
  const { at, weight } = gaussLegendre(n)
  const point = (i: number) => (2 * at[i]! - 1) * limit
  const reach = (from: number, to: number) => (2 * limit * density((to - (1 - lambda) * from) / lambda - shift)) / lambda
  const a = new Float64Array(n * n)
  for (let r = 0; r < n; r++) {
    for (let k = 0; k < n; k++) a[r * n + k] = -weight[k]! * reach(point(r), point(k))
    a[r * n + r]! += 1
  }
  const l = solve(a, new Float64Array(n).fill(1))
  let sum = 1
  for (let k = 0; k < n; k++) sum += weight[k]! * l[k]! * reach(0, point(k))
  return sum
}

/**
 * Width c of the limits [σ of E] for a wanted in-control run length, by bisection.
 * Errors: CONFIG_RANGE unless 0.02 ≤ λ ≤ 1 and the run length is 10 to 1e8.
 */
export function ewmaLimit(lambda: number, arl0: number): number {
  if (!(lambda >= 0.02 && lambda <= 1))
    throw new MonitorError('CONFIG_RANGE', `an EWMA chart needs a weight of 0.02 to 1, got ${lambda}`)
  if (!(arl0 >= 10 && arl0 <= 1e8))
    throw new MonitorError('CONFIG_RANGE', `an EWMA chart needs a run length of 10 to 1e8, got ${arl0}`)
  let low = 0.1
  let high = 7
  for (let i = 0; i < 50 && high - low > 1e-7; i++) {
    const mid = (low + high) / 2
    if (ewmaRunLength(lambda, mid, 0) < arl0) low = mid
    else high = mid
  }
  return (low + high) / 2
}
