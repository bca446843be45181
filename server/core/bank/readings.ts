import type { Layout } from '../derive/layout.ts'
import { type BankState, whiteVar } from './bank-state.ts'
import { type Disturbances, rowOf, type SegmentObservation, type StateMap } from './model.ts'

/** Below this a shift is as good as its tangent, ln ΔP. */
const leastBend = 0.03

/** What the bank makes of one reading: less what is known of its taps, against what clean would show, and how noisy. Changes `s` and `f` in place. */
export function createReadings(bank: {
  readonly layout: Layout
  readonly map: StateMap
  readonly f: { readonly x: Float64Array; readonly p: Float64Array }
  readonly s: BankState
  readonly d: Disturbances
}) {
  const { layout, map, f, s, d } = bank

  /** An observation less what is known of the taps' zeros. Null where nothing would be left. */
  function corrected(seg: number, o: SegmentObservation): SegmentObservation | null {
    const shifts = s.tapShiftPa
    if (shifts === undefined) return o
    const { tapIn, tapOut } = layout.segments[seg]!
    const offPa = (tapIn === null ? 0 : shifts[tapIn]!) - (tapOut === null ? 0 : shifts[tapOut]!)
    if (offPa === 0) return o
    const dpPa = o.dpPa - offPa
    return dpPa <= 0 ? null : { ...o, dpPa, y: o.y + Math.log(dpPa / o.dpPa) }
  }

  /**
   * ΔP by which a shift of so many Pa shows in ln ΔP: the logarithmic mean of what it was and what it is, Δ ln ΔP = Δ/L, L = ΔP (1 − e^−r)/r with r
   * how far ln ΔP is off. The tangent, ΔP itself, would take half a small ΔP for a third.
   */
  function dpOfShift(seg: number, o: SegmentObservation): number {
    const r = o.y - meanWithoutWander(seg, o)
    return Math.abs(r) < leastBend ? o.dpPa : (o.dpPa * -Math.expm1(-r)) / r
  }

  function meanWithoutWander(seg: number, o: SegmentObservation): number {
    const t = s.tracks[seg]!
    const row = rowOf(layout, map, seg, o, s.tapStartPa)
    let mean = 0
    for (let i = 0; i < row.index.length; i++) {
      const k = row.index[i]!
      if (k === map.wander(seg)) continue
      const x =
        t.clean === null
          ? f.x[k]!
          : k === map.level(seg)
            ? t.clean.c
            : k === map.flowExp(seg)
              ? t.clean.a
              : k === map.viscExp(seg)
                ? t.clean.k
                : f.x[k]!
      mean += row.value[i]! * x
    }
    return mean
  }

  /** Variance of ln ΔP of this step: white, and what a move of flow or temperature adds. */
  function noise(seg: number, o: SegmentObservation): number {
    const t = s.tracks[seg]!
    const dVisc = t.lastLnVisc === null ? 0 : Math.abs(o.lnVisc - t.lastLnVisc)
    const dFlow = t.lastLnFlow === null ? 0 : Math.abs(o.lnFlow - t.lastLnFlow)
    t.viscMove = Math.max(dVisc, 0.7 * t.viscMove)
    t.lnViscMean += (o.lnVisc - t.lnViscMean) / Math.min(60, t.seen + 1)
    if (Math.abs(o.lnVisc - t.lnViscMean) > 0.03) f.p[map.wander(seg) * map.size + map.wander(seg)]! += 1.5e-4 * dVisc
    t.lastLnVisc = o.lnVisc
    t.lastLnFlow = o.lnFlow
    if (dFlow > 0.015 || dVisc > 0.01) s.sinceMove = 0
    return (
      whiteVar(t, o.dpPa) +
      (d.thermalLag * t.viscMove) ** 2 +
      (d.flowMove * dFlow) ** 2 +
      (d.profileSpread * o.k0 * o.profileSpreadK) ** 2
    )
  }

  /** White noise from first differences of y less flow and viscosity: running mean over 30 steps, clipped at six times. In Pa. */
  function learnNoise(seg: number, o: SegmentObservation): void {
    const t = s.tracks[seg]!
    const residual = o.y - f.x[map.flowExp(seg)]! * o.lnFlow - f.x[map.viscExp(seg)]! * o.lnVisc
    if (t.lastResidual !== null && s.sinceMove > 2) {
      const v = ((residual - t.lastResidual) ** 2 / 2) * o.dpPa ** 2
      t.noiseSteps = Math.min(t.noiseSteps + 1, 30)
      t.noisePa2 += (Math.min(v, 36 * t.noisePa2) - t.noisePa2) / Math.max(t.noiseSteps, 3)
    }
    t.lastResidual = residual
  }

  /**
   * The zeros of ΔP were learnt at standstill and have moved by so much, Pa by segment: what they take of a tap's shift is theirs from now on, or it
   * would be taken off twice.
   */
  function rested(byPa: readonly number[]): void {
    const shifts = s.tapShiftPa
    if (shifts === undefined) return
    layout.taps.forEach((t, i) => {
      const shift = shifts[i]!
      if (shift === 0) return
      const moves = [...t.inletOf.map((g) => byPa[g]!), ...t.outletOf.map((g) => -byPa[g]!)]
      const left = shift - moves.reduce((a, b) => a + b, 0) / moves.length
      shifts[i] = shift > 0 ? Math.min(shift, Math.max(0, left)) : Math.max(shift, Math.min(0, left))
    })
  }

  return { corrected, dpOfShift, meanWithoutWander, noise, learnNoise, rested }
}
