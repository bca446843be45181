/**
 * Resistance of a round bore with a uniform film on the length fraction f: r = 1 − f + f (1 − δ)^−4, laminar.
 * δ  film thickness over bore radius [-], 0 ≤ δ < 1.  f  fraction of the length that carries film [-], 0 < f ≤ 1.  r  over clean [-].
 * Source: Hagen–Poiseuille, resistance ∝ radius^−4 at constant flow.
 */
export function ratioOfFilm(film: number, fraction: number): number {
  const bore = (1 - film) * (1 - film)
  return 1 - fraction + fraction / (bore * bore)
}

/** The film δ [-] that explains a ratio r ≥ 1; the inverse of ratioOfFilm. */
export const filmOfRatio = (ratio: number, fraction: number): number => 1 - ((ratio - 1 + fraction) / fraction) ** -0.25

/** Growth of the film over its life: (e^(Ks) − 1)/(e^K − 1), s for K = 0; s [-] from onset (0) to limit (1). */
export const growthShape = (k: number, s: number): number => (Math.abs(k) < 1e-6 ? s : Math.expm1(k * s) / Math.expm1(k))
