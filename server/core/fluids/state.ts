import { MonitorError } from '../errors.ts'
import type { WaterMiscibility } from './solvents.ts'

/**
 * A liquid at one temperature. `uncertain`: some property is outside its published range, or the temperature below the freezing
 * point.
 */
export interface FluidState {
  readonly rhoKgM3: number
  readonly viscPaS: number
  readonly cpJKgK: number
  readonly condWMK: number
  readonly uncertain: boolean
}

export interface Fluid {
  readonly name: string
  /** Errors: FLUID_RANGE outside `limitK`. */
  at(tempK: number): FluidState
  /** Where viscosity and density are published and the liquid is above its freezing point; outside it the state is uncertain. */
  readonly rangeK: readonly [low: number, high: number]
  /** Where `at` answers at all: FAR_K beyond the published range. */
  readonly limitK: readonly [low: number, high: number]
  /** Of a mixture: the highest of its parts, an upper bound. Null: not known. */
  readonly freezingK: number | null
  /** Of a mixture: the lowest of its parts. Null: not known. */
  readonly boilingK: number | null
  readonly waterMiscible: WaterMiscibility
  readonly molarMassKgMol: number | null
  /** Mass fraction of water, 0 to 1. */
  readonly waterFraction: number
  /** Water with an organic liquid: the mixing rule does not hold and two phases may form, so every state is uncertain. */
  readonly mixesBadly: boolean
  /** Standing doubt about the viscosity, % (what published sources differ by, or the mixing rule). */
  readonly viscosityErrorPct: number
  readonly source: string
  /** Figures nobody gave and the tool assumed, in words; empty when there are none. */
  readonly assumed: readonly string[]
}

/**
 * The rule for "far outside": more than this beyond the published range of viscosity or density, or within 20 K of the critical
 * point, there is no answer. In between, viscosity goes on with the edge's slope of ln μ over 1/T, density straight, heat
 * capacity and conductivity at the edge's value. Project's choice.
 */
export const FAR_K = 60

/** From this mass fraction of the lesser side, water with an organic liquid is marked uncertain (mixing rule, phase split). */
const AQUEOUS_FROM = 0.02
export const mixesBadly = (waterFraction: number): boolean => waterFraction >= AQUEOUS_FROM && waterFraction <= 1 - AQUEOUS_FROM

/** Errors: FLUID_RANGE when the temperature is outside the limits or not a number. */
export function refuseFar(name: string, tempK: number, limitK: readonly [number, number]): void {
  if (tempK >= limitK[0] && tempK <= limitK[1]) return
  throw new MonitorError(
    'FLUID_RANGE',
    `${name} has no properties at ${(tempK - 273.15).toFixed(1)} °C: known from ${(limitK[0] - 273.15).toFixed(0)} to ${(limitK[1] - 273.15).toFixed(0)} °C, extrapolation included`,
  )
}
