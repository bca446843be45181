import type { SegmentState } from '../../server/wire/index.ts'

/**
 * Share of the bore's radius that a uniform deposit takes at a resistance ratio r [-]: δ/a = 1 − r^(−1/4), laminar flow, round bore.
 * Below r = 1 there is no deposit: 0. Null where the ratio is not known.
 */
export function depositShare(ratio: number | null | undefined): number | null {
  if (ratio === null || ratio === undefined || !(ratio > 0)) return null
  return Math.max(0, 1 - ratio ** -0.25)
}

/** Short of a plug the drawing always leaves a gap this far from the middle. */
const leastOpen = 0.97

/** Share of the half height that the drawing fills: the deposit times the exaggeration, never past the middle. Nothing below 2 % over clean. */
export function drawnShare(ratio: number | null | undefined, times: number): number | null {
  const share = depositShare(ratio)
  if (share === null) return null
  return (ratio ?? 0) < 1.02 ? 0 : Math.min(leastOpen, times * share)
}

/** The largest of 5 to 2 times at which the deposit at the lowest limit (as a ratio) still leaves a gap that is easily seen. */
export function exaggerationFor(limitRatios: readonly number[]): number {
  const shares = limitRatios.map((r) => depositShare(r)).filter((s) => s !== null)
  const most = shares.length === 0 ? 0 : Math.min(...shares)
  return [5, 4, 3].find((k) => k * most <= 0.9) ?? 2
}

/** Share of the clean diameter still open, per cent. */
export const openPct = (ratio: number | null | undefined): number | null => {
  const share = depositShare(ratio)
  return share === null ? null : 100 * (1 - share)
}

/** Ratio at which ΔP meets its limit at the flow and temperature now; null without a limit or a clean ΔP. */
export function limitRatioOf(s: SegmentState): number | null {
  const clean = s.cleanDpBar ?? s.baseline?.dpBar ?? null
  const limit = s.limits.dpHighBar
  return limit === null || clean === null || !(clean > 0) ? null : limit / clean
}

/** How many times its thickness deposit is drawn on a skid as it stands; one scale for the line and its strips through time. */
export const timesOf = (segments: readonly SegmentState[]): number =>
  exaggerationFor(segments.map(limitRatioOf).filter((r) => r !== null))
