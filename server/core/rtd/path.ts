import { MonitorError } from '../errors.ts'
import { type Rtd, residual, washoutVolumes } from './rtd.ts'

/** One vessel on a path. Any unit of volume does, as long as the path keeps to one. */
export interface PathStep {
  readonly rtd: Rtd
  readonly volume: number
}

const bins = 1024

/** Mass of one vessel's residence volume in each bin of width h. */
function masses({ rtd, volume }: PathStep, h: number): Float64Array {
  const out = new Float64Array(bins)
  let before = 1
  for (let i = 0; i < bins; i++) {
    const after = residual(rtd, ((i + 1) * h) / volume)
    out[i] = Math.max(0, before - after)
    before = after
  }
  return out
}

function convolve(a: Float64Array, b: Float64Array): Float64Array {
  const out = new Float64Array(bins)
  for (let i = 0; i < bins; i++) {
    const ai = a[i] ?? 0
    if (ai === 0) continue
    for (let j = 0; i + j < bins; j++) out[i + j]! += ai * b[j]!
  }
  return out
}

/**
 * Volume passed through vessels in series until the share r of what entered (or lay) upstream is still to leave the last one.
 * The residence volumes add, so their densities are convolved, on 1024 bins up to Σ V_k θ_k(r/K): by the union bound no more than r lies
 * beyond that. Bin middles keep the mean; the error is of the order of a bin, 0.1 % of that bound. One vessel: exact.
 * Source: O. Levenspiel, Chemical Reaction Engineering, ch. 11 (convolution). Errors: RTD_RANGE for an empty path, volumes ≤ 0, r outside (0, 1).
 */
export function pathVolume(path: readonly PathStep[], r: number): number {
  const used = path.filter((s) => s.volume > 0)
  const [first] = used
  if (first === undefined || used.length !== path.length)
    throw new MonitorError('RTD_RANGE', 'a path needs vessels with volume > 0')
  if (used.length === 1) return first.volume * washoutVolumes(first.rtd, r)
  const share = r < 0.5 ? r / used.length : (r - 0.5 < 0.25 ? r / 2 : 0.5) / used.length
  const h = used.reduce((sum, s) => sum + s.volume * washoutVolumes(s.rtd, share), 0) / bins
  const density = used.map((s) => masses(s, h)).reduce(convolve)
  let left = 1
  for (let i = 0; i < bins; i++) {
    const next = left - (density[i] ?? 0)
    // bin i of the sum is centred at (i + K/2) h; its mass is spread over one bin
    if (next <= r) return (i + (used.length - 1) / 2 + (left - r) / (left - next)) * h
    left = next
  }
  return bins * h
}
