import { type Coolant, coolantScan, lagDoubtK, lagsS } from './coolant.ts'
import { feedScan } from './feed-lag.ts'
import { clearHubJones, hubJones } from './hub-jones.ts'
import { followInlet, inletOf } from './inlet.ts'
import { endBlock } from './learning.ts'
import { explained } from './level.ts'
import { ago, forget, meanOf, push } from './ring.ts'
import { pace, remember, restart, spread } from './series.ts'
import { clearFinding, exothermDefaults as d, type Finding, noFinding, speak, test } from './thresholds.ts'
import type { ExothermVerdict, ReactorConfig, ReactorScan, WatchConfig } from './types.ts'
import { conclude, heatShift } from './verdict.ts'
import { freshWatch, hubJonesConfig, type Reactor, type Thermo, type WatchState } from './watch-state.ts'

/**
 * Watches the reactors of a skid for excursions in seconds. Per thermocouple the excess is
 *
 *   r = T − lag(T_coolant) − c − (c − o)(h − 1) + b v
 *
 * (symbols: `level.ts`, `coolant.ts`; h the limiting feed over its reference through 35 s, v how far the coolant is off its own). It speaks when the 4-s mean of one thermocouple, of
 * a reactor or of all, two scans in a row, passes its threshold: the least one or 5.5 robust sd, plus what the model may err by at the moment;
 * or has risen by as much within 12 or 25 s; or when the criterion of Hub and Jones holds. It looks back only: the level is 30 to 60 s
 * old. Without a coolant reading the level is the temperature's own (`inlet.ts`).
 *
 * The state is plain JSON of bounded size and changes in place, since this runs for every thermocouple at every scan; write it out between scans.
 * Valid for scans of 0.1 to 60 s; above 4 s there is nothing to average and an excursion takes two scans. Not a safety function.
 * Source: own study of methods on simulated skids; Hub and Jones as cited there. Errors: none.
 */
export function createExothermWatch(config: WatchConfig, state: WatchState = freshWatch(config)) {
  const p = pace(config.scanS)
  const runawayConfig = hubJonesConfig(config.scanS)
  const gapS = Math.max(10, 5 * config.scanS)

  const found: Finding[] = config.reactors.map(noFinding)
  const names = Object.keys(state.coolants)

  function scan(tMs: number, scans: readonly ReactorScan[]): ExothermVerdict[] {
    const first = state.scans === 0
    const gap = !first && tMs - state.lastMs > gapS * 1000
    if (first) state.blockMs = tMs
    state.lastMs = tMs
    state.scans++
    const slow = state.scans % p.slowEvery === 0
    for (const name of names) {
      let reading: number | null = null
      for (let i = 0; i < config.reactors.length; i++)
        if ((config.reactors[i] as ReactorConfig).coolant === name) reading ??= scans[i]?.coolantC ?? null
      coolantScan(state.coolants[name] as Coolant, tMs, reading, gapS)
    }
    let allSum = 0
    let allRaw = 0
    let allAllow = 0
    let allN = 0
    let reactors = 0
    for (let i = 0; i < config.reactors.length; i++) {
      const r = state.reactors[i] as Reactor
      const s = scans[i] as ReactorScan
      feedScan(r, config.reactors[i] as ReactorConfig, s, tMs, gapS)
      const f = examine(i, scans, tMs, gap, slow)
      if (f.n > 0) {
        allSum += f.sum
        allRaw += f.rawSum
        allAllow += f.allow
        allN += f.n
        reactors++
      }
    }
    // The mean of all is charged to the reactor with most excess.
    const together = reactors > 1 ? allSum / allN : null
    if (gap) restart(state.all)
    if (together !== null) {
      let most = 0
      for (let i = 1; i < found.length; i++) if ((found[i] as Finding).meanK > (found[most] as Finding).meanK) most = i
      const f = found[most] as Finding
      test(
        f,
        state.all,
        together,
        allRaw / allN,
        d.meanK,
        allAllow / allN,
        (scans[most] as ReactorScan).ratioHigh === true,
        p,
        'all',
      )
    }
    remember(state.all, together, slow && !state.reactors.some((r) => r.over))
    const verdicts = found.map((_, i) => conclude(config, state, p, found, i, scans[i] as ReactorScan, tMs))
    if (tMs - state.blockMs >= d.blockS * 1000 - 1) endBlock(config, state, scans, tMs)
    if (slow && state.scans % (12 * p.slowEvery) === 0) {
      for (const r of state.reactors) {
        for (const t of r.thermos) spread(t.series, p)
        spread(r.mean, p)
      }
      spread(state.all, p)
    }
    return verdicts
  }

  function coolantOf(rc: ReactorConfig): Coolant | null {
    return rc.coolant === null ? null : (state.coolants[rc.coolant] as Coolant)
  }

  function examine(i: number, scans: readonly ReactorScan[], tMs: number, gap: boolean, slow: boolean): Finding {
    const r = state.reactors[i] as Reactor
    const rc = config.reactors[i] as ReactorConfig
    const s = scans[i] as ReactorScan
    const f = found[i] as Finding
    clearFinding(f)
    const coolant = coolantOf(rc)
    const base = coolant === null ? 0 : (coolant.f[coolant.best] as number)
    const usable = s.production && (coolant === null || coolant.on)
    const bare = coolant === null
    const v = r.refCoolantC === null ? 0 : base - r.refCoolantC
    const h = bare ? 1 : r.h
    let common = Math.abs(r.hFast - r.hSlow) + r.unseenH + r.missingH
    if (bare) common += Math.abs(r.hSlow - r.hLong)
    let doubt = 0
    if (coolant !== null) {
      const staleS = (tMs - coolant.lastMs) / 1000
      doubt = d.lagShare * lagDoubtK(coolant) + coolant.unseenK + (staleS > gapS ? Math.min(2, 0.005 * staleS) : 0)
    }
    let coldest = Number.POSITIVE_INFINITY
    let highest = Number.NEGATIVE_INFINITY
    for (let j = 0; j < r.thermos.length; j++) {
      const t = s.tempsC[j] ?? null
      if (t === null) continue
      if (t < coldest) coldest = t
      if (t > highest) {
        highest = t
        f.hotSpot = j
      }
    }
    if (f.hotSpot !== null) f.hotSpotC = highest
    const inlet = bare ? inletOf(scans, i) : null
    if (bare) {
      if (slow) followInlet(r, inlet)
      doubt = r.inletMoveK
    }
    for (let j = 0; j < r.thermos.length; j++) {
      const th = r.thermos[j] as Thermo
      const t = s.tempsC[j] ?? null
      if (gap) {
        restart(th.series)
        forget(th.excess)
        forget(th.temps)
      }
      push(th.temps, t)
      push(th.excess, t === null || !usable ? null : t - base - explained(th, h, v))
      const x = meanOf(th.excess, p.smooth)
      const ready = x !== null && s.armed && usable && th.level.n >= 4 && !(bare && j === 0 && r.thermos.length > 1)
      if (ready) {
        const gain = bare ? Math.max(2, highest - coldest, inlet === null ? 0 : Math.abs(highest - inlet)) : Math.abs(th.c - th.o)
        const offset = bare ? 0 : d.offsetSds * Math.sqrt(th.level.poo) * Math.abs(r.h - 1)
        const share = d.offsetSds * Math.sqrt(th.varB) * Math.abs(v)
        const allow = doubt + d.flowShare * gain * common + offset + share
        const raw = ago(th.excess, 0) ?? x
        test(f, th.series, x, raw, d.oneK, allow, s.ratioHigh === true, p, 'thermocouple')
        f.sum += x
        f.rawSum += raw
        f.allow += allow
        f.n++
        if (x > f.hottestK) {
          f.hottestK = x
          f.hottest = j
        }
      } else {
        th.series.high = 0
        th.series.low = 0
      }
      remember(th.series, usable ? x : null, slow && s.armed && !r.over)
      if (usable && t !== null) {
        th.sum += t
        th.n++
      }
    }
    if (gap) restart(r.mean)
    f.meanK = f.n > 0 ? f.sum / f.n : Number.NEGATIVE_INFINITY
    if (f.n > 1) test(f, r.mean, f.meanK, f.rawSum / f.n, d.meanK, f.allow / f.n, s.ratioHigh === true, p, 'reactor')
    remember(r.mean, f.n > 0 ? f.meanK : null, slow && s.armed && !r.over)
    if (gap) clearHubJones(r.runaway)
    const quietFlow = Math.abs(r.hFast - r.hSlow) < 0.015 && r.unseenH === 0
    if (!quietFlow || (coolant !== null && Math.abs(coolant.lastC - (coolant.f[lagsS.length - 1] as number)) > 0.6))
      r.runaway.holdOffMs = tMs + 60_000
    f.runaway = hubJones(
      runawayConfig,
      r.runaway,
      tMs,
      usable && s.armed && f.hottest !== null ? f.hotSpotC : null,
      coolant === null ? 0 : s.coolantC,
    )
    if (f.runaway && f.hottestK > 0.5 * d.oneK) speak(f, 'runaway')
    return f
  }

  return { scan, state, heatShift: (i: number): number | null => heatShift(state.reactors[i] as Reactor) }
}
