/**
 * Where along the flow the heat sits: the centre of the excess over the thermocouples, in thermocouple spacings from the first,
 *
 *   Σ j · max(0, e_j) / Σ max(0, e_j)      e_j excess over the coolant, K
 *
 * Null with fewer than two thermocouples or less than 1 K of excess in all. Downstream of usual: slower mixing, colder or weaker feed; upstream:
 * lower flow or hotter feed; lower and flat: reagent lost; outlet above the profile: reaction not finished. Common practice.
 */
export function heatCentre(excessK: readonly (number | null)[]): number | null {
  let sum = 0
  let moment = 0
  let n = 0
  for (let j = 0; j < excessK.length; j++) {
    const e = excessK[j] ?? null
    if (e === null) continue
    n++
    if (e > 0) {
      sum += e
      moment += j * e
    }
  }
  return n < 2 || sum < 1 ? null : moment / sum
}

export interface TimeToLimit {
  /** At the rate found; null where that is not rising. */
  readonly s: number | null
  /** At two standard errors more and less; null where the slower one never gets there. */
  readonly soonestS: number | null
  readonly latestS: number | null
}

/**
 * Time to a limit at the present rate of rise, s: (T_lim − T) / (dT/dt), with the range that the rate's standard error leaves (2 s.e.). 0 where the
 * limit is passed. For an accelerating excursion it is too long: an upper bound, not a promise. Units: °C, K/s.
 */
export function timeToLimit(tempC: number, limitC: number, ratePerS: number, sePerS: number): TimeToLimit {
  if (tempC >= limitC) return { s: 0, soonestS: 0, latestS: 0 }
  const at = (rate: number) => (rate > 0 ? (limitC - tempC) / rate : null)
  return { s: at(ratePerS), soonestS: at(ratePerS + 2 * sePerS), latestS: at(ratePerS - 2 * sePerS) }
}
