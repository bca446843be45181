import { MonitorError } from '../errors.ts'
import type { WaterMiscibility } from './solvents.ts'
import { type Fluid, type FluidState, mixesBadly } from './state.ts'

/**
 * Properties of liquids that meet, mass fractions w_i (need not add up to 1, they are normalised):
 *   ln μ = Σ w_i ln μ_i     1/ρ = Σ w_i/ρ_i     cp = Σ w_i cp_i     λ = (Σ w_i λ_i^-2)^-1/2
 * Errors of the rules: viscosity 5 to 10 % for mixtures of ethers, hydrocarbons, esters and halocarbons (logarithmic rule on
 * mass, after Arrhenius), a factor up to 3 where water meets alcohol, ether or amide, so such a mixture is marked uncertain by
 * mixByMass; density (ideal volumes) under 1 %, 4 % with water; heat capacity 5 %; conductivity (Vredeveld's power -2; Poling,
 * Prausnitz and O'Connell, The Properties of Gases and Liquids, 5th ed., chapter 10) 5 %. Figures of error from memory.
 * Errors: FLUID_RANGE without a positive fraction.
 */
export function mixState(states: readonly FluidState[], massFractions: readonly number[]): FluidState {
  let sum = 0
  let volume = 0
  let lnVisc = 0
  let cp = 0
  let resist = 0
  let uncertain = false
  for (let i = 0; i < states.length; i++) {
    const w = massFractions[i] ?? 0
    if (!(w > 0)) continue
    const s = states[i]!
    sum += w
    volume += w / s.rhoKgM3
    lnVisc += w * Math.log(s.viscPaS)
    cp += w * s.cpJKgK
    resist += w / (s.condWMK * s.condWMK)
    uncertain ||= s.uncertain
  }
  if (!(sum > 0)) throw new MonitorError('FLUID_RANGE', 'a mixture needs at least one part with a mass fraction above 0')
  return { rhoKgM3: sum / volume, viscPaS: Math.exp(lnVisc / sum), cpJKgK: cp / sum, condWMK: Math.sqrt(sum / resist), uncertain }
}

const order: readonly WaterMiscibility[] = ['full', 'partial', 'none']

/**
 * A mixture as a Fluid, by `mixState`. Range: where every part is inside its own (so a part below its freezing point makes it
 * uncertain). Freezing: the highest of the parts, an upper bound for a simple eutectic; boiling: the lowest; miscibility with
 * water: the worst of the parts above 5 %.
 * Errors: FLUID_RANGE for no parts, a negative fraction or a sum that is not 1 within 0.02.
 */
export function mixByMass(parts: readonly { readonly fluid: Fluid; readonly massFraction: number }[]): Fluid {
  const sum = parts.reduce((a, p) => a + p.massFraction, 0)
  if (!parts.every((p) => p.massFraction >= 0) || !(Math.abs(sum - 1) <= 0.02))
    throw new MonitorError(
      'FLUID_RANGE',
      `mass fractions must be 0 or more and add up to 1, got ${parts.map((p) => p.massFraction).join(', ')}`,
    )
  const used = parts.filter((p) => p.massFraction > 0).map((p) => ({ fluid: p.fluid, w: p.massFraction / sum }))
  const only = used[0]
  if (used.length === 1 && only !== undefined) return only.fluid
  const fluids = used.map((u) => u.fluid)
  const fractions = used.map((u) => u.w)
  const known = (values: readonly (number | null)[], pick: (...v: number[]) => number): number | null =>
    values.every((v) => v !== null) ? pick(...(values as readonly number[])) : null
  const main = used.filter((u) => u.w > 0.05).map((u) => order.indexOf(u.fluid.waterMiscible))
  const waterFraction = used.reduce((a, u) => a + u.w * u.fluid.waterFraction, 0)
  const aqueous = mixesBadly(waterFraction)
  const molarInverse = used.map((u) => (u.fluid.molarMassKgMol === null ? null : u.w / u.fluid.molarMassKgMol))
  const molar = known(molarInverse, (...v) => v.reduce((a, b) => a + b, 0))
  return {
    name: used.map((u) => `${u.fluid.name} ${(u.w * 100).toFixed(0)} %`).join(' + '),
    rangeK: [Math.max(...fluids.map((f) => f.rangeK[0])), Math.min(...fluids.map((f) => f.rangeK[1]))],
    limitK: [Math.max(...fluids.map((f) => f.limitK[0])), Math.min(...fluids.map((f) => f.limitK[1]))],
    freezingK: known(
      fluids.map((f) => f.freezingK),
      Math.max,
    ),
    boilingK: known(
      fluids.map((f) => f.boilingK),
      Math.min,
    ),
    waterMiscible: order[Math.max(0, ...main)]!,
    molarMassKgMol: molar === null ? null : 1 / molar,
    waterFraction,
    mixesBadly: aqueous,
    viscosityErrorPct: aqueous ? 200 : Math.max(10, ...fluids.map((f) => f.viscosityErrorPct)),
    source: [...new Set(fluids.map((f) => f.source))].join('; '),
    assumed: [...new Set(fluids.flatMap((f) => f.assumed))],
    at(tempK) {
      const state = mixState(
        fluids.map((f) => f.at(tempK)),
        fractions,
      )
      return aqueous && !state.uncertain ? { ...state, uncertain: true } : state
    },
  }
}
