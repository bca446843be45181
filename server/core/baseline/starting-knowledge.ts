/** What an accepted step test hands to a run before its first reading, for one segment. Null where the test did not accept it. */
export interface StartingKnowledge {
  readonly segment: string
  /** What its ΔP reads with the pumps at rest, less the head of the liquid, Pa. */
  readonly zeroPa: number | null
  /** How far the exponent of flow lies above that of the hydraulics, with its sd. */
  readonly flowExponent: { readonly over: number; readonly sd: number } | null
}
