import { lithiumSalt } from '../deposit/lithium-salts.ts'
import { filmVolumeM3 } from '../deposit/run-length.ts'
import { thicknessOfRatio } from '../deposit/thickness.ts'
import type { SegmentOperation } from '../figures/operation.ts'
import { carriesOrganolithium } from '../figures/organolithium.ts'
import type { FlushInventory } from '../report.ts'
import { adiabaticRise } from '../thermal/reaction-heat.ts'
import type { FlushPath, Leg } from './legs.ts'

/** Heat of organolithium with water, upper end of −200 … −240 kJ/mol (from memory). */
const hydrolysisKJMol = 240

/** Streams that count as active: those that say organolithium; where none does, every one with a reagent, to be on the safe side. */
export function activeStreams(path: FlushPath): { readonly ids: readonly string[]; readonly assumption: string | null } {
  const named = path.operation.streams.filter((s) => carriesOrganolithium(s.spec)).map((s) => s.id)
  if (named.length > 0) return { ids: named, assumption: null }
  const withReagent = path.operation.streams.filter((s) => s.spec.reagent !== null).map((s) => s.id)
  return {
    ids: withReagent,
    assumption: withReagent.length === 0 ? null : 'no feed is named as an organolithium: every reagent counted as active',
  }
}

/** What a feed carries; the concentration in the feed is null where nothing tells it. */
export interface Carried {
  readonly stream: string
  readonly name: string
  readonly concMolL: number | null
}

/**
 * The reagents of the feeds: as the file gives them; a limiting feed without a reagent by its reaction's concentration; an organolithium feed without a
 * concentration as one mole for each mole of the limiting reagent it meets, which is stated.
 */
export function carriedBy(
  path: FlushPath,
  active: readonly string[],
): { readonly carried: readonly Carried[]; readonly assumptions: readonly string[] } {
  const assumptions: string[] = []
  const reactions = path.operation.segments.flatMap((s) =>
    s.spec.reaction === null ? [] : [{ streams: s.spec.streams, ...s.spec.reaction }],
  )
  const flow = (id: string): number | null => path.operation.streams.find((s) => s.id === id)?.volumeFlowM3S ?? null
  const carried = path.operation.streams.flatMap(({ id, spec }): Carried[] => {
    if (spec.reagent !== null) return [{ stream: id, name: spec.reagent.name, concMolL: spec.reagent.concentrationMolL }]
    const limiting = reactions.find((r) => r.limitingStream === id)
    if (limiting !== undefined) return [{ stream: id, name: spec.title, concMolL: limiting.concentrationMolL }]
    if (!active.includes(id)) return []
    const met = reactions.find((r) => r.streams.includes(id))
    const [own, other] = [flow(id), met === undefined ? null : flow(met.limitingStream)]
    if (met === undefined || own === null || own <= 0 || other === null) return [{ stream: id, name: spec.title, concMolL: null }]
    assumptions.push(`concentration of ${id} not given: one mole for each mole of ${met.limitingStream} counted`)
    return [{ stream: id, name: spec.title, concMolL: (met.concentrationMolL * other) / own }]
  })
  return { carried, assumptions }
}

/**
 * Reagents in a segment before the flush: n = V c Q_i/ΣQ [mol], as if nothing had reacted (worst case); heat if all active reagent met
 * water, n · 240 kJ/mol, with the adiabatic rise of the mixture, and if the segment's own reaction ran to its end, |ΔH| · n_limiting.
 */
export function inventoryOf(op: SegmentOperation, carried: readonly Carried[], active: readonly string[]): FlushInventory {
  const { volumeM3, volumeFlowM3S, spec } = op
  const inside = (stream: string, concMolL: number | null): number | null => {
    const q = op.streams.find((s) => s.id === stream)?.volumeFlowM3S ?? null
    if (concMolL === null || volumeM3 === null || q === null || volumeFlowM3S === null || volumeFlowM3S <= 0) return null
    return (volumeM3 * 1e3 * concMolL * q) / volumeFlowM3S
  }
  const reagents = carried
    .filter((c) => spec.streams.includes(c.stream))
    .map((c) => ({ stream: c.stream, name: c.name, mol: inside(c.stream, c.concMolL) }))
  const hot = reagents.filter((r) => active.includes(r.stream))
  const mol = hot.reduce<number | null>(
    (a, r) => (a === null || r.mol === null ? null : a + r.mol),
    reagents.length === 0 ? null : 0,
  )
  const state = op.fluid === null ? null : op.fluid.at(op.tempK)
  const limiting = spec.reaction === null ? null : inside(spec.reaction.limitingStream, spec.reaction.concentrationMolL)
  return {
    segment: spec.id,
    volumeMl: volumeM3 === null ? null : volumeM3 * 1e6,
    reagents,
    hydrolysisKJ: mol === null ? null : mol * hydrolysisKJMol,
    hydrolysisRiseK:
      mol === null || volumeM3 === null || state === null
        ? null
        : adiabaticRise(-hydrolysisKJMol * 1e3, mol / volumeM3, state.rhoKgM3, state.cpJKgK),
    reactionKJ: spec.reaction === null || limiting === null ? null : Math.abs(spec.reaction.enthalpyKJMol) * limiting,
  }
}

/** LiOH that a uniform film at the present ratio would be, kg; 0 at a clean ratio, null without channel, flow or liquid. */
export function depositKg(leg: Leg): number | null {
  const { channel, fluid, massFlowKgS, tempK } = leg.op
  if (leg.ratio <= 1) return 0
  if (channel === null || fluid === null || massFlowKgS === null || massFlowKgS <= 0) return null
  const { rhoKgM3, viscPaS } = fluid.at(tempK)
  return (
    filmVolumeM3(channel, thicknessOfRatio(channel, { massFlowKgS, rhoKgM3, viscPaS }, leg.ratio)) * lithiumSalt('LiOH').densityKgM3
  )
}
