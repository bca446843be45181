import { type Coolant, chooseLag, coolantBlock, coolantScan, freshCoolant, lagBlocks, lagDoubtK, weighLags } from './coolant.ts'
import { clearHubJones, freshHubJones, type HubJones, type HubJonesConfig, hubJones } from './hub-jones.ts'
import { explained, freshLevel, type Level, learn } from './level.ts'
import { ago, lineOf, meanOf, push, type Ring, ring } from './ring.ts'
import { freshSeries, pace, remember, restart, riseK, type Series, spread } from './series.ts'

export interface ReactorConfig {
  readonly segment: string
  /** How many thermocouples, in flow order. */
  readonly thermocouples: number
  /** Name of the coolant reading, shared by reactors of one circuit; null where there is none. */
  readonly coolant: string | null
  /** How many feeds flow through, and which of them limits the heat; by default the first. */
  readonly streams: number
  readonly limiting?: number
}

export interface WatchConfig {
  readonly scanS: number
  readonly reactors: readonly ReactorConfig[]
}

/** Scan means of one reactor; null is missing or not good. */
export interface ReactorScan {
  readonly tempsC: readonly (number | null)[]
  readonly coolantC: number | null
  readonly flowsKgS: readonly (number | null)[]
  readonly production: boolean
  /** Past the start-up transient: verdicts count. */
  readonly armed: boolean
  /** The feed ratio is high now: thresholds are lowered by a third, and dosing is the likely cause. */
  readonly ratioHigh?: boolean
}

export type ExothermDetector = 'excess' | 'rise' | 'runaway'
/** dosing: feed ratio off; flow: the feed moved; coolant: its reading moved or its other reactors warm too; reaction: none of these. */
export type ExothermCause = 'dosing' | 'flow' | 'coolant' | 'reaction'

export interface ExothermVerdict {
  /** Beyond the threshold two scans in a row; null where nothing can be said (not armed, no thermocouple, not learnt). */
  readonly over: boolean | null
  /** Back below half the threshold everywhere. */
  readonly under: boolean
  /** Excess of the series nearest its threshold, and that threshold, K. */
  readonly excessC: number | null
  readonly thresholdC: number | null
  readonly of: 'thermocouple' | 'reactor' | 'all' | null
  /** Which of the ways spoke; null while none does. */
  readonly detector: ExothermDetector | null
  /** Rate of the thermocouple with most excess, line through 12 s, and its standard error, K/s. */
  readonly ratePerS: number | null
  readonly ratePerSSe: number | null
  /** Thermocouple with most excess. */
  readonly hottest: number | null
  /** Hot spot: highest reading and its thermocouple. */
  readonly hotSpotC: number | null
  readonly hotSpot: number | null
  /** Hub-Jones criterion fulfilled, whether or not it spoke first. */
  readonly runaway: boolean
  /** As far below what is explained: a cold excursion, sustained 30 s. */
  readonly cold: boolean
  readonly cause: ExothermCause | null
  /** Estimate of when it began, ms; null while not over. */
  readonly startMs: number | null
}

interface Thermo {
  readonly level: Level
  /** Level in use, 30 to 60 s old, so that an excursion does not teach its own threshold; and the one to follow. */
  c: number
  o: number
  nextC: number
  nextO: number
  sum: number
  n: number
  readonly blocks: Ring
  readonly excess: Ring
  readonly temps: Ring
  readonly series: Series
}

interface Reactor {
  readonly thermos: Thermo[]
  readonly mean: Series
  /** Reference feed, kg/s, 0 until armed; the feed over it now, and through lags of 35, 20, 55 s and 10 min. */
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
  /** Feed moved unseen in a gap, not yet forgotten. */
  unseenH: number
  outS: number
  wasArmed: boolean
  /** Highest inlet reading over its level lately, K; only without a coolant reading. */
  readonly inlet: Ring
  coldS: number
  over: boolean
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

export const exothermDefaults = {
  blockS: 30,
  /** Least thresholds, K, on 4-s means: one thermocouple, mean of a reactor or of all, rise over 12 or 25 s of either. */
  oneK: 0.45,
  meanK: 0.28,
  riseK: 0.5,
  sds: 5.5,
  /** What the model may err by: share of the difference of neighbouring lags, of the gain for the flow's lag, sds of the offset. */
  lagShare: 0.5,
  flowShare: 0.9,
  offsetSds: 1.3,
  ratioHighShare: 2 / 3,
  coldShare: 2,
  coldS: 30,
} as const
const d = exothermDefaults

/**
 * Watches the reactors of a skid for excursions in seconds. Per thermocouple the excess is
 *
 *   r = T − lag(T_coolant) − c − (c − o)(h − 1)
 *
 * (symbols: `level.ts`, `coolant.ts`; h the limiting feed over its reference through 35 s). It speaks when the 4-s mean of one thermocouple, of
 * a reactor or of all, two scans in a row, passes its threshold: the least one or 5.5 robust sd, plus what the model may err by at the moment;
 * or has risen by as much within 12 or 25 s; or when the criterion of Hub and Jones holds. It looks back only: the level is 30 to 60 s
 * old. Without a coolant reading the level is the temperature's own, and what the inlet brought along in the last 15 min is no excursion.
 *
 * The state is plain JSON of bounded size and changes in place, since this runs for every thermocouple at every scan; write it out between scans.
 * Valid for scans of 0.1 to 60 s; above 4 s there is nothing to average and an excursion takes two scans. Not a safety function.
 * Source: own study of methods on simulated skids; Hub and Jones as cited there. Errors: none.
 */
export function createExothermWatch(config: WatchConfig, state: WatchState = freshWatch(config)) {
  const p = pace(config.scanS)
  const runawayConfig = hubJonesConfig(config.scanS)
  const gapS = Math.max(10, 5 * config.scanS)
  const alphas = [35, 20, 55, 600].map((s) => 1 - Math.exp(-config.scanS / s))

  function scan(tMs: number, scans: readonly ReactorScan[]): ExothermVerdict[] {
    const first = state.scans === 0
    const gap = !first && tMs - state.lastMs > gapS * 1000
    if (first) state.blockMs = tMs
    state.lastMs = tMs
    state.scans++
    const slow = state.scans % p.slowEvery === 0
    for (const name of Object.keys(state.coolants)) {
      let reading: number | null = null
      config.reactors.forEach((rc, i) => {
        if (rc.coolant === name) reading ??= scans[i]?.coolantC ?? null
      })
      coolantScan(state.coolants[name] as Coolant, tMs, reading, gapS)
    }
    let allSum = 0
    let allAllow = 0
    let allN = 0
    let reactors = 0
    const found: Finding[] = []
    for (let i = 0; i < config.reactors.length; i++) {
      const r = state.reactors[i] as Reactor
      const s = scans[i] as ReactorScan
      feed(r, config.reactors[i] as ReactorConfig, s, gap, alphas)
      const f = examine(r, config.reactors[i] as ReactorConfig, s, tMs, gap, slow)
      found.push(f)
      if (f.n > 0) {
        allSum += f.sum
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
      test(f, state.all, together, d.meanK, allAllow / allN, (scans[most] as ReactorScan).ratioHigh === true, 'all')
    }
    remember(state.all, together, slow)
    const verdicts = found.map((f, i) => conclude(f, i, tMs, scans[i] as ReactorScan, found))
    if (tMs - state.blockMs >= d.blockS * 1000 - 1) endBlock(scans, tMs)
    if (slow && state.scans % (6 * p.slowEvery) === 0) {
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

  function examine(r: Reactor, rc: ReactorConfig, s: ReactorScan, tMs: number, gap: boolean, slow: boolean): Finding {
    const f = noFinding()
    const coolant = coolantOf(rc)
    const base = coolant === null ? 0 : (coolant.f[coolant.best] as number)
    const usable = s.production && (coolant === null || coolant.on)
    const bare = coolant === null
    const h = bare ? 1 : r.h
    let common = Math.abs(r.hFast - r.hSlow) + r.unseenH
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
        f.hotSpotC = t
      }
    }
    if (bare) {
      const inlet = s.tempsC[0] ?? null
      const first = r.thermos[0]
      if (slow) push(r.inlet, inlet === null || first === undefined || r.thermos.length < 2 ? null : inlet - first.c)
      for (let n = 0; n < r.inlet.v.length; n++) doubt = Math.max(doubt, ago(r.inlet, n) ?? 0)
    }
    for (let j = 0; j < r.thermos.length; j++) {
      const th = r.thermos[j] as Thermo
      const t = s.tempsC[j] ?? null
      if (gap) {
        restart(th.series)
        th.excess.ok.fill(0)
        th.temps.ok.fill(0)
      }
      push(th.temps, t)
      push(th.excess, t === null || !usable ? null : t - base - explained(th, h))
      const x = meanOf(th.excess, p.smooth)
      const ready = x !== null && s.armed && usable && th.level.n >= 4 && !(bare && j === 0 && r.thermos.length > 1)
      if (ready) {
        const gain = bare ? highest - coldest : Math.abs(th.c - th.o)
        const offset = bare ? 0 : d.offsetSds * Math.sqrt(th.level.poo) * Math.abs(r.h - 1)
        const allow = doubt + d.flowShare * gain * common + offset
        test(f, th.series, x, d.oneK, allow, s.ratioHigh === true, 'thermocouple')
        f.sum += x
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
    if (f.n > 1) test(f, r.mean, f.meanK, d.meanK, f.allow / f.n, s.ratioHigh === true, 'reactor')
    remember(r.mean, f.n > 0 ? f.meanK : null, slow && s.armed && !r.over)
    if (gap) clearHubJones(r.runaway)
    const quietFlow = Math.abs(r.hFast - r.hSlow) < 0.015 && r.unseenH === 0
    if (!quietFlow || (coolant !== null && Math.abs(coolant.lastC - (coolant.f[4] as number)) > 0.6))
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

  /** One series against its thresholds. */
  function test(
    f: Finding,
    series: Series,
    x: number,
    leastK: number,
    allow: number,
    ratioHigh: boolean,
    of: 'thermocouple' | 'reactor' | 'all',
  ): void {
    const share = ratioHigh ? d.ratioHighShare : 1
    const level = share * Math.max(leastK, d.sds * series.sdK) + allow
    const rise = share * Math.max(d.riseK, d.sds * series.sdK) + allow
    const risen = riseK(series, p, x)
    const high = x > level
    const up = risen !== null && risen > rise
    series.high = high || up ? series.high + 1 : 0
    if (series.high >= 2) speak(f, high ? 'excess' : 'rise')
    if (x > 0.5 * level) f.under = false
    if (x - level > f.excessK - f.thresholdK) {
      f.excessK = x
      f.thresholdK = level
      f.of = of
      f.nearest = series
    }
    const coldBy = d.coldShare * Math.max(leastK, d.sds * series.sdK) + allow
    series.low = x < -coldBy ? series.low + 1 : 0
    if (series.low * config.scanS >= d.coldS && series.low >= 2) f.cold = true
  }

  function conclude(f: Finding, i: number, tMs: number, s: ReactorScan, found: readonly Finding[]): ExothermVerdict {
    const r = state.reactors[i] as Reactor
    const known = f.n > 0
    const over = known && f.detector !== null
    if (over && !r.over) r.startMs = began(f, tMs)
    r.over = over
    const line = f.hottest === null ? null : lineOf((r.thermos[f.hottest] as Thermo).temps, p.rise[0], config.scanS)
    return {
      over: known ? over : null,
      under: known && f.under && !over,
      excessC: known ? f.excessK : null,
      thresholdC: known ? f.thresholdK : null,
      of: f.of,
      detector: f.detector,
      ratePerS: line?.slopePerS ?? null,
      ratePerSSe: line?.seS ?? null,
      hottest: f.hottest,
      hotSpotC: f.hotSpotC,
      hotSpot: f.hotSpot,
      runaway: f.runaway,
      cold: f.cold,
      cause: over ? causeOf(i, r, s, found) : null,
      startMs: over ? r.startMs : null,
    }
  }

  /** Back along the series that is nearest its threshold, to where it was a fifth of what it is now, or at zero. */
  function began(f: Finding, tMs: number): number {
    const s = f.nearest
    if (s === null) return tMs
    const least = Math.max(0, 0.2 * f.excessK)
    const stepMs = config.scanS * 1000
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

  function causeOf(i: number, r: Reactor, s: ReactorScan, found: readonly Finding[]): ExothermCause {
    if (s.ratioHigh === true) return 'dosing'
    if (Math.abs(r.hFast - r.hSlow) > 0.02) return 'flow'
    const name = config.reactors[i]?.coolant ?? null
    if (name === null) return 'reaction'
    const coolant = state.coolants[name] as Coolant
    if (Math.abs(coolant.lastC - (coolant.f[coolant.best] as number)) > 0.5) return 'coolant'
    const others = found.some((f, k) => k !== i && config.reactors[k]?.coolant === name && f.n > 0 && f.meanK > 0.14)
    return others ? 'coolant' : 'reaction'
  }

  function endBlock(scans: readonly ReactorScan[], tMs: number): void {
    const blockS = (tMs - state.blockMs) / 1000
    state.blockMs = tMs
    const means: Record<string, number | null> = {}
    for (const name of Object.keys(state.coolants)) means[name] = coolantBlock(state.coolants[name] as Coolant)
    for (let i = 0; i < config.reactors.length; i++) {
      const rc = config.reactors[i] as ReactorConfig
      const r = state.reactors[i] as Reactor
      const s = scans[i] as ReactorScan
      const base = rc.coolant === null ? 0 : (means[rc.coolant] ?? null)
      if (s.armed && r.refKgS === 0 && r.flowN > 0) setReference(r)
      // A stop of over 8 min changes what is normal: the level starts anew, offsets stay.
      if (!s.production) r.outS += blockS
      const anew = s.production && r.outS > 480
      if (s.production) r.outS = 0
      for (const th of r.thermos) {
        const mean = th.n === 0 ? null : th.sum / th.n
        push(th.blocks, mean)
        if (anew) {
          th.level.n = 0
          th.level.pcc = 1
          th.level.pco = 0
        }
        if (mean !== null && base !== null && s.production) {
          learn(th.level, mean - base, rc.coolant === null || r.hN === 0 ? 1 : r.hSum / r.hN, blockS, !s.armed)
          if (rc.coolant !== null && !r.over) weighLags(state.coolants[rc.coolant] as Coolant, th.blocks)
        }
        th.c = s.armed && r.wasArmed ? th.nextC : th.level.c
        th.o = s.armed && r.wasArmed ? th.nextO : th.level.o
        th.nextC = th.level.c
        th.nextO = th.level.o
        th.sum = 0
        th.n = 0
      }
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

  return { scan, state }
}

interface Finding {
  sum: number
  allow: number
  n: number
  meanK: number
  hottest: number | null
  hottestK: number
  hotSpot: number | null
  hotSpotC: number | null
  excessK: number
  thresholdK: number
  of: 'thermocouple' | 'reactor' | 'all' | null
  nearest: Series | null
  detector: ExothermDetector | null
  under: boolean
  runaway: boolean
  cold: boolean
}

const noFinding = (): Finding => ({
  sum: 0,
  allow: 0,
  n: 0,
  meanK: 0,
  hottest: null,
  hottestK: Number.NEGATIVE_INFINITY,
  hotSpot: null,
  hotSpotC: null,
  excessK: 0,
  thresholdK: 1e9,
  of: null,
  nearest: null,
  detector: null,
  under: true,
  runaway: false,
  cold: false,
})

/** excess outranks rise outranks runaway: the plainest of those that speak is named. */
function speak(f: Finding, by: ExothermDetector): void {
  const rank = { excess: 2, rise: 1, runaway: 0 }
  if (f.detector === null || rank[by] > rank[f.detector]) f.detector = by
}

/** The limiting feed of this scan through its lags, over the reference. */
function feed(r: Reactor, rc: ReactorConfig, s: ReactorScan, gap: boolean, alphas: readonly number[]): void {
  const flow = s.flowsKgS[rc.limiting ?? 0] ?? null
  if (flow === null || !s.production) return
  r.flowSum += flow
  r.flowN++
  if (r.refKgS === 0) return
  const now = flow / r.refKgS
  if (r.unseenH > 0) r.unseenH = r.unseenH < 1e-4 ? 0 : r.unseenH * (1 - (alphas[0] as number))
  if (gap) r.unseenH += Math.abs(now - r.hNow)
  r.hNow = now
  r.h += (now - r.h) * (alphas[0] as number)
  r.hFast += (now - r.hFast) * (alphas[1] as number)
  r.hSlow += (now - r.hSlow) * (alphas[2] as number)
  r.hLong += (now - r.hLong) * (alphas[3] as number)
  r.hSum += r.h
  r.hN++
}

/** The feed of the block in which the reactor is first armed is the reference from then on. */
function setReference(r: Reactor): void {
  const mean = r.flowSum / r.flowN
  if (mean > 0) r.refKgS = mean
}

const hubJonesConfig = (scanS: number): HubJonesConfig => ({ scanS, windowS: 20, holdS: 8, leastRiseK: 0.5, leastRateKS: 0.02 })

function freshWatch(config: WatchConfig): WatchState {
  const p = pace(config.scanS)
  const coolants: Record<string, Coolant> = {}
  for (const { coolant } of config.reactors) if (coolant !== null) coolants[coolant] ??= freshCoolant()
  const thermo = (): Thermo => ({
    level: freshLevel(),
    c: 0,
    o: 0,
    nextC: 0,
    nextO: 0,
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
      unseenH: 0,
      outS: 0,
      wasArmed: false,
      inlet: ring(rc.coolant === null ? 90 : 1),
      coldS: 0,
      over: false,
      startMs: 0,
      runaway: freshHubJones(hubJonesConfig(config.scanS)),
    }),
  )
  return { lastMs: 0, scans: 0, blockMs: 0, coolants, reactors, all: freshSeries(p) }
}
