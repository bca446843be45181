import { MonitorError } from '../errors.ts'
import type { FluidSpec } from '../skid.ts'
import { kFromC } from '../units.ts'
import { extended, isInside } from './correlation.ts'
import { mixByMass } from './mixture.ts'
import { type SolventEntry, solventNamed, solvents } from './solvents.ts'
import { FAR_K, type Fluid, refuseFar } from './state.ts'
import { tableFluid } from './table-fluid.ts'

export { mixByMass } from './mixture.ts'
export type { Fluid, FluidState } from './state.ts'

/** A pure solvent as a Fluid. Errors: `at` throws FLUID_RANGE more than FAR_K outside the published range. */
export function pureFluid(s: SolventEntry): Fluid {
  const lowK = Math.max(s.viscosity.lowK, s.density.lowK)
  const highK = Math.min(s.viscosity.highK, s.density.highK)
  const freezingK = kFromC(s.freezingC)
  const limitK = [lowK - FAR_K, Math.min(highK + FAR_K, Math.max(highK, s.density.highK))] as const
  return {
    name: s.name,
    rangeK: [Math.max(lowK, freezingK), highK],
    limitK,
    freezingK,
    boilingK: kFromC(s.boilingC),
    waterMiscible: s.waterMiscible,
    molarMassKgMol: s.molarMassKgMol,
    waterFraction: s.name === 'water' ? 1 : 0,
    mixesBadly: false,
    viscosityErrorPct: s.viscosityErrorPct,
    source: s.source,
    assumed: [],
    at(tempK) {
      refuseFar(s.name, tempK, limitK)
      return {
        rhoKgM3: extended(s.density, tempK, 'linear'),
        viscPaS: extended(s.viscosity, tempK, 'arrhenius'),
        cpJKgK: extended(s.heatCapacity, tempK, 'hold'),
        condWMK: extended(s.conductivity, tempK, 'hold'),
        uncertain:
          tempK < freezingK ||
          !(
            isInside(s.viscosity, tempK) &&
            isInside(s.density, tempK) &&
            isInside(s.heatCapacity, tempK) &&
            isInside(s.conductivity, tempK)
          ),
      }
    },
  }
}

/**
 * The liquid a skid file describes. Errors: FLUID_UNKNOWN for a name that is no solvent, FLUID_RANGE for a table or a mixture
 * that makes no sense.
 */
export function fluidOf(spec: FluidSpec): Fluid {
  if (spec.kind === 'table') return tableFluid(spec.densityKgM3, spec.viscosityMPaS)
  if (spec.kind === 'mixture')
    return mixByMass(spec.parts.map((p) => ({ fluid: pureNamed(p.solvent), massFraction: p.massFraction })))
  return pureNamed(spec.solvent)
}

function pureNamed(name: string): Fluid {
  const entry = solventNamed(name)
  if (entry !== null) return pureFluid(entry)
  throw new MonitorError('FLUID_UNKNOWN', `unknown solvent '${name}'`, { hint: `one of ${solvents.map((s) => s.name).join(', ')}` })
}
