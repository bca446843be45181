import type { Fluid } from '../fluids/fluid.ts'
import { risingRoot } from '../hydraulics/branches.ts'
import { cleanDp } from '../hydraulics/clean-dp.ts'
import { paFromBar } from '../units.ts'
import type { FlushPath, Leg } from './legs.ts'

export interface LegDp {
  readonly leg: Leg
  readonly tempK: number
  readonly flowM3S: number
  readonly cleanPa: number
  readonly predictedPa: number
}

export interface CappedFlow {
  /** Whole flush flow, m³/s; null where it cannot be computed. */
  readonly flowM3S: number | null
  readonly limitedBy: string
  readonly legs: readonly LegDp[]
  readonly missing: readonly string[]
}

/** ΔP predicted in a leg: present ratio on friction and bends, static head as it is. Null without a channel or a flow share. */
function legDp(leg: Leg, fluid: Fluid, tempK: number, totalM3S: number): LegDp | null {
  const { channel } = leg.op
  if (channel === null || leg.share === null) return null
  const { rhoKgM3, viscPaS } = fluid.at(tempK)
  const flowM3S = totalM3S * leg.share
  const dp = cleanDp(channel, flowM3S * rhoKgM3, rhoKgM3, viscPaS)
  return { leg, tempK, flowM3S, cleanPa: dp.dpPa, predictedPa: leg.ratio * (dp.frictionPa + dp.bendPa) + dp.staticPa }
}

/**
 * The flow of a flush liquid: the normal flow of the feeds (a flush never asks for more), less where the predicted ΔP of any segment on
 * its way, at the present ratio with this liquid at this temperature, would pass `dpShare` of its dpHigh. Solved to 1e-14 on the rising ΔP(Q).
 * Null where an asked segment lacks channel or limit, or the feeds' flow is unknown.
 */
export function cappedFlow(path: FlushPath, fluid: Fluid, tempOf: (leg: Leg) => number, dpShare: number): CappedFlow {
  const missing: string[] = []
  const limits: { readonly leg: Leg; readonly flow: number }[] = []
  if (path.normalM3S === null || path.normalM3S <= 0)
    return {
      flowM3S: null,
      limitedBy: 'not computed',
      legs: [],
      missing: ['flush flow: needs the flow (or the range of the flow tag) and the liquid of every feed on the path'],
    }
  let computable = true
  for (const leg of path.legs) {
    const { dpHighBar } = leg.op.spec.limits
    const needs = [
      leg.op.channel === null ? 'channel with bore and length' : null,
      dpHighBar === null ? 'limits.dpHighBar' : null,
    ].filter((n) => n !== null)
    if (needs.length > 0 || dpHighBar === null) {
      missing.push(`${leg.id}: predicted pressure drop against its limit, needs ${needs.join(' and ')}`)
      if (leg.asked) computable = false
      continue
    }
    const excess = (total: number) => (legDp(leg, fluid, tempOf(leg), total)?.predictedPa ?? 0) - dpShare * paFromBar(dpHighBar)
    if (excess(path.normalM3S) > 0) limits.push({ leg, flow: excess(0) >= 0 ? 0 : risingRoot(excess, 0, path.normalM3S) })
  }
  if (!computable) return { flowM3S: null, limitedBy: 'not computed', legs: [], missing }
  const tightest = limits.reduce<{ readonly leg: Leg; readonly flow: number } | null>(
    (a, b) => (a === null || b.flow < a.flow ? b : a),
    null,
  )
  const flowM3S = tightest?.flow ?? path.normalM3S
  const legs = path.legs.flatMap((leg) => legDp(leg, fluid, tempOf(leg), flowM3S) ?? [])
  const limitedBy =
    tightest === null
      ? 'normal flow of the feeds'
      : `${(100 * dpShare).toFixed(0)} % of the high ΔP limit of ${tightest.leg.id} at its present ratio ${tightest.leg.ratio.toFixed(2)}`
  return { flowM3S, limitedBy, legs, missing }
}
