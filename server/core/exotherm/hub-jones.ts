import { ago, forget, push, type Ring, ring } from './ring.ts'

export interface HubJonesConfig {
  readonly scanS: number
  /** Window of the fits, s; three scans at least, more where there is noise. */
  readonly windowS: number
  /** Both derivatives must have been positive so long without a break, s. */
  readonly holdS: number
  /** and the temperature have risen so far meanwhile, K. */
  readonly leastRiseK: number
  /** Least rate, K/s: below it nothing is rising. */
  readonly leastRateKS: number
}

export interface HubJones {
  readonly t: Ring
  readonly d: Ring
  whole: number
  /** Since when both have been positive, and the temperature then. */
  sinceMs: number
  sinceC: number
  on: boolean
  /** Not looked at before, ms: after commanded changes. */
  holdOffMs: number
}

export const freshHubJones = (c: HubJonesConfig): HubJones => {
  const n = Math.max(3, Math.round(c.windowS / c.scanS) + 1)
  return { t: ring(n), d: ring(n), whole: 0, sinceMs: 0, sinceC: 0, on: false, holdOffMs: 0 }
}

/** Starts the window afresh, after a gap. */
export function clearHubJones(s: HubJones): void {
  forget(s.t)
  forget(s.d)
  s.whole = 0
  s.on = false
}

/**
 * The on-line criterion of Hub and Jones: a runaway is under way when
 *
 *   d²T/dt² > 0   and   d(T − Tj)/dt > 0,   both sustained for `holdS` while T has risen by `leastRiseK`.
 *
 * T the hot spot, Tj the coolant, °C. Derivatives from a least-squares parabola (T) and line (T − Tj) over the window, by their closed forms
 * for equidistant points. It needs no model and fires on almost any step towards more heat, hence hold time, least rise and `holdOffMs`, set by the caller after
 * changes of flow or coolant. A reading missing on either side starts the window afresh.
 * Source: L. Hub, J. D. Jones, Plant/Operations Progress 5 (1986) 221 (from memory). Errors: none.
 */
export function hubJones(c: HubJonesConfig, s: HubJones, tMs: number, hotC: number | null, coolantC: number | null): boolean {
  if (hotC === null || coolantC === null) {
    if (s.whole > 0) clearHubJones(s)
    return false
  }
  push(s.t, hotC)
  push(s.d, hotC - coolantC)
  s.whole++
  const n = s.t.v.length
  if (s.whole < n) return false
  let slope = 0
  let gap = 0
  let bend = 0
  const middle = (n - 1) / 2
  const spread = (n * n - 1) / 12
  const base = ago(s.t, 0) as number
  // Both rings are full and in step: from the oldest on, without a look at holes.
  let i = s.t.at
  for (let k = 0; k < n; k++) {
    const u = k - middle
    const x = (s.t.v[i] as number) - base
    slope += u * x
    bend += (u * u - spread) * x
    gap += u * (s.d.v[i] as number)
    if (++i === n) i = 0
  }
  const rate = slope / (n * spread) / c.scanS
  const rising = bend > 0 && gap > 0 && rate > c.leastRateKS && tMs >= s.holdOffMs
  if (!rising) {
    s.on = false
    return false
  }
  if (!s.on) {
    s.on = true
    s.sinceMs = tMs
    s.sinceC = hotC
  }
  return tMs - s.sinceMs >= c.holdS * 1000 && hotC - s.sinceC >= c.leastRiseK
}
