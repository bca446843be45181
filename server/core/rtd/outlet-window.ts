import { MonitorError } from '../errors.ts'
import { type PathStep, pathVolume } from './path.ts'
import { describeRtd } from './rtd.ts'

/** Flow from this instant to the next sample; null where it is not known. */
export interface FlowSample {
  readonly tMs: number
  readonly flowM3S: number | null
}

export interface OutletWindow {
  /** Volume from entry to first and last appearance, m³. */
  readonly firstM3: number
  readonly lastM3: number
  /** When the outlet is affected; null where it lies beyond the samples. */
  readonly fromMs: number | null
  readonly toMs: number | null
  /** Volume that leaves in the window, m³; null while its end is not reached. */
  readonly divertedM3: number | null
  /** Seconds without a known flow up to the window's end: the window is at least as late as given. */
  readonly unknownS: number
  readonly epsilon: number
  readonly models: readonly string[]
}

/**
 * When a disturbance that entered a path between two instants shows at its outlet, by volume and not by clock:
 *   outlet volume from V(t_start) + V_first to V(t_end) + V_last,  F(V_first) = ε,  F(V_last) = 1 − ε,  V(t) = ∫ Q dt
 * `path` volumes in m³, from the place of entry to the outlet; `flow` piecewise constant, in time order, from t_start on. Unknown flow adds no volume.
 * `through`: the vessel in which the disturbance acted. What lay anywhere in it may be affected, so it counts for the last only, and the first
 * is what its end passes on; with it the path may be empty (V_first = 0).
 * Errors: RTD_RANGE for an empty path without it, ε outside 0 … 0.5, samples out of order or starting after the disturbance.
 */
export function outletWindow(input: {
  readonly path: readonly PathStep[]
  readonly through?: PathStep
  readonly epsilon: number
  readonly flow: readonly FlowSample[]
  readonly startMs: number
  readonly endMs: number
}): OutletWindow {
  const { path, epsilon, flow, startMs, endMs } = input
  if (!(epsilon > 0 && epsilon < 0.5) || !(endMs >= startMs))
    throw new MonitorError('RTD_RANGE', `outlet window needs 0 < ε < 0.5 and an end after its start, got ε=${epsilon}`)
  const all = input.through === undefined ? path : [input.through, ...path]
  const firstM3 = input.through !== undefined && path.length === 0 ? 0 : pathVolume(path, 1 - epsilon)
  const lastM3 = pathVolume(all, epsilon)
  if ((flow[0]?.tMs ?? Number.POSITIVE_INFINITY) > startMs)
    throw new MonitorError('RTD_RANGE', 'flow samples must begin at or before the disturbance')
  let volume = 0
  let unknownS = 0
  let endVolume: number | null = null
  let fromMs: number | null = null
  let toMs: number | null = null
  for (let i = 0; i < flow.length - 1 && toMs === null; i++) {
    const a = flow[i]
    const b = flow[i + 1]
    if (a === undefined || b === undefined) break
    if (b.tMs < a.tMs) throw new MonitorError('RTD_RANGE', `flow samples out of order at ${b.tMs} ms`)
    const from = Math.max(a.tMs, startMs)
    if (b.tMs <= startMs) continue
    const seconds = (b.tMs - from) / 1000
    if (a.flowM3S === null) unknownS += seconds
    const rate = Math.max(0, a.flowM3S ?? 0)
    if (endVolume === null && endMs <= b.tMs) endVolume = volume + rate * Math.max(0, (endMs - from) / 1000)
    const crossing = (target: number) =>
      rate > 0 && volume + rate * seconds >= target ? from + (1000 * Math.max(0, target - volume)) / rate : null
    fromMs ??= crossing(firstM3)
    if (endVolume !== null) toMs = crossing(endVolume + lastM3)
    volume += rate * seconds
  }
  const divertedM3 = toMs === null || endVolume === null ? null : endVolume + lastM3 - firstM3
  return { firstM3, lastM3, fromMs, toMs, divertedM3, unknownS, epsilon, models: all.map((s) => describeRtd(s.rtd)) }
}
