/** Deposit is drawn this many times its thickness; the drawing states it. */
export const exaggeration = 5

/**
 * Share of the bore's radius that a uniform deposit takes at a resistance ratio r [-]: δ/a = 1 − r^(−1/4), laminar flow, round bore.
 * Below r = 1 there is no deposit: 0. Null where the ratio is not known.
 */
export function depositShare(ratio: number | null | undefined): number | null {
  if (ratio === null || ratio === undefined || !(ratio > 0)) return null
  return Math.max(0, 1 - ratio ** -0.25)
}

/** Share of the half height that the drawing fills: the deposit times the exaggeration, never past the middle. Nothing below 2 % over clean. */
export function drawnShare(ratio: number | null | undefined): number | null {
  const share = depositShare(ratio)
  if (share === null) return null
  return (ratio ?? 0) < 1.02 ? 0 : Math.min(1, exaggeration * share)
}

/** Share of the clean diameter still open, per cent. */
export const openPct = (ratio: number | null | undefined): number | null => {
  const share = depositShare(ratio)
  return share === null ? null : 100 * (1 - share)
}
