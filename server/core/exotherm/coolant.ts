import { ago, push, type Ring, ring } from './ring.ts'

/** Lags tried, s: the wall and the liquid between coolant and thermocouple. */
export const lagsS = [40, 57, 81, 116, 165] as const
/** Used until the data speak. */
const startLag = 2

/**
 * One coolant reading through a bank of first-order lags, and which of them leaves least of the thermocouples' own movement: the sum over
 * thermocouples and blocks of squared 3-min differences of (T − lagged coolant), so far. A wobble of 0.2 K of the cryostat is enough to tell.
 */
export interface Coolant {
  /** Lagged readings, one a lag, °C; meaningless until `on`. */
  readonly f: number[]
  on: boolean
  /** Latest reading, °C, and its time, ms. */
  lastC: number
  lastMs: number
  /** What the coolant may have moved unseen and the lag has not forgotten, K. */
  unseenK: number
  /** Sums over the running block and block means of 3 min and one block. */
  readonly sum: number[]
  n: number
  readonly past: Ring[]
  readonly cost: number[]
  weighed: number
  best: number
}

const pastBlocks = 7

export const freshCoolant = (): Coolant => ({
  f: lagsS.map(() => 0),
  on: false,
  lastC: 0,
  lastMs: 0,
  unseenK: 0,
  sum: lagsS.map(() => 0),
  n: 0,
  past: lagsS.map(() => ring(pastBlocks)),
  cost: lagsS.map(() => 0),
  weighed: 0,
  best: startLag,
})

const leapK = 1.5
const leapKS = 0.1

/** Takes one reading; null, or a leap of more than 1.5 K and 0.1 K/s that has not lasted, leaves the lags where they are. `gapS`: longer than that without a reading is a gap. */
export function coolantScan(s: Coolant, tMs: number, readingC: number | null, gapS: number): void {
  if (readingC === null) return
  if (!s.on) {
    s.f.fill(readingC)
    s.on = true
  } else {
    const dtS = (tMs - s.lastMs) / 1000
    const gap = dtS > gapS
    // No bath does that: not believed until it has stood for as long as a gap, and then only as one.
    if (!gap && Math.abs(readingC - s.lastC) > leapK + leapKS * dtS) return
    // Over a gap the mean of its two ends stands for what was not seen; the move itself stays in doubt until forgotten.
    const driveC = gap ? (readingC + s.lastC) / 2 : readingC
    const share = shares(dtS)
    for (let k = 0; k < lagsS.length; k++) s.f[k] = (s.f[k] as number) + (driveC - (s.f[k] as number)) * (share[k] as number)
    if (s.unseenK > 0) s.unseenK *= Math.exp(-dtS / (lagsS[s.best] as number))
    if (s.unseenK < 1e-6) s.unseenK = 0
    if (gap) s.unseenK += Math.abs(readingC - s.lastC)
  }
  s.lastC = readingC
  s.lastMs = tMs
  for (let k = 0; k < lagsS.length; k++) s.sum[k] = (s.sum[k] as number) + (s.f[k] as number)
  s.n++
}

// The same step nearly every time: five exponentials saved a scan. A cache of a pure function, not state.
let lastS = -1
let last: readonly number[] = []
function shares(dtS: number): readonly number[] {
  if (dtS !== lastS) {
    last = lagsS.map((s) => 1 - Math.exp(-dtS / s))
    lastS = dtS
  }
  return last
}

/**
 * How far the lag in use may be wrong now, K: its difference to its neighbours, and to every other lag that the data do not yet rule out
 * (log likelihood within 2 of the best; overlapping 3-min differences count for a sixth).
 */
export function lagDoubtK(s: Coolant): number {
  const f = s.f[s.best] as number
  const least = s.cost[s.best] as number
  let doubt = 0
  for (let k = 0; k < lagsS.length; k++) {
    const near = Math.abs(k - s.best) <= 1
    const open = near || ((s.cost[k] as number) - least) * s.weighed <= 24 * least
    if (open) doubt = Math.max(doubt, Math.abs((s.f[k] as number) - f))
  }
  return doubt
}

/** Ends a block: pushes the means of the lags and returns the mean of the one in use, null where nothing came. */
export function coolantBlock(s: Coolant): number | null {
  const mean = s.n === 0 ? null : (s.sum[s.best] as number) / s.n
  for (let k = 0; k < lagsS.length; k++) {
    push(s.past[k] as Ring, s.n === 0 ? null : (s.sum[k] as number) / s.n)
    s.sum[k] = 0
  }
  s.n = 0
  return mean
}

/** Weighs the lags by one thermocouple's block means, of which `share` of a move of the coolant does not arrive; squared differences are cut at 1 K² so that an excursion decides nothing. */
export function weighLags(s: Coolant, temps: Ring, share: number): void {
  const now = ago(temps, 0)
  const then = ago(temps, pastBlocks - 1)
  if (now === null || then === null) return
  for (let k = 0; k < lagsS.length; k++) {
    const a = ago(s.past[k] as Ring, 0)
    const b = ago(s.past[k] as Ring, pastBlocks - 1)
    if (a === null || b === null) return
    const d = now - then - (1 - share) * (a - b)
    s.cost[k] = (s.cost[k] as number) + Math.min(1, d * d)
  }
  s.weighed++
}

/** Chooses the lag with least cost; true where that is another than before. */
export function chooseLag(s: Coolant): boolean {
  if (s.weighed < 12) return false
  let best = s.best
  for (let k = 0; k < lagsS.length; k++) if ((s.cost[k] as number) < (s.cost[best] as number)) best = k
  const moved = best !== s.best
  s.best = best
  return moved
}

/** Blocks of temperature that `weighLags` needs. */
export const lagBlocks = pastBlocks
