import { push } from './ring.ts'
import type { ReactorScan } from './types.ts'
import type { Reactor } from './watch-state.ts'

/** What a thermocouple's noise alone reaches in 15 min, K. */
const noiseReachK = 0.4
/** Moves of the inlet, K, and of the feed, share, after which the level is sought anew. */
const movedK = 1
const movedFeed = 0.015

/**
 * What flows into a reactor without a coolant reading: its own first thermocouple where it has two or more, else the last one of the reactor
 * before. Nothing is known of its wall, so what the inlet moved within 15 min is no excursion, and while inlet or feed have moved the level follows
 * freely: a front that passes through a pipe raises nothing.
 */
export function inletOf(scans: readonly ReactorScan[], i: number): number | null {
  const own = scans[i]?.tempsC ?? []
  return (own.length > 1 ? own[0] : scans[i - 1]?.tempsC.at(-1)) ?? null
}

/** Every 10 s: how far the inlet has moved, and whether all is steady. */
export function followInlet(r: Reactor, inletC: number | null): void {
  push(r.inlet, inletC)
  let low = Number.POSITIVE_INFINITY
  let high = Number.NEGATIVE_INFINITY
  const { v, ok } = r.inlet
  for (let n = 0; n < v.length; n++) {
    if (ok[n] !== 1) continue
    const t = v[n] as number
    if (t < low) low = t
    if (t > high) high = t
  }
  r.inletMoveK = Math.max(0, high - low - noiseReachK)
  if (high < low) r.inletMoveK = 0
  r.unsteady = r.inletMoveK > movedK || Math.abs(r.hSlow - r.hLong) > movedFeed
}
