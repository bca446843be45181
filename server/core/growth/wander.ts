import type { Bin, Noise } from './points.ts'

/** Kalman whitening of bins under wander + white: one normalised wander state z, seen as size·z. */
export interface WanderStep {
  /** correlation of z with the bin before [-], 0 for the first */
  readonly rho: number
  /** sd of the bin's mean of the wander [-] */
  readonly size: number
  /** variance of the bin's white noise [-] */
  readonly white: number
}

/**
 * The noise of each bin mean. Mean of an Ornstein–Uhlenbeck wander (sd σ, time constant τ) over a bin of width x·τ has variance
 * σ²·2(x − 1 + e^−x)/x²; two bins d apart covary by σ² e^(−d/τ) sinhc(x₁/2) sinhc(x₂/2) (integrals of the OU covariance,
 * common practice). Exact between neighbours, first-order Markov beyond, which is exact for bins narrow against τ.
 */
export function wanderSteps(bins: readonly Bin[], noise: Noise): WanderStep[] {
  const tauMs = Math.max(noise.wanderTauS, 1e-3) * 1000
  const floor = 1e-10
  const steps: WanderStep[] = []
  for (let i = 0; i < bins.length; i++) {
    const bin = bins[i]!
    const x = bin.widthMs / tauMs
    const v = x < 1e-3 ? 1 - x / 3 : (2 * (x - 1 + Math.exp(-x))) / (x * x)
    let rho = 0
    if (i > 0) {
      const before = bins[i - 1]!
      const y = before.widthMs / tauMs
      const vy = y < 1e-3 ? 1 - y / 3 : (2 * (y - 1 + Math.exp(-y))) / (y * y)
      const d = Math.max((bin.tMs - before.tMs) / tauMs, (x + y) / 2)
      rho = Math.min(0.999999, expSinhc(d, x, y) / Math.sqrt(v * vy))
    }
    steps.push({ rho, size: noise.wanderSd * Math.sqrt(v), white: (noise.whiteSd * noise.whiteSd) / bin.count + floor })
  }
  return steps
}

/** e^−d sinhc(x/2) sinhc(y/2) without overflow for wide bins, d ≥ (x + y)/2. */
function expSinhc(d: number, x: number, y: number): number {
  const half = (u: number) => (u < 1e-3 ? Math.exp(u / 2) : (Math.exp(u) - 1) / u)
  if (x < 30 && y < 30) return Math.exp(-d - (x + y) / 2) * half(x) * half(y)
  return Math.exp(-(d - (x + y) / 2)) * (x < 1e-3 ? 1 : (1 - Math.exp(-x)) / x) * (y < 1e-3 ? 1 : (1 - Math.exp(-y)) / y)
}

/** Gains of the whitening filter; apply with `whiten`. */
export interface Whitener {
  readonly rho: Float64Array
  readonly size: Float64Array
  readonly gain: Float64Array
  readonly scale: Float64Array
}

export function whitener(steps: readonly WanderStep[]): Whitener {
  const n = steps.length
  const rho = new Float64Array(n)
  const size = new Float64Array(n)
  const gain = new Float64Array(n)
  const scale = new Float64Array(n)
  let p = 1
  for (let i = 0; i < n; i++) {
    const step = steps[i]!
    p = i === 0 ? 1 : step.rho * step.rho * p + 1 - step.rho * step.rho
    const s = step.size * step.size * p + step.white
    const k = (p * step.size) / s
    p -= k * step.size * p
    rho[i] = step.rho
    size[i] = step.size
    gain[i] = k
    scale[i] = 1 / Math.sqrt(s)
  }
  return { rho, size, gain, scale }
}

/** Innovations over their sd of a column seen through the filter: independent, unit variance if the column is such noise. */
export function whiten(w: Whitener, column: ArrayLike<number>): Float64Array {
  const out = new Float64Array(column.length)
  let z = 0
  for (let i = 0; i < out.length; i++) {
    z *= w.rho[i]!
    const e = column[i]! - w.size[i]! * z
    z += w.gain[i]! * e
    out[i] = e * w.scale[i]!
  }
  return out
}
