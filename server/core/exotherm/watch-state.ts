import { type Coolant, freshCoolant, lagBlocks } from './coolant.ts'
import { freshHubJones, type HubJones, type HubJonesConfig } from './hub-jones.ts'
import { freshLevel, type Level } from './level.ts'
import { type Ring, ring } from './ring.ts'
import { freshSeries, pace, type Series } from './series.ts'
import type { WatchConfig } from './types.ts'

export interface Thermo {
  readonly level: Level
  /** Level in use, 30 to 60 s old, so that an excursion does not teach its own threshold; and the one to follow. */
  c: number
  o: number
  b: number
  varB: number
  nextC: number
  nextO: number
  nextB: number
  nextVarB: number
  sum: number
  n: number
  readonly blocks: Ring
  readonly excess: Ring
  readonly temps: Ring
  readonly series: Series
}

export interface Reactor {
  readonly thermos: Thermo[]
  readonly mean: Series
  /** Reference feed, kg/s, 0 until armed; the feed over it now, and through lags of 35, 10, 55 s and 10 min. */
  refKgS: number
  hNow: number
  h: number
  hFast: number
  hSlow: number
  hLong: number
  hSum: number
  hN: number
  flowSum: number
  flowN: number
  /** Lagged coolant when the reference was taken, °C, and the mean of the last half hour; null before. */
  refCoolantC: number | null
  slowCoolantC: number
  /** When coolant or feed last moved, ms; 0 for never. */
  movedMs: number
  /** How long an excess has stood unchanged, s. */
  standS: number
  /** Feed moved unseen in a gap, not yet forgotten. */
  unseenH: number
  /** How far the feed may have moved since it was last read. */
  missingH: number
  /** Time of the latest flow reading, ms; 0 for none. */
  flowMs: number
  outS: number
  wasArmed: boolean
  /** Only without a coolant reading: the inlet's readings of 15 min, how far they reach, K, and whether inlet or feed have moved. */
  readonly inlet: Ring
  inletMoveK: number
  unsteady: boolean
  over: boolean
  /** Blocks still too close to an excursion to weigh lags by. */
  sparedBlocks: number
  startMs: number
  readonly runaway: HubJones
}

export interface WatchState {
  lastMs: number
  scans: number
  blockMs: number
  readonly coolants: Record<string, Coolant>
  readonly reactors: Reactor[]
  readonly all: Series
}

export const hubJonesConfig = (scanS: number): HubJonesConfig => ({
  scanS,
  windowS: Math.max(20, 4 * scanS),
  holdS: 8,
  leastRiseK: 0.5,
  leastRateKS: 0.02,
})

export function freshWatch(config: WatchConfig): WatchState {
  const p = pace(config.scanS)
  const coolants: Record<string, Coolant> = {}
  for (const { coolant } of config.reactors) if (coolant !== null) coolants[coolant] ??= freshCoolant()
  const thermo = (): Thermo => ({
    level: freshLevel(),
    c: 0,
    o: 0,
    b: 0,
    varB: 0,
    nextC: 0,
    nextO: 0,
    nextB: 0,
    nextVarB: 0,
    sum: 0,
    n: 0,
    blocks: ring(lagBlocks),
    excess: ring(p.smooth),
    temps: ring(Math.max(4, p.rise[0])),
    series: freshSeries(p),
  })
  const reactors = config.reactors.map(
    (rc): Reactor => ({
      thermos: Array.from({ length: rc.thermocouples }, thermo),
      mean: freshSeries(p),
      refKgS: 0,
      hNow: 1,
      h: 1,
      hFast: 1,
      hSlow: 1,
      hLong: 1,
      hSum: 0,
      hN: 0,
      flowSum: 0,
      flowN: 0,
      refCoolantC: null,
      slowCoolantC: 0,
      movedMs: 0,
      standS: 0,
      unseenH: 0,
      missingH: 0,
      flowMs: 0,
      outS: 0,
      wasArmed: false,
      inlet: ring(rc.coolant === null ? Math.max(2, Math.round(900 / (p.slowEvery * p.scanS))) : 1),
      inletMoveK: 0,
      unsteady: false,
      over: false,
      sparedBlocks: 0,
      startMs: 0,
      runaway: freshHubJones(hubJonesConfig(config.scanS)),
    }),
  )
  return { lastMs: 0, scans: 0, blockMs: 0, coolants, reactors, all: freshSeries(p) }
}
