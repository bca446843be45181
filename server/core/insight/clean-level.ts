import { dpUncertainty } from '../figures/dp-uncertainty.ts'
import type { Operation, SegmentOperation } from '../figures/operation.ts'
import type { LearnedLevel } from '../fluids/learned-factor.ts'
import { mixedTable, propertyTable } from '../fluids/property-table.ts'
import { cleanDpAlong, exponents } from '../hydraulics/clean-dp.ts'
import type { Skid } from '../skid.ts'

/** Between laminar and turbulent no formula is better than this. */
const TRANSITION_SD = 0.2
/** A coolant difference below this carries no course along a precooler, K. */
const LEAST_DIFFERENCE = 0.1

/**
 * Temperatures along a segment, inlet first, K: those read, or for a precooler with its outlet alone the course of a tube of constant U from the
 * feed's temperature, T_c + (T_in − T_c) q^x with q = (T_out − T_c)/(T_in − T_c), at five even places. Null where nothing is read.
 */
export function profileAlong(op: SegmentOperation): readonly number[] | null {
  const [only] = op.readK
  if (only === undefined) return null
  const inK = op.streams[0]?.tempK
  if (op.readK.length > 1 || op.spec.kind !== 'precooler' || op.coolantK === null || inK === undefined) return op.readK
  const whole = inK - op.coolantK
  if (Math.abs(whole) < LEAST_DIFFERENCE) return op.readK
  const q = Math.min(1, Math.max(LEAST_DIFFERENCE / Math.abs(whole), (only - op.coolantK) / whole))
  const coolantK = op.coolantK
  return [0, 0.25, 0.5, 0.75, 1].map((x) => coolantK + whole * q ** x)
}

/**
 * How far a segment's clean ΔP lies from what its bore and the solvents of its streams would show: the level that viscosity factors are
 * learnt from. dpPa: of the baseline, without head and zero; sigma: of its ratio. Sd: sigma, the taps' own uncertainty u/ΔP, and 0.2 between
 * laminar and turbulent. Null where channel, liquid, flow or temperature is missing. Errors: FLUID_* from a stream's liquid.
 */
export function cleanLevel(
  skid: Skid,
  operation: Operation,
  segment: number,
  baseline: { readonly dpPa: number; readonly sigma: number },
): LearnedLevel | null {
  const op = operation.segments[segment]
  if (op === undefined || op.channel === null || op.fluid === null || op.massFlowKgS === null || op.massFlowKgS <= 0) return null
  const profile = profileAlong(op)
  const total = op.massFlowKgS
  const parts = op.streams.flatMap((s) => (s.fluid === null || s.massFlowKgS === null ? [] : [s.fluid]))
  if (profile === null || parts.length < op.streams.length || !(baseline.dpPa > 0)) return null
  const fractions = op.streams.map((s) => (s.massFlowKgS ?? 0) / total)
  const table = mixedTable(
    parts.map((fluid) => propertyTable(fluid)),
    fractions,
  )
  const clean = cleanDpAlong(op.channel, total, profile, table)
  if (clean === null || !(clean.frictionPa > 0)) return null
  const state = op.fluid.at(op.tempK)
  const { k } = exponents(op.channel, total, state.rhoKgM3, state.viscPaS)
  const { uPa } = dpUncertainty(skid, op.spec)
  return {
    lnLevel: Math.log(baseline.dpPa / (clean.frictionPa + clean.bendPa)),
    sd: Math.hypot(baseline.sigma, (uPa ?? 0) / baseline.dpPa, clean.uncertain ? TRANSITION_SD : 0),
    exponents: operation.streams.map((s) => {
      const at = op.streams.indexOf(s)
      return at < 0 ? 0 : k * (fractions[at] ?? 0)
    }),
  }
}
