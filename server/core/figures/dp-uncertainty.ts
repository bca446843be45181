import type { SegmentSpec, Skid } from '../skid.ts'
import { units, valueUnit } from '../units.ts'

export interface DpUncertainty {
  /** Standard uncertainty of the segment's ΔP from its instruments, Pa; null where a range is not known. */
  readonly uPa: number | null
  readonly tags: readonly string[]
  readonly assumed: readonly string[]
  readonly missing: readonly string[]
}

/**
 * Uncertainty of a ΔP from the accuracy of its taps, u = √Σ (accuracy · span)² [Pa], accuracy as a share of span (two 0.25 % gauges of
 * 25 bar give ±0.09 bar). A held outlet adds nothing here, though its regulator drifts.
 */
export function dpUncertainty(skid: Skid, spec: SegmentSpec): DpUncertainty {
  const { dp } = spec
  const names = dp.kind === 'taps' ? [dp.pressureIn, dp.pressureOut] : dp.kind === 'dp' ? [dp.dpTag] : [dp.pressureIn]
  const missing: string[] = []
  const assumed: string[] = []
  let sum = 0
  for (const name of names) {
    const tag = skid.tags.find((t) => t.tag === name)
    const unit = tag === undefined ? null : valueUnit(tag)
    if (tag === undefined || tag.range === null || unit === null) {
      missing.push(`uncertainty of the pressure drop: needs range and unit of ${name}`)
      continue
    }
    if (tag.accuracyAssumed) assumed.push(`${name}: accuracy ${tag.accuracyPct} % of span assumed`)
    sum += ((tag.accuracyPct / 100) * (tag.range[1] - tag.range[0]) * units[unit].factor) ** 2
  }
  return { uPa: missing.length > 0 ? null : Math.sqrt(sum), tags: names, assumed, missing }
}
