import type { Coolant } from './coolant.ts'
import { heatCentre } from './profile.ts'
import { ago, lineOf } from './ring.ts'
import type { Pace } from './series.ts'
import type { Finding } from './thresholds.ts'
import type { ExothermCause, ExothermVerdict, ReactorScan, WatchConfig } from './types.ts'
import type { Reactor, Thermo, WatchState } from './watch-state.ts'

/** One reactor's verdict; `found` holds the findings of all reactors at this scan, `i` is the one meant. */
export function conclude(
  config: WatchConfig,
  state: WatchState,
  p: Pace,
  found: readonly Finding[],
  i: number,
  s: ReactorScan,
  tMs: number,
): ExothermVerdict {
  const r = state.reactors[i] as Reactor
  const f = found[i] as Finding
  const known = f.n > 0
  const over = known && f.detector !== null
  if (over && !r.over) r.startMs = began(f, p, tMs)
  r.over = over
  const line = !over || f.hottest === null ? null : lineOf((r.thermos[f.hottest] as Thermo).temps, p.rise[0], p.scanS)
  const byRise = f.detector === 'rise'
  return {
    over: known ? over : null,
    under: known && f.under && !over,
    excessC: known ? (byRise ? f.risenK : f.excessK) : null,
    thresholdC: known ? (byRise ? f.riseLimitK : f.thresholdK) : null,
    of: f.of,
    detector: f.detector,
    ratePerS: line?.slopePerS ?? null,
    ratePerSSe: line?.seS ?? null,
    hottest: f.hottest,
    hotSpotC: f.hotSpotC,
    hotSpot: f.hotSpot,
    runaway: f.runaway,
    cold: f.cold,
    cause: over ? causeOf(config, state, found, i, s) : null,
    startMs: over ? r.startMs : null,
  }
}

/** Back along the series that is nearest its threshold, to where it was a fifth of what it is now, or at zero. */
function began(f: Finding, p: Pace, tMs: number): number {
  const s = f.spoke ?? f.nearest
  if (s === null) return tMs
  const least = Math.max(0, 0.2 * f.excessK)
  const stepMs = p.scanS * 1000
  for (let n = 1; n < s.recent.v.length; n++) {
    const x = ago(s.recent, n)
    if (x === null || x <= least) return tMs - (n - 1) * stepMs
  }
  const slowMs = p.slowEvery * stepMs
  for (let n = Math.ceil(s.recent.v.length / p.slowEvery); n < s.slow.v.length; n++) {
    const x = ago(s.slow, n)
    if (x === null || x <= least) return tMs - n * slowMs
  }
  return tMs - s.slow.v.length * slowMs
}

function causeOf(config: WatchConfig, state: WatchState, found: readonly Finding[], i: number, s: ReactorScan): ExothermCause {
  const r = state.reactors[i] as Reactor
  if (s.ratioHigh === true) return 'dosing'
  if (Math.abs(r.hFast - r.hSlow) > 0.02) return 'flow'
  const name = config.reactors[i]?.coolant ?? null
  if (name === null) return 'reaction'
  const coolant = state.coolants[name] as Coolant
  if (Math.abs(coolant.lastC - (coolant.f[coolant.best] as number)) > 0.5) return 'coolant'
  // Heat carried downstream warms the next reactor too, but less; coolant warms them alike.
  const least = Math.max(0.14, 0.4 * (found[i] as Finding).meanK)
  const others = found.some((f, k) => k !== i && config.reactors[k]?.coolant === name && f.n > 0 && f.meanK > least)
  return others ? 'coolant' : 'reaction'
}

/**
 * How far the centre of the heat has moved from where it usually is, thermocouple spacings, downstream positive (see `profile.ts`): by the
 * latest 4-s means against the levels; only of thermocouples read now. Null with fewer than two or too little heat.
 */
export function heatShift(r: Reactor): number | null {
  const usualK: (number | null)[] = []
  const nowK: (number | null)[] = []
  for (let j = 0; j < r.thermos.length; j++) {
    const th = r.thermos[j] as Thermo
    const x = ago(th.series.recent, 0)
    const usual = (th.c - th.o) * r.h
    usualK.push(x === null ? null : usual)
    nowK.push(x === null ? null : usual + x)
  }
  const a = heatCentre(nowK)
  const b = heatCentre(usualK)
  return a === null || b === null ? null : a - b
}
