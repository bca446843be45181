import type { Bin } from './points.ts'
import type { GrowthSettings } from './settings.ts'
import type { WanderStep } from './wander.ts'

/** The bins with the columns of the regression: y, one, the rise g of unit height at the end and its slope per span. */
export interface Work {
  readonly bins: readonly Bin[]
  readonly steps: readonly WanderStep[]
  readonly y: Float64Array
  readonly one: Float64Array
  readonly g: Float64Array
  readonly slope: Float64Array
}

/** Fills g (rise of unit height at the end) and its slope per span for an onset at tau. */
export function shape(work: Work, tau: number, span: number, film: number): void {
  const top = film > 1e-3 ? -4 * Math.log1p(-film / 4) : 1
  for (let i = 0; i < work.bins.length; i++) {
    const s = (work.bins[i]!.tMs - tau) / span
    work.g[i] = s <= 0 ? 0 : film > 1e-3 ? (-4 * Math.log1p((-film * s) / 4)) / top : s
    work.slope[i] = s <= 0 ? 0 : film > 1e-3 ? film / (1 - (film * s) / 4) / top : 1
  }
}

export interface Fit {
  readonly d: number
  readonly j: number
  readonly rise: number
  readonly clean: number
  /** ln likelihood left when c and A are fitted, the rise term d²/2j aside */
  readonly level: number
}

/** Least squares of whitened y on one and g: rise = d/j. */
export function leastSquares(one: Float64Array, g: Float64Array, y: Float64Array, logDet = 0): Fit | null {
  let oneOne = 0
  let oneY = 0
  let gg = 0
  let gOne = 0
  let gY = 0
  let yy = 0
  for (let i = 0; i < y.length; i++) {
    oneOne += one[i]! * one[i]!
    oneY += one[i]! * y[i]!
    gg += g[i]! * g[i]!
    gOne += g[i]! * one[i]!
    gY += g[i]! * y[i]!
    yy += y[i]! * y[i]!
  }
  const j = gg - (gOne * gOne) / oneOne
  const d = gY - (gOne * oneY) / oneOne
  if (!(j > 1e-9 * gg)) return null
  const rise = d / j
  const level = -0.5 * (yy - (oneY * oneY) / oneOne + logDet + Math.log(oneOne))
  return { d, j, rise, clean: (oneY - rise * gOne) / oneOne, level }
}

/**
 * The same fit with ragged growth in the covariance: the growth clock wanders with variance cv²·T per time since the onset, T the
 * time to a typical limit at the plain rate, seen through the slope of the rise. Whitened by a two-state filter.
 */
export function raggedFit(work: Work, tau: number, rise: number, lastMs: number, settings: GrowthSettings): Fit | null {
  const { bins, steps } = work
  const n = bins.length
  const span = Math.max(lastMs - tau, 1)
  const height = Math.max(rise, 1e-4)
  const life = Math.max(1, settings.typicalLnLimit / height)
  const q = settings.clockCv * settings.clockCv * life
  const y = new Float64Array(n)
  const one = new Float64Array(n)
  const g = new Float64Array(n)
  const columns = [work.y, work.one, work.g]
  const outs = [y, one, g]
  const z = [0, 0, 0]
  const w = [0, 0, 0]
  let zz = 1
  let zw = 0
  let ww = 0
  let before = 0
  let logDet = 0
  for (let i = 0; i < n; i++) {
    const { rho, size, white } = steps[i]!
    const t = (bins[i]!.tMs - tau) / span
    zz = rho * rho * zz + 1 - rho * rho
    zw *= rho
    if (t > before) {
      ww += q * (t - before)
      before = t
    }
    const h = height * work.slope[i]!
    const hz = size * zz + h * zw
    const hw = size * zw + h * ww
    const s = size * hz + h * hw + white
    const kz = hz / s
    const kw = hw / s
    zz -= kz * hz
    zw -= kz * hw
    ww -= kw * hw
    logDet += Math.log(s)
    const scale = 1 / Math.sqrt(s)
    for (let c = 0; c < 3; c++) {
      z[c]! *= rho
      const e = columns[c]![i]! - size * z[c]! - h * w[c]!
      z[c]! += kz * e
      w[c]! += kw * e
      outs[c]![i] = e * scale
    }
  }
  return leastSquares(one, g, y, logDet)
}
