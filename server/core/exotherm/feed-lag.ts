import type { ReactorConfig, ReactorScan } from './types.ts'
import type { Reactor } from './watch-state.ts'

/** Lags of the feed, s: the one in use, a faster and a slower one for the doubt between, and a long one. */
const feedLagsS = [35, 10, 55, 600] as const

/** The limiting feed; all feeds together where nothing is known of the wall. */
function feedOf(rc: ReactorConfig, s: ReactorScan): number | null {
  if (rc.coolant !== null) return s.flowsKgS[rc.limiting ?? 0] ?? null
  let sum = 0
  for (const f of s.flowsKgS) {
    if (f === null) return null
    sum += f
  }
  return s.flowsKgS.length === 0 ? null : sum
}

/** How far a feed that is not read may have moved: a pump takes some ten seconds over a step of a quarter, and a reading that leaps is at first not believed. */
const missingHPerS = 0.025
const missingMostH = 0.25

/** A feed ten times its reference says no more than that. */
const mostH = 10

/**
 * The limiting feed of this scan through its lags, over the reference. Time without a reading passes at the mean of its two ends; if it was
 * longer than `gapS`, the move itself stays in doubt until the lag has forgotten it.
 */
export function feedScan(r: Reactor, rc: ReactorConfig, s: ReactorScan, tMs: number, gapS: number): void {
  const flow = feedOf(rc, s)
  r.missingH = flow === null && r.flowMs > 0 ? Math.min(missingMostH, (missingHPerS * (tMs - r.flowMs)) / 1000) : 0
  if (flow === null || !s.production) return
  r.flowSum += flow
  r.flowN++
  if (r.refKgS === 0) return
  const now = Math.min(mostH, flow / r.refKgS)
  const dtS = r.flowMs === 0 ? 0 : (tMs - r.flowMs) / 1000
  const gap = dtS > gapS
  r.flowMs = tMs
  const drive = gap ? (now + r.hNow) / 2 : now
  const [use, fast, slow, long] = shares(dtS)
  if (r.unseenH > 0) r.unseenH = r.unseenH < 1e-4 ? 0 : r.unseenH * (1 - use)
  if (gap) r.unseenH += Math.abs(now - r.hNow)
  r.hNow = now
  r.h += (drive - r.h) * use
  r.hFast += (drive - r.hFast) * fast
  r.hSlow += (drive - r.hSlow) * slow
  r.hLong += (drive - r.hLong) * long
  r.hSum += r.h
  r.hN++
}

// The same step nearly every time: four exponentials saved a scan. A cache of a pure function, not state.
let lastS = -1
let last: [number, number, number, number] = [0, 0, 0, 0]
function shares(dtS: number): [number, number, number, number] {
  if (dtS !== lastS) {
    last = feedLagsS.map((s) => 1 - Math.exp(-dtS / s)) as [number, number, number, number]
    lastS = dtS
  }
  return last
}

/** Less than this is a standing pump, kg/s: 4 mg/h. */
const leastKgS = 1e-9

/** The feed of the block in which the reactor is first armed is the reference from then on. */
export function setReference(r: Reactor): void {
  const mean = r.flowSum / r.flowN
  if (mean > leastKgS) r.refKgS = mean
}
