import { MonitorError } from '../errors.ts'
import { type Fluid, pureFluid } from '../fluids/fluid.ts'
import { solventNamed } from '../fluids/solvents.ts'
import { cFromK } from '../units.ts'
import type { FlushSettings } from './input.ts'
import type { FlushPath } from './legs.ts'

/** Dry solvents that mix fully with water and leave cold organolithium alone for the minutes of F1 (common practice; acetonitrile, acetone, alcohols and amides react). */
const displacing = ['tetrahydrofuran', 'dimethoxyethane', '1,4-dioxane']
/** After the water nothing active is left: any fully miscible dry solvent that does not spoil the restart (common practice). */
const drying = ['tetrahydrofuran', 'dimethoxyethane', 'acetonitrile', '1,4-dioxane']

export interface FlushLiquids {
  readonly displacement: Fluid
  readonly drying: Fluid
  readonly water: Fluid
  readonly assumptions: readonly string[]
}

function pick(
  wanted: string | null,
  allowed: readonly string[],
  step: string,
  coldestK: number,
  onSkid: readonly string[],
): { readonly fluid: Fluid; readonly chosen: boolean } {
  if (wanted === null) {
    const name = [...allowed.filter((n) => onSkid.includes(n)), ...allowed].find(
      (n) => (solventNamed(n)?.freezingC ?? Number.POSITIVE_INFINITY) < cFromK(coldestK),
    )
    const entry = name === undefined ? null : solventNamed(name)
    if (entry === null)
      throw new MonitorError(
        'FLUSH_REFUSED',
        `no fully water-miscible dry solvent stays liquid at ${cFromK(coldestK).toFixed(0)} °C for ${step}`,
      )
    return { fluid: pureFluid(entry), chosen: true }
  }
  const entry = solventNamed(wanted)
  if (entry === null)
    throw new MonitorError('FLUSH_REFUSED', `unknown solvent '${wanted}' for ${step}`, { hint: `one of ${allowed.join(', ')}` })
  if (entry.waterMiscible !== 'full')
    throw new MonitorError('FLUSH_REFUSED', `${entry.name} does not mix fully with water, which ${step} needs`, {
      hint: `one of ${allowed.join(', ')}`,
    })
  if (!allowed.includes(entry.name))
    throw new MonitorError('FLUSH_REFUSED', `${entry.name} is not suited to ${step}: it reacts with the reagent or the restart`, {
      hint: `one of ${allowed.join(', ')}`,
    })
  if (entry.freezingC >= cFromK(coldestK))
    throw new MonitorError(
      'FLUSH_REFUSED',
      `${entry.name} freezes at ${entry.freezingC.toFixed(0)} °C, above the ${cFromK(coldestK).toFixed(0)} °C of the coldest place on the path`,
    )
  return { fluid: pureFluid(entry), chosen: false }
}

/**
 * The liquids of a flush: F1's last volume and F4 fully water-miscible and dry, liquid at the coldest place on the way; the skid's own solvents first.
 * Errors: FLUSH_REFUSED for a solvent that is not miscible, reacts, or would freeze.
 */
export function flushLiquids(path: FlushPath, settings: FlushSettings): FlushLiquids {
  const coldestK = Math.min(...path.legs.map((l) => l.op.coldestK))
  const onSkid = path.operation.streams.flatMap(({ spec }) =>
    spec.fluid?.kind === 'solvent'
      ? [solventNamed(spec.fluid.solvent)?.name ?? '']
      : spec.fluid?.kind === 'mixture'
        ? spec.fluid.parts.map((p) => solventNamed(p.solvent)?.name ?? '')
        : [],
  )
  const first = pick(settings.displacementSolvent, displacing, 'displacement (F1)', coldestK, onSkid)
  const last = pick(settings.dryingSolvent, drying, 'drying (F4)', coldestK, onSkid)
  const water = solventNamed('water')
  if (water === null) throw new MonitorError('FLUID_UNKNOWN', 'the solvent table has no water')
  const assumptions = [
    ...(first.chosen ? [`displacement solvent: dry ${first.fluid.name}`] : []),
    ...(last.chosen ? [`drying solvent: dry ${last.fluid.name} of at most ${settings.drySolventPpm} ppm water`] : []),
  ]
  return { displacement: first.fluid, drying: last.fluid, water: pureFluid(water), assumptions }
}

/**
 * Share of water by volume that may be left at the end of drying [-]: mass fraction w = (limit − solvent's own) of a mixture of water and solvent,
 * x = w ρ_s/(ρ_w (1 − w) + w ρ_s), ideal volumes. Errors: FLUSH_REFUSED unless the limit is above what the solvent brings.
 */
export function waterShareLeft(limitPpm: number, solventPpm: number, rhoWater: number, rhoSolvent: number): number {
  const w = (limitPpm - solventPpm) * 1e-6
  if (!(w > 0 && w < 1))
    throw new MonitorError('FLUSH_REFUSED', `drying to ${limitPpm} ppm needs a solvent below that, got ${solventPpm} ppm`)
  return (w * rhoSolvent) / (rhoWater * (1 - w) + w * rhoSolvent)
}
