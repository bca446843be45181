import type { Layout } from '../derive/layout.ts'
import { type Disturbances, disturbances, type Row, type SegmentObservation, type StateMap } from './model.ts'

/**
 * One Kalman filter over all segments: x and P as flat arrays (P row-major), updated by one scalar measurement at a time, which for
 * independent measurement errors equals the joint update and keeps the order of every sum fixed, so a replay gives the same bits.
 * Mutable on purpose (D² numbers a measurement). Source: R. E. Kalman, J. Basic Eng. 82 (1960) 35.
 */
export interface FilterState {
  x: Float64Array
  p: Float64Array
}

/** What one measurement did; `gain` is reused by the next call. */
export interface Update {
  readonly innovation: number
  readonly variance: number
  readonly gain: Float64Array
}

/** What a step test taught of a segment before it ran: its zero was read at standstill; how far its flow exponent lies above the hydraulics'. */
export interface KnownSegment {
  readonly zeroChecked: boolean
  readonly flowExponent: { readonly over: number; readonly sd: number } | null
}
export const nothingKnown: KnownSegment = { zeroChecked: false, flowExponent: null }

export function createFilter(layout: Layout, map: StateMap, d: Disturbances = disturbances) {
  const n = map.size
  const gain = new Float64Array(n)
  const tapIsDrifting = new Uint8Array(layout.taps.length)
  return {
    fresh(): FilterState {
      const f = { x: new Float64Array(n), p: new Float64Array(n * n) }
      map.tapGain.forEach((i) => {
        f.p[i * n + i] = d.tapGain ** 2
      })
      map.meter.forEach((i) => {
        f.p[i * n + i] = d.meter ** 2
      })
      return f
    },

    /**
     * Sets a segment's own states to their prior at its first observation: level at y, exponents by three independent causes. An exponent of flow
     * that a step test measured is then taken as one more reading of that state, which moves the viscosity's along by their covariance.
     */
    startSegment(f: FilterState, s: number, o: SegmentObservation, known: KnownSegment = nothingKnown): void {
      const c = map.level(s)
      const a = map.flowExp(s)
      const k = map.viscExp(s)
      const w = map.wander(s)
      for (const i of [c, a, k, w]) for (let j = 0; j < n; j++) f.p[i * n + j] = f.p[j * n + i] = 0
      const seg = layout.segments[s]!.spec
      const slope = seg.temperatures.length === 1 && seg.kind === 'precooler' ? d.viscositySlopeOneThermocouple : d.viscositySlope
      // On a ΔP of the size of its own zero error the exponents stay near the hydraulics: noise must not teach them.
      const zero = Math.min(d.zeroShareAtMost, (known.zeroChecked ? d.zeroOffsetCheckedPa : d.zeroOffsetPa) / o.dpPa)
      const fit = d.coilAndFittings
      f.x[c] = o.y
      f.x[a] = f.x[k] = f.x[w] = 0
      f.p[c * n + c] = d.levelStart ** 2
      f.p[a * n + a] = fit ** 2 + (o.n0 * zero) ** 2
      f.p[k * n + k] = fit ** 2 + (o.k0 * zero) ** 2 + (o.k0 * slope) ** 2
      f.p[a * n + k] = f.p[k * n + a] = -(fit ** 2) + o.n0 * o.k0 * zero ** 2
      f.p[w * n + w] = wanderVar(o.dpPa, d)
      const { flowExponent } = known
      if (flowExponent !== null) this.update(f, { index: [a], value: [1] }, flowExponent.over, flowExponent.sd ** 2)
    },

    /** New doubt about one level after a stop; the level itself and the exponents stay. */
    restartLevel(f: FilterState, s: number, sd: number): void {
      const c = map.level(s)
      const w = map.wander(s)
      for (const i of [c, w]) for (let j = 0; j < n; j++) f.p[i * n + j] = f.p[j * n + i] = 0
      f.x[w] = 0
      f.p[c * n + c] = sd ** 2
      f.p[w * n + w] = d.wander ** 2
    },

    /** Time update over `hours`; `drifting` taps walk faster. */
    advance(f: FilterState, hours: number, dpPa: readonly (number | null)[], drifting: readonly boolean[]): void {
      const { x, p } = f
      for (let t = 0; t < tapIsDrifting.length; t++) tapIsDrifting[t] = drifting[t] === true ? 1 : 0
      const decay = (i: number, tauH: number, variance: number) => {
        const phi = Math.exp(-hours / tauH)
        x[i]! *= phi
        for (let j = 0; j < n; j++) p[i * n + j]! *= phi
        for (let j = 0; j < n; j++) p[j * n + i]! *= phi
        p[i * n + i]! += variance * (1 - phi * phi)
      }
      for (let s = 0; s < layout.segments.length; s++) {
        p[map.level(s) * n + map.level(s)]! += d.levelWalk ** 2 * hours
        decay(map.wander(s), d.wanderTauH, wanderVar(dpPa[s] ?? null, d))
      }
      map.tapZero.forEach((i, t) => {
        if (i >= 0) p[i * n + i]! += (tapIsDrifting[t] === 1 ? d.tapDriftingWalkPa : d.tapWalkPa) ** 2 * hours
      })
      for (const i of map.meter) decay(i, d.meterTauH, d.meter ** 2)
      for (const i of map.visc) p[i * n + i]! += d.viscosityWalk ** 2 * hours
    },

    /** Predicted value of a row and its variance without measurement noise. */
    predict(f: FilterState, row: Row): { mean: number; variance: number } {
      let mean = 0
      let variance = 0
      for (let i = 0; i < row.index.length; i++) {
        mean += row.value[i]! * f.x[row.index[i]!]!
        for (let j = 0; j < row.index.length; j++)
          variance += row.value[i]! * row.value[j]! * f.p[row.index[i]! * n + row.index[j]!]!
      }
      return { mean, variance }
    },

    update(f: FilterState, row: Row, y: number, noiseVar: number): Update {
      const { x, p } = f
      let mean = 0
      gain.fill(0)
      for (let i = 0; i < row.index.length; i++) {
        const k = row.index[i]!
        const v = row.value[i]!
        mean += v * x[k]!
        for (let j = 0; j < n; j++) gain[j]! += p[k * n + j]! * v
      }
      let variance = noiseVar
      for (let i = 0; i < row.index.length; i++) variance += row.value[i]! * gain[row.index[i]!]!
      const innovation = y - mean
      for (let i = 0; i < n; i++) {
        const gi = gain[i]! / variance
        if (gi === 0) continue
        x[i]! += gi * innovation
        for (let j = 0; j < n; j++) p[i * n + j]! -= gi * gain[j]!
      }
      for (let j = 0; j < n; j++) gain[j]! /= variance
      return { innovation, variance, gain }
    },

    /** Takes an accepted explanation out: x − F·A, P + F·Fᵀ/J. */
    compensate(f: FilterState, column: Float64Array, size: number, information: number): void {
      for (let i = 0; i < n; i++) {
        f.x[i]! -= column[i]! * size
        for (let j = 0; j < n; j++) f.p[i * n + j]! += (column[i]! * column[j]!) / information
      }
    },
  }
}
export type Filter = ReturnType<typeof createFilter>

/** Variance of the slow wander of ln ΔP: a share of ΔP and a few mbar that weigh on a small one. */
export function wanderVar(dpPa: number | null, d: Disturbances = disturbances): number {
  return d.wander ** 2 + (dpPa === null ? 0 : (d.wanderPa / dpPa) ** 2)
}
