import { MonitorError } from '../errors.ts'
import { lithiumSalt } from './lithium-salts.ts'

/** H2O, CODATA atomic weights. */
const WATER_KG_MOL = 0.018015
const GAS_M3_MOL = (8.314462618 * 298.15) / 101325

/**
 * What the water in a feed turns into, per m3 of that feed (mmol/L, g/L and mL/L are the same numbers in mol/m3, kg/m3, 1e-3
 * m3/m3).
 */
export interface WaterProducts {
  readonly waterMolM3: number
  readonly liohKgM3: number
  readonly liohM3M3: number
  /** Reagent used up, mol/m3 of feed: one per water; two if LiOH goes on to Li2O (worst case). */
  readonly reagentLostMolM3: number
  readonly reagentLostWorstMolM3: number
  /** The hydrocarbon RH as gas at 25 °C and 1 atm, if it is one that boils off (butane; hexane stays dissolved). */
  readonly gasM3M3: number
}

/**
 * H2O + RLi → RH + LiOH, all water reacting:
 *   n = x ρ/M(H2O)    m(LiOH) = n M(LiOH)    V = m/ρ(LiOH)
 * waterPpm x: mass of water per mass of feed, 1e-6. rhoKgM3 ρ: the feed. M(H2O) 18.015, M(LiOH) 23.948 g/mol, ρ(LiOH) 1460 kg/m3
 * (crystal; a loose deposit fills two to three times as much). Errors: FLUID_RANGE for a negative or non-finite content or
 * density.
 */
export function waterProducts(waterPpm: number, rhoKgM3: number): WaterProducts {
  if (!(waterPpm >= 0 && waterPpm <= 1e6 && rhoKgM3 > 0))
    throw new MonitorError(
      'FLUID_RANGE',
      `water must be 0 to 1e6 ppm in a feed of positive density, got ${waterPpm} ppm and ${rhoKgM3} kg/m3`,
    )
  const lioh = lithiumSalt('LiOH')
  const waterMolM3 = (waterPpm * 1e-6 * rhoKgM3) / WATER_KG_MOL
  const liohKgM3 = waterMolM3 * lioh.molarMassKgMol
  return {
    waterMolM3,
    liohKgM3,
    liohM3M3: liohKgM3 / lioh.densityKgM3,
    reagentLostMolM3: waterMolM3,
    reagentLostWorstMolM3: 2 * waterMolM3,
    gasM3M3: waterMolM3 * GAS_M3_MOL,
  }
}

/**
 * Share of a reagent stream's moles that the water takes: n_water Q_feed/(c Q_reagent) [-]; at the same flow, n/c. Errors:
 * FLUID_RANGE unless concentration and reagent flow are above 0.
 */
export function reagentShareLost(waterMolM3: number, feedM3S: number, reagentMolM3: number, reagentM3S: number): number {
  if (!(reagentMolM3 > 0 && reagentM3S > 0))
    throw new MonitorError(
      'FLUID_RANGE',
      `a reagent stream needs concentration and flow above 0, got ${reagentMolM3} mol/m3 and ${reagentM3S} m3/s`,
    )
  return (waterMolM3 * feedM3S) / (reagentMolM3 * reagentM3S)
}

/**
 * Solid LiOH made per second by the wet streams that meet, m3/s: Σ V_i Q_i. Streams without a water figure do not count; null
 * when none has one.
 */
export function liohRateM3S(
  streams: readonly { readonly waterPpm: number | null; readonly rhoKgM3: number; readonly flowM3S: number }[],
): number | null {
  let rate: number | null = null
  for (const s of streams) {
    if (s.waterPpm === null) continue
    rate = (rate ?? 0) + waterProducts(s.waterPpm, s.rhoKgM3).liohM3M3 * s.flowM3S
  }
  return rate
}
