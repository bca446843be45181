import { ago, meanOf, push, type Ring, ring } from './ring.ts'

export interface FeedPair {
  /** Stream ids: the ratio is of[0] over of[1]. */
  readonly of: readonly [string, string]
  readonly scanS: number
  /** mol per kg of either feed, and limits in mol/mol; null where concentrations or limits are not known. */
  readonly molPerKg: readonly [number, number] | null
  readonly limits: { readonly low: number; readonly high: number } | null
}

export interface FeedRatioScan {
  readonly tMs: number
  /** Mass flows of the two feeds, kg/s; null is missing or not good. */
  readonly flowsKgS: readonly [number | null, number | null]
  readonly production: boolean
  readonly armed: boolean
}

export interface FeedRatioVerdict {
  /** Off for long enough; null where nothing can be said. */
  readonly over: boolean | null
  readonly under: boolean
  /** Off at this moment, whether or not long enough; lowers the exotherm thresholds. */
  readonly highNow: boolean
  /** Mass ratio over its usual value [-], and the deviation that counts as off [-]. */
  readonly relative: number | null
  readonly allowed: number
  readonly molMol: number | null
  readonly side: 'high' | 'low' | null
  /** Which rule spoke: the limits of the skid file in mol/mol, or the chart against the usual value. */
  readonly detector: 'limit' | 'chart' | null
  /** The feed that moved, 0 or 1; null where neither or both did. */
  readonly moved: 0 | 1 | null
  readonly startMs: number | null
}

export interface FeedRatioState {
  lastMs: number
  scans: number
  readonly flows: readonly [Ring, Ring]
  readonly ratio: Ring
  /** Usual ln(ratio), kg/kg, the samples in it up to 20 min, and its variance. */
  mean: number
  n: number
  variance: number
  /** Since when off to a side (1 high, −1 low, 0 not), and the mean since. */
  side: number
  sinceMs: number
  sinceSum: number
  sinceN: number
  over: boolean
}

const feedRatioDefaults = {
  smoothS: 3,
  windowS: 1200,
  /** Least and greatest deviation that counts as off, and sds between them. */
  least: 0.055,
  most: 0.085,
  sds: 4.5,
  /** Off for so long; or so long where both feeds have moved by more than `movedBy` within the last minute. */
  holdS: 10,
  holdMovedS: 45,
  movedBy: 0.025,
  /** A limit in mol/mol is left again only by so much, share of it: a ratio that rides on its limit is one alarm. */
  deadband: 0.02,
  /** A ratio kept for so long is the new usual one. */
  acceptS: 900,
} as const
const d = feedRatioDefaults

/**
 * Feed ratio of two streams: ln(m0/m1), 3-s means, against its own gated mean of 20 min. Off is more than
 * max(5.5 %, 4.5 sd), 8.5 % at most, for 10 s, or for 45 s where both pumps have moved by more than 2.5 % in the last minute: pumps answer a
 * step at different speeds and the ratio overshoots. An operator who changes one pump by as much is flagged too; without set-points in the log
 * nobody can tell. After 15 min a kept ratio becomes the usual one. With concentrations and limits the ratio in mol/mol
 *
 *   n = (m0 · b0) / (m1 · b1)      m kg/s, b mol/kg
 *
 * is held against them as well, with the same hold. It speaks on either side. State is plain JSON and changes in place.
 * Source: own study of methods on simulated skids. Errors: none.
 */
export function createFeedRatio(pair: FeedPair, state: FeedRatioState = freshFeedRatio(pair.scanS)) {
  const scans = (s: number) => Math.max(1, Math.round(s / pair.scanS))
  const smooth = scans(d.smoothS)
  const minute = scans(60)
  const window = scans(d.windowS)
  const gapMs = 1000 * Math.max(10, 5 * pair.scanS)

  function scan(s: FeedRatioScan): FeedRatioVerdict {
    const gap = state.scans > 0 && s.tMs - state.lastMs > gapMs
    state.lastMs = s.tMs
    state.scans++
    if (gap) for (const r of [...state.flows, state.ratio]) r.ok.fill(0)
    const [a, b] = s.flowsKgS
    const flowing = s.production && a !== null && b !== null && a > 0 && b > 0
    push(state.flows[0], flowing ? Math.log(a) : null)
    push(state.flows[1], flowing ? Math.log(b) : null)
    push(state.ratio, flowing ? Math.log(a / b) : null)
    const now = flowing ? meanOf(state.ratio, smooth) : null
    if (now === null) {
      // Being off starts anew after a gap; what was already said stands until the feeds are seen again.
      state.side = 0
      if (!s.production) release()
      return {
        over: state.over ? null : s.production ? null : false,
        under: !s.production,
        highNow: false,
        relative: null,
        allowed: d.least,
        molMol: null,
        side: null,
        detector: null,
        moved: null,
        startMs: null,
      }
    }
    if (state.n === 0) state.mean = now
    const dev = now - state.mean
    const allowed = Math.min(d.most, Math.max(d.least, d.sds * Math.sqrt(state.variance)))
    const molMol = pair.molPerKg === null ? null : Math.exp(now) * (pair.molPerKg[0] / pair.molPerKg[1])
    const known = s.armed && state.n >= scans(60)
    const beyond = molMol === null || pair.limits === null ? 0 : molMol > pair.limits.high ? 1 : molMol < pair.limits.low ? -1 : 0
    const inside =
      molMol === null ||
      pair.limits === null ||
      (molMol < pair.limits.high * (1 - d.deadband) && molMol > pair.limits.low * (1 + d.deadband))
    const off = beyond !== 0 && s.armed ? beyond : known && Math.abs(dev) > allowed ? Math.sign(dev) : 0
    if (off !== state.side) {
      state.side = off
      state.sinceMs = s.tMs
      state.sinceSum = 0
      state.sinceN = 0
    }
    const first = moveOf(state.flows[0]) > d.movedBy
    const second = moveOf(state.flows[1]) > d.movedBy
    const forS = (s.tMs - state.sinceMs) / 1000 + pair.scanS
    if (off !== 0) {
      state.sinceSum += now
      state.sinceN++
      if (forS >= (first && second ? d.holdMovedS : d.holdS) && state.sinceN >= 2) state.over = true
      if (beyond === 0 && forS >= d.acceptS) {
        state.mean = state.sinceSum / state.sinceN
        release()
      }
    } else {
      state.over = false
      // Gated: what is half way to off is not usual. Before it is armed everything is taken in.
      if (!known || Math.abs(dev) < allowed / 2) learn(dev)
    }
    return {
      over: s.armed ? state.over : null,
      under: Math.abs(dev) < allowed / 2 && inside,
      highNow: known && off === 1,
      relative: Math.exp(dev),
      allowed,
      molMol,
      side: off > 0 ? 'high' : off < 0 ? 'low' : null,
      detector: state.over ? (beyond !== 0 ? 'limit' : 'chart') : null,
      moved: first === second ? null : first ? 0 : 1,
      startMs: state.over ? state.sinceMs : null,
    }
  }

  function learn(dev: number): void {
    state.n = Math.min(window, state.n + 1)
    state.mean += dev / state.n
    const square = Math.min(dev * dev, d.most * d.most)
    state.variance += (square - state.variance) / Math.max(state.n, minute)
  }

  function release(): void {
    state.over = false
    state.side = 0
    state.sinceN = 0
    state.sinceSum = 0
  }

  /** How far a feed has moved within the last minute: now against the furthest of its 3-s means. */
  function moveOf(r: Ring): number {
    const now = meanOf(r, smooth)
    if (now === null) return 0
    let most = 0
    const step = Math.max(1, scans(5))
    for (let n = step; n < r.v.length; n += step) {
      const then = ago(r, n)
      if (then !== null) most = Math.max(most, Math.abs(now - then))
    }
    return most
  }

  return { scan, state }
}

function freshFeedRatio(scanS: number): FeedRatioState {
  const minute = Math.max(2, Math.round(60 / scanS) + 1)
  const smooth = Math.max(1, Math.round(d.smoothS / scanS))
  return {
    lastMs: 0,
    scans: 0,
    flows: [ring(Math.max(minute, smooth)), ring(Math.max(minute, smooth))],
    ratio: ring(smooth),
    mean: 0,
    n: 0,
    variance: 0,
    side: 0,
    sinceMs: 0,
    sinceSum: 0,
    sinceN: 0,
    over: false,
  }
}
