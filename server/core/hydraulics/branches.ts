import { MonitorError } from '../errors.ts'
import type { ChannelGeometry } from './channel.ts'
import { cleanDp } from './clean-dp.ts'

/**
 * Root of a rising function between low and high, by regula falsi with the Illinois step; stops at a relative width of 1e-14.
 * The caller brackets it (f(low) ≤ 0 ≤ f(high)).
 */
export function risingRoot(f: (x: number) => number, low: number, high: number): number {
  let a = low
  let b = high
  let fa = f(a)
  let fb = f(b)
  if (fa >= 0) return a
  if (fb <= 0) return b
  let side = 0
  for (let i = 0; i < 200 && b - a > 1e-14 * Math.abs(b); i++) {
    const x = i % 8 === 7 ? (a + b) / 2 : (a * fb - b * fa) / (fb - fa)
    const fx = f(x)
    if (fx === 0) return x
    if (fx < 0) {
      a = x
      fa = fx
      if (side === -1) fb /= 2
      side = -1
    } else {
      b = x
      fb = fx
      if (side === 1) fa /= 2
      side = 1
    }
  }
  return (a + b) / 2
}

/**
 * Mass flow through a channel at a given pressure difference (static head included), kg/s; the inverse of cleanDp, to 1e-13.
 * Backwards flow is negative.
 * Errors: HYDRAULICS_RANGE when the pressure is not finite.
 */
export function flowAtDp(channel: ChannelGeometry, dpPa: number, rhoKgM3: number, viscPaS: number): number {
  if (!Number.isFinite(dpPa)) throw new MonitorError('HYDRAULICS_RANGE', `a pressure difference must be finite, got ${dpPa}`)
  const still = cleanDp(channel, 0, rhoKgM3, viscPaS).dpPa
  const drive = Math.abs(dpPa - still)
  if (drive === 0) return 0
  const excess = (m: number): number => {
    const at = cleanDp(channel, m, rhoKgM3, viscPaS)
    return at.frictionPa + at.bendPa - drive
  }
  const d = channel.diameterM
  const laminar =
    (drive * channel.parallel * channel.areaM2 * rhoKgM3 * d * d) / (32 * viscPaS * channel.laminarFactor * channel.lengthM)
  const m = risingRoot(excess, 0, laminar * (1 + 1e-9))
  return dpPa > still ? m : -m
}

export interface FlowSplit {
  readonly dpPa: number
  /** In the order of the branches; adds up to the whole flow. Negative: this branch flows backwards (heads differ). */
  readonly flowsKgS: readonly number[]
}

/**
 * How a flow shares itself among unlike branches between the same two ends: one ΔP for all, flows adding up, solved to 1e-12 of
 * the whole flow. A branch may itself be several equal bores. One plugged of n: leave it out. massFlowKgS ≥ 0, one fluid at one
 * temperature in all.
 * Errors: HYDRAULICS_RANGE without a branch, or for a flow that is negative or not finite.
 */
export function splitFlow(branches: readonly ChannelGeometry[], massFlowKgS: number, rhoKgM3: number, viscPaS: number): FlowSplit {
  if (branches.length === 0) throw new MonitorError('HYDRAULICS_RANGE', 'a flow needs at least one branch to go through')
  if (!(massFlowKgS >= 0 && Number.isFinite(massFlowKgS)))
    throw new MonitorError('HYDRAULICS_RANGE', `a flow to share must be 0 or more, got ${massFlowKgS} kg/s`)
  const each = (m: number): number[] => branches.map((b) => cleanDp(b, m, rhoKgM3, viscPaS).dpPa)
  const low = Math.min(...each(0))
  const high = Math.max(...each(massFlowKgS))
  const flowsAt = (dpPa: number): number[] => branches.map((b) => flowAtDp(b, dpPa, rhoKgM3, viscPaS))
  const sum = (flows: readonly number[]): number => flows.reduce((a, b) => a + b, 0)
  const dpPa = low === high ? low : risingRoot((p) => sum(flowsAt(p)) - massFlowKgS, low, high)
  return { dpPa, flowsKgS: flowsAt(dpPa) }
}
