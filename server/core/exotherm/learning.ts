import { type Coolant, chooseLag, coolantBlock, lagBlocks, weighLags } from './coolant.ts'
import { setReference } from './feed-lag.ts'
import { learn, openGain, reopen } from './level.ts'
import { ago, push } from './ring.ts'
import { restart } from './series.ts'
import type { ReactorConfig, ReactorScan, WatchConfig } from './types.ts'
import type { Reactor, Thermo, WatchState } from './watch-state.ts'

/**
 * Ends a block of 30 s: teaches levels, weighs coolant lags, and puts the level of a block ago in use. Blocks within 3.5 min after an excursion
 * weigh nothing, since what they show is not the coolant's doing.
 */
export function endBlock(config: WatchConfig, state: WatchState, scans: readonly ReactorScan[], tMs: number): void {
  const blockS = (tMs - state.blockMs) / 1000
  state.blockMs = tMs
  const means: Record<string, number | null> = {}
  for (const name of Object.keys(state.coolants)) means[name] = coolantBlock(state.coolants[name] as Coolant)
  for (let i = 0; i < config.reactors.length; i++) {
    const rc = config.reactors[i] as ReactorConfig
    const r = state.reactors[i] as Reactor
    const s = scans[i] as ReactorScan
    const base = rc.coolant === null ? 0 : (means[rc.coolant] ?? null)
    if (s.armed && s.production && r.refKgS === 0 && r.flowN > 0) {
      setReference(r)
      if (rc.coolant !== null) r.refCoolantC = r.slowCoolantC = base ?? (state.coolants[rc.coolant] as Coolant).lastC
      for (const th of r.thermos) openGain(th.level, rc.coolant === null ? 0 : foreignShare(rc, s))
    }
    const v = base === null || r.refCoolantC === null ? 0 : base - r.refCoolantC
    // A stop of over 8 min changes what is normal: the level starts anew, offsets stay.
    if (!s.production) r.outS += blockS
    const anew = s.production && r.outS > 480
    if (s.production) r.outS = 0
    if (r.over) r.sparedBlocks = lagBlocks + 1
    const settled = rc.coolant !== null && standsAfterMove(r, base, blockS, tMs)
    for (const th of r.thermos) {
      const mean = th.n === 0 ? null : th.sum / th.n
      push(th.blocks, mean)
      if (anew) th.level.n = 0
      if (anew || settled) reopen(th.level)
      if (mean !== null && base !== null && s.production) {
        const h = rc.coolant === null || r.hN === 0 ? 1 : r.hSum / r.hN
        learn(th.level, mean - base, h, v, blockS, !s.armed || r.unsteady)
        if (rc.coolant !== null && r.sparedBlocks === 0) weighLags(state.coolants[rc.coolant] as Coolant, th.blocks, th.level.b)
      }
      putInUse(th, s.armed && r.wasArmed)
      th.sum = 0
      th.n = 0
    }
    if (r.sparedBlocks > 0) r.sparedBlocks--
    r.wasArmed = s.armed
    r.hSum = 0
    r.hN = 0
    r.flowSum = 0
    r.flowN = 0
  }
  for (const name of Object.keys(state.coolants)) {
    if (!chooseLag(state.coolants[name] as Coolant)) continue
    config.reactors.forEach((rc, i) => {
      if (rc.coolant !== name) return
      for (const th of (state.reactors[i] as Reactor).thermos) restart(th.series)
      restart((state.reactors[i] as Reactor).mean)
    })
    restart(state.all)
  }
}

/** Puts the level of a block ago in use, or this one while not yet armed. */
function putInUse(th: Thermo, old: boolean): void {
  th.c = old ? th.nextC : th.level.c
  th.o = old ? th.nextO : th.level.o
  th.b = old ? th.nextB : th.level.b
  th.varB = old ? th.nextVarB : th.level.pbb
  th.nextC = th.level.c
  th.nextO = th.level.o
  th.nextB = th.level.b
  th.nextVarB = th.level.pbb
}

/** Mass share of the feeds that have not passed this coolant before; 1 where there are such and a flow is not known. */
function foreignShare(rc: ReactorConfig, s: ReactorScan): number {
  if (rc.foreign === undefined || !rc.foreign.includes(true)) return 0
  let all = 0
  let foreign = 0
  for (let k = 0; k < s.flowsKgS.length; k++) {
    const kgS = s.flowsKgS[k] ?? null
    if (kgS === null) return 1
    all += kgS
    if (rc.foreign[k] === true) foreign += kgS
  }
  return all > 0 ? foreign / all : 1
}

/** A move of the coolant, K off its mean of half an hour, or of the feed, share off its mean of ten minutes. */
const movedK = 0.75
const movedFeed = 0.05
const slowS = 1800
/** An excess that came within so long of a move and has stood for so long, each thermocouple within 0.3 K over 3 min, is that move's. */
const standS = 900
const standK = 0.3

/**
 * Whether an excess may be taken for the new normal: it came with a move of coolant or feed, which the level knows imperfectly, and has stood
 * unchanged for a quarter of an hour. One that came without such a move stays an excess however long it stands.
 */
function standsAfterMove(r: Reactor, coolantC: number | null, blockS: number, tMs: number): boolean {
  if (coolantC !== null && r.refCoolantC !== null) {
    r.slowCoolantC += (coolantC - r.slowCoolantC) * (1 - Math.exp(-blockS / slowS))
    if (Math.abs(coolantC - r.slowCoolantC) > movedK || Math.abs(r.h - r.hLong) > movedFeed) r.movedMs = tMs
  }
  if (!r.over || r.movedMs === 0 || r.movedMs < r.startMs - standS * 1000) {
    r.standS = 0
    return false
  }
  for (const th of r.thermos) {
    const now = ago(th.blocks, 0)
    const then = ago(th.blocks, lagBlocks - 1)
    if (now !== null && (then === null || Math.abs(now - then) > standK)) r.standS = -blockS
  }
  r.standS += blockS
  if (r.standS < standS) return false
  r.standS = 0
  return true
}
