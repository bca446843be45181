import type { Given } from '../figures/operation.ts'
import type { Rtd } from '../rtd/rtd.ts'
import type { Skid } from '../skid.ts'

export interface FlushSettings {
  /** Share of the reactive inventory that may be left when F1 ends. */
  readonly residualFraction: number
  /** Share of dissolved salt that may be left when F3 ends. */
  readonly washFraction: number
  /** Effluent water at the end of F4, ppm by mass, and what the dry solvent itself may hold. */
  readonly waterPpmLimit: number
  readonly drySolventPpm: number
  /** Share of the old material in the product when F6 ends (ε of the outlet window). */
  readonly restartFraction: number
  /** Every wetted place above this before water, °C, and for how long. */
  readonly warmC: number
  readonly warmHoldMinutes: number
  /** Used where a segment gives no `warmUpKPerMin`; cooling is taken at the same rate. */
  readonly warmUpKPerMin: number
  /** Predicted ΔP stays within this share of `dpHighBar`. */
  readonly dpShare: number
  /** Water starts at this share of its flow. */
  readonly waterStartShare: number
  /** Water for the deposit over the least that could dissolve it. */
  readonly dissolveMargin: number
  readonly soakMinutes: number
  /** For a person to check and confirm one step, and for one Karl Fischer result. */
  readonly confirmMinutes: number
  readonly karlFischerMinutes: number
  /** Dry solvents by name; null: chosen from the skid's own. */
  readonly displacementSolvent: string | null
  readonly dryingSolvent: string | null
  /** Measured residence-time models by segment, in place of the chosen ones. */
  readonly rtd: Readonly<Record<string, Rtd>>
}

/** Defaults are common practice (common practice), under change control; each is shown with the plan. */
export const flushDefaults: FlushSettings = {
  residualFraction: 1e-3,
  washFraction: 1e-3,
  waterPpmLimit: 100,
  drySolventPpm: 50,
  restartFraction: 0.005,
  warmC: 5,
  warmHoldMinutes: 5,
  warmUpKPerMin: 2,
  dpShare: 0.6,
  waterStartShare: 0.15,
  dissolveMargin: 2,
  soakMinutes: 0,
  confirmMinutes: 1,
  karlFischerMinutes: 4,
  displacementSolvent: null,
  dryingSolvent: null,
  rtd: {},
}

export interface FlushInput {
  readonly skid: Skid
  /** Segments to be flushed. */
  readonly segments: readonly string[]
  /** Present resistance over clean by segment. */
  readonly ratios?: Readonly<Record<string, number | null>>
  /** Present flows (by stream) and temperatures (by tag) in the unit of the tag. */
  readonly given?: Given
  readonly settings?: Partial<FlushSettings>
}
