import { MonitorError } from '../errors.ts'

/**
 * Adiabatic temperature rise ΔT_ad = (−ΔH) c / (ρ cp) [K].
 * ΔH reaction enthalpy [J/mol], negative for heat given off; c limiting reactant after mixing [mol/m³]; ρ [kg/m³]; cp [J/(kg K)].
 * Source: energy balance. Errors: THERMAL_RANGE unless ρ, cp > 0 and c ≥ 0.
 */
export function adiabaticRise(enthalpyJMol: number, concMolM3: number, rhoKgM3: number, cpJKgK: number): number {
  if (!(rhoKgM3 > 0 && cpJKgK > 0 && concMolM3 >= 0))
    throw new MonitorError('THERMAL_RANGE', 'adiabatic rise needs density, heat capacity > 0 and concentration ≥ 0')
  return (-enthalpyJMol * concMolM3) / (rhoKgM3 * cpJKgK)
}

export interface FeedHeat {
  readonly massFlowKgS: number
  readonly cpJKgK: number
  readonly tempK: number
}

/** Temperature of feeds after adiabatic mixing, Σ m cp T / Σ m cp [K]; heat of mixing left out. Errors: THERMAL_RANGE without flow. */
export function mixTemperature(feeds: readonly FeedHeat[]): number {
  let capacity = 0
  let heat = 0
  for (const f of feeds) {
    capacity += f.massFlowKgS * f.cpJKgK
    heat += f.massFlowKgS * f.cpJKgK * f.tempK
  }
  if (!(capacity > 0)) throw new MonitorError('THERMAL_RANGE', 'mixing temperature needs a feed that flows')
  return heat / capacity
}

/** Adiabatic rise of mixed feeds [K]: heat released [W] over Σ m cp [W/K]; n limiting reactant [mol/s], ΔH [J/mol]. */
export function adiabaticRiseOfFeeds(molS: number, enthalpyJMol: number, feeds: readonly FeedHeat[]): number {
  const capacity = feeds.reduce((sum, f) => sum + f.massFlowKgS * f.cpJKgK, 0)
  if (!(capacity > 0)) throw new MonitorError('THERMAL_RANGE', 'adiabatic rise needs a feed that flows')
  return (-enthalpyJMol * molS) / capacity
}

/**
 * Maximum temperature of the synthesis reaction MTSR = T_p + X_acc ΔT_ad [K], X_acc the share not yet reacted (0 … 1).
 * A flowing tube accumulates little; with flow or cooling lost its inventory is a small batch and the inlet, where X_acc is near 1, decides.
 * Source: F. Stoessel, Thermal Safety of Chemical Processes. Errors: THERMAL_RANGE for an accumulation outside 0 … 1.
 */
export function mtsr(processK: number, accumulation: number, adiabaticRiseK: number): number {
  if (!(accumulation >= 0 && accumulation <= 1))
    throw new MonitorError('THERMAL_RANGE', `accumulation must lie in 0 … 1, got ${accumulation}`)
  return processK + accumulation * Math.max(0, adiabaticRiseK)
}

/** MTSR of a stopped tube: the worst T(z) + (1 − X(z)) ΔT_ad over a profile of temperature [K] and conversion [-]. */
export function mtsrStoppedFlow(
  profile: readonly { readonly tempK: number; readonly conversion: number }[],
  adiabaticRiseK: number,
): number {
  return profile.reduce(
    (worst, p) => Math.max(worst, mtsr(p.tempK, Math.min(1, Math.max(0, 1 - p.conversion)), adiabaticRiseK)),
    Number.NEGATIVE_INFINITY,
  )
}
