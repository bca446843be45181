import { lithiumSalt } from '../deposit/lithium-salts.ts'
import { filmVolumeM3 } from '../deposit/run-length.ts'
import { thicknessOfRatio } from '../deposit/thickness.ts'
import type { SegmentOperation } from '../figures/operation.ts'
import { isOrganolithium } from '../figures/organolithium.ts'
import type { FlushInventory } from '../report.ts'
import { adiabaticRise } from '../thermal/reaction-heat.ts'
import type { FlushPath, Leg } from './legs.ts'

/** Heat of organolithium with water, upper end of −200 … −240 kJ/mol (from memory). */
const hydrolysisKJMol = 240

/** Streams whose reagent counts as active: those named as an organolithium; where none is, every reagent, to be on the safe side. */
export function activeStreams(path: FlushPath): { readonly ids: readonly string[]; readonly assumption: string | null } {
  const withReagent = path.operation.streams.filter((s) => s.spec.reagent !== null)
  const named = withReagent.filter((s) => isOrganolithium(s.spec.reagent?.name ?? ''))
  if (named.length > 0 || withReagent.length === 0) return { ids: named.map((s) => s.id), assumption: null }
  return { ids: withReagent.map((s) => s.id), assumption: 'no feed is named as an organolithium: every reagent counted as active' }
}

/**
 * Reagents in a segment before the flush: n = V c Q_i/ΣQ [mol], as if nothing had reacted (worst case); heat if all active reagent met
 * water, n · 240 kJ/mol, with the adiabatic rise of the mixture, and if the segment's own reaction ran to its end, |ΔH| · n_limiting.
 */
export function inventoryOf(op: SegmentOperation, active: readonly string[]): FlushInventory {
  const { volumeM3, volumeFlowM3S, spec } = op
  const inside = (stream: string, concMolL: number): number | null => {
    const q = op.streams.find((s) => s.id === stream)?.volumeFlowM3S ?? null
    return volumeM3 === null || q === null || volumeFlowM3S === null || volumeFlowM3S <= 0
      ? null
      : (volumeM3 * 1e3 * concMolL * q) / volumeFlowM3S
  }
  const reagents = op.streams.flatMap((s) =>
    s.spec.reagent === null
      ? []
      : [{ stream: s.id, name: s.spec.reagent.name, mol: inside(s.id, s.spec.reagent.concentrationMolL) }],
  )
  const hot = reagents.filter((r) => active.includes(r.stream))
  const hydrolysisKJ = hot.reduce<number | null>((a, r) => (a === null || r.mol === null ? null : a + r.mol * hydrolysisKJMol), 0)
  const mol = hot.reduce<number | null>((a, r) => (a === null || r.mol === null ? null : a + r.mol), 0)
  const state = op.fluid === null ? null : op.fluid.at(op.tempK)
  const limiting = spec.reaction === null ? null : inside(spec.reaction.limitingStream, spec.reaction.concentrationMolL)
  return {
    segment: spec.id,
    volumeMl: volumeM3 === null ? null : volumeM3 * 1e6,
    reagents,
    hydrolysisKJ: op.streams.some((s) => s.spec.reagent !== null) ? hydrolysisKJ : null,
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
