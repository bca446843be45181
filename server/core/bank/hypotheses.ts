import type { Layout } from '../derive/layout.ts'
import type { StateMap } from './model.ts'

/**
 * Competing explanations of a change, each born at a step and pushed through the very filter that judges it (Willsky and Jones,
 * IEEE Trans. Autom. Control 21 (1976) 108; window-limited: Lai, J. R. Stat. Soc. B 57 (1995) 613). For a signature a(t) of unit size:
 *
 *   G = a − H·F     d ← d + G·r/S     J ← J + G²/S     F ← Φ·(F + K·G)     size A = d/J, log likelihood ratio L = d²/2J
 *
 * r, S, K  innovation, its variance and the gain of the filter.   F  what the filter would have learnt wrongly of a unit disturbance.
 */
export type Kind = 'deposit' | 'step' | 'settling' | 'tap-ramp' | 'tap-step' | 'stream'

export interface Explanation {
  readonly kind: Kind
  /** Segment, tap or stream, by kind. */
  readonly of: number
}

export interface Column {
  readonly kind: Kind
  readonly of: number
  /** Sd of the size that is believable, in the column's own unit (of the whole shift, for a ramp). */
  readonly scale: number
  /** Step number of its birth. */
  readonly born: number
  readonly response: Float64Array
  d: number
  j: number
}

/**
 * Log likelihood ratio, the size held to what is believable: L = d²/(2(J + 1/s²)), s the sd of sizes of this kind. A tap that would have to be
 * off by more than instruments drift, or a liquid that doubled its viscosity, explains nothing however well its shape fits.
 */
export function likelihood(c: Column, now: number): number {
  if (c.j <= 0) return 0
  const s = c.kind === 'tap-ramp' ? c.scale / Math.max(1, now - c.born) : c.scale
  return (c.d * c.d) / (2 * (c.j + 1 / (s * s)))
}
export const sizeOf = (c: Column): number => (c.j > 0 ? c.d / c.j : 0)

/** Believable sizes: share of a tap's span, ln viscosity of a stream, lone step of ln ΔP. A deposit may grow at any rate. Starting values. */
export const believable = { tapShare: 0.005, assumedSpanPa: 2.5e6, stream: 0.08, step: 0.1 }
export type Believable = typeof believable

function scaleOf(layout: Layout, e: Explanation, sizes: Believable): number {
  switch (e.kind) {
    case 'deposit':
      return Number.MAX_VALUE
    case 'step':
    case 'settling':
      return sizes.step
    case 'stream':
      return sizes.stream
    default:
      return (sizes.tapShare * (layout.taps[e.of]!.spanPa ?? sizes.assumedSpanPa)) / 1000
  }
}

/** Steps between births; how long births live, by thinning: all, every 4th, every 12th, none. */
export const births = { after: 4, every: 2, all: 30, fourth: 120, twelfth: 400 }
/** A level or a viscosity settles within about two steps. */
const settleSteps = 2
/** Share settled by age, as far as births live: every column asks at every step. */
const settled = Float64Array.from({ length: 512 }, (_, age) => 1 - Math.exp(-age / settleSteps))
const settledAt = (age: number): number => settled[age] ?? 1 - Math.exp(-age / settleSteps)

export function explanations(layout: Layout): Explanation[] {
  const list: Explanation[] = []
  layout.segments.forEach((_, s) => {
    list.push({ kind: 'deposit', of: s }, { kind: 'step', of: s }, { kind: 'settling', of: s })
  })
  layout.taps.forEach((_, t) => {
    list.push({ kind: 'tap-ramp', of: t }, { kind: 'tap-step', of: t })
  })
  layout.streams.forEach((_, i) => {
    list.push({ kind: 'stream', of: i })
  })
  return list
}

/** Signature of a unit disturbance on segment `s`, `age` steps after its birth; deposit and ramp grow by 1 a step. */
function signature(
  layout: Layout,
  c: Explanation,
  s: number,
  age: number,
  o: { dpPa: number; k0: number; share: readonly number[] },
): number {
  const seg = layout.segments[s]!
  switch (c.kind) {
    case 'deposit':
      return c.of === s ? age : 0
    case 'step':
      return c.of === s ? 1 : 0
    case 'settling':
      return c.of === s ? settledAt(age) : 0
    case 'tap-ramp':
    case 'tap-step': {
      const sign = seg.tapIn === c.of ? 1 : seg.tapOut === c.of ? -1 : 0
      // In units of 1000 Pa, so that sizes of all kinds have like magnitudes.
      return sign === 0 ? 0 : ((sign * 1000) / o.dpPa) * (c.kind === 'tap-ramp' ? age : 1)
    }
    case 'stream':
      return seg.streams.includes(c.of) ? o.k0 * o.share[c.of]! * settledAt(age) : 0
  }
}

/** Whether a birth of this age still has a place in the bank. */
export function isKept(age: number, born: number): boolean {
  if (age <= births.all) return true
  if (age <= births.fourth) return born % (4 * births.every) === 0
  return age <= births.twelfth && born % (12 * births.every) === 0
}

/** Gives every explanation that can touch a watched segment a new column. */
export function giveBirth(
  layout: Layout,
  columns: Column[],
  list: readonly Explanation[],
  now: number,
  map: StateMap,
  isWatched: (e: Explanation) => boolean,
  sizes: Believable = believable,
): void {
  for (const e of list)
    if (isWatched(e))
      columns.push({
        kind: e.kind,
        of: e.of,
        scale: scaleOf(layout, e, sizes),
        born: now,
        response: new Float64Array(map.size),
        d: 0,
        j: 0,
      })
}

/** One measurement of segment `s` seen by every column. */
export function observe(
  columns: readonly Column[],
  layout: Layout,
  s: number,
  now: number,
  o: { dpPa: number; k0: number; share: readonly number[] },
  row: { index: readonly number[]; value: readonly number[] },
  innovation: number,
  variance: number,
  gain: Float64Array,
): void {
  const n = gain.length
  const index = row.index
  const value = row.value
  for (const c of columns) {
    const f = c.response
    let g = signature(layout, c, s, now - c.born, o)
    for (let i = 0; i < index.length; i++) g -= value[i]! * f[index[i]!]!
    if (g === 0) continue
    c.d += (g * innovation) / variance
    c.j += (g * g) / variance
    for (let i = 0; i < n; i++) f[i]! += gain[i]! * g
  }
}

export interface ColumnState {
  kind: Kind
  of: number
  scale: number
  born: number
  response: number[]
  d: number
  j: number
}
export const saveColumn = (c: Column): ColumnState => ({
  kind: c.kind,
  of: c.of,
  scale: c.scale,
  born: c.born,
  response: Array.from(c.response),
  d: c.d,
  j: c.j,
})
export const loadColumn = (c: ColumnState): Column => ({ ...c, response: Float64Array.from(c.response) })
