import { type Coolant, chooseLag, coolantBlock, lagBlocks, weighLags } from './coolant.ts'
import { setReference } from './feed-lag.ts'
import { learn, openGain } from './level.ts'
import { push } from './ring.ts'
import { restart } from './series.ts'
import type { ReactorConfig, ReactorScan, WatchConfig } from './types.ts'
import type { Reactor, WatchState } from './watch-state.ts'

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
      for (const th of r.thermos) openGain(th.level)
    }
    // A stop of over 8 min changes what is normal: the level starts anew, offsets stay.
    if (!s.production) r.outS += blockS
    const anew = s.production && r.outS > 480
    if (s.production) r.outS = 0
    if (r.over) r.sparedBlocks = lagBlocks + 1
    for (const th of r.thermos) {
      const mean = th.n === 0 ? null : th.sum / th.n
      push(th.blocks, mean)
      if (anew) {
        th.level.n = 0
        th.level.pcc = 1
        th.level.pco = 0
      }
      if (mean !== null && base !== null && s.production) {
        learn(th.level, mean - base, rc.coolant === null || r.hN === 0 ? 1 : r.hSum / r.hN, blockS, !s.armed || r.unsteady)
        if (rc.coolant !== null && r.sparedBlocks === 0) weighLags(state.coolants[rc.coolant] as Coolant, th.blocks)
      }
      th.c = s.armed && r.wasArmed ? th.nextC : th.level.c
      th.o = s.armed && r.wasArmed ? th.nextO : th.level.o
      th.nextC = th.level.c
      th.nextO = th.level.o
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
