import type { StreamSpec } from '../skid.ts'
import { fluidOf } from './fluid.ts'

/** Feeds are taken to be metered at room temperature, K: their density there turns volume into mass. */
export const feedTempK = 293.15

/** Moles of its reagent in a kilogram of a feed, mol/kg, from its concentration before mixing, mol/L; null where reagent or fluid is not known. */
export const molPerKg = (s: StreamSpec): number | null =>
  s.reagent === null || s.fluid === null ? null : (1000 * s.reagent.concentrationMolL) / fluidOf(s.fluid).at(feedTempK).rhoKgM3
