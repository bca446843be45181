import { normalCdf } from '../stats/normal.ts'
import { gaussLegendre } from './gauss-legendre.ts'
import { solve } from './solve.ts'

export interface CusumChart {
  /** allowance [σ] */
  readonly k: number
  /** decision interval [σ] */
  readonly h: number
  /** head start of the sums [σ], 0 ≤ start ≤ h; 0 by default */
  readonly start?: number
  readonly sided: 'one' | 'two'
}

const density = (x: number): number => 0.3989422804014327 * Math.exp(-0.5 * x * x)

/**
 * Mean run length of the tabular CUSUM, S ← max(0, S + z − k), signal when S > h, for independent z ~ N(δ, 1) [samples].
 *
 *   L(s) = 1 + L(0) Φ(k − s − δ) + ∫₀ʰ L(y) φ(y + k − s − δ) dy        (Page's integral equation, zero state when s = 0)
 *
 * by Nyström's method on Gauss–Legendre nodes; two-sided by combining the two arms, head start included (Lucas and Crosier 1982).
 * shift  δ, mean of z [σ].  firstShift  mean of the first sample alone, when it differs: whitened readings show the whole of a shift
 * once, then (1 − φ) of it.  Good to 1e-6 for 0 < k ≤ 3, 0 < h ≤ 30, run lengths up to about 1e9.
 * Sources: E. S. Page, Biometrika 41 (1954) 100; A. L. Goel and S. M. Wu, Technometrics 13 (1971) 221; J. M. Lucas and R. B. Crosier,
 * Technometrics 24 (1982) 199. Checked against R spc 0.6.7 and the printed tables (fixtures/statistics).
 */
export function cusumRunLength(chart: CusumChart, shift: number, firstShift = shift): number {
  const start = chart.start ?? 0
  const high = arm(chart, shift, firstShift)
  if (chart.sided === 'one') return high(start)
  const low = arm(chart, -shift, -firstShift)
  if (firstShift === shift) return (high(start) * low(0) + low(start) * high(0) - high(0) * low(0)) / (high(0) + low(0))
  return 1 / (1 / high(start) + 1 / low(start))
}

/** L of one arm as a function of its start. */
function arm({ k, h }: CusumChart, shift: number, firstShift: number): (start: number) => number {
  const n = Math.min(110, 24 + Math.ceil(4 * h))
  const { at, weight } = gaussLegendre(n)
  const size = n + 1
  const a = new Float64Array(size * size)
  const point = (i: number) => (i === n ? 0 : at[i]! * h)
  for (let r = 0; r < size; r++) {
    const s = point(r)
    for (let c = 0; c < n; c++) a[r * size + c] = -weight[c]! * h * density(at[c]! * h + k - s - shift)
    a[r * size + n] = -normalCdf(k - s - shift)
    a[r * size + r]! += 1
  }
  const l = solve(a, new Float64Array(size).fill(1))
  return (s) => {
    let sum = 1 + l[n]! * normalCdf(k - s - firstShift)
    for (let c = 0; c < n; c++) sum += weight[c]! * h * l[c]! * density(at[c]! * h + k - s - firstShift)
    return sum
  }
}

/**
 * Siegmund's closed form for the one-sided chart, within a few per cent: (e^(−2Δb) + 2Δb − 1)/(2Δ²), b = h + 1.166, Δ = δ − k; b² at
 * Δ = 0. Where a root search begins. Source: D. Siegmund, Sequential Analysis, 1985.
 */
export function siegmundRunLength(k: number, h: number, shift: number): number {
  const drift = shift - k
  const b = h + 1.166
  if (Math.abs(drift) < 1e-6) return b * b
  return (Math.exp(-2 * drift * b) + 2 * drift * b - 1) / (2 * drift * drift)
}
