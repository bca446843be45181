import { MonitorError } from '../errors.ts'

export type Arrangement = 'counterflow' | 'parallel' | 'isothermal'

/**
 * Effectiveness of an exchanger ε = Q/Q_max [-], NTU = UA/C_min, C_r = C_min/C_max [-] (0 where the other side is isothermal):
 *   counterflow (1 − e^(−NTU(1−C_r))) / (1 − C_r e^(−NTU(1−C_r))), NTU/(1+NTU) at C_r = 1;  parallel (1 − e^(−NTU(1+C_r)))/(1 + C_r);  isothermal 1 − e^−NTU
 * Exact for constant U and heat capacities. Source: W. M. Kays, A. L. London, Compact Heat Exchangers.
 * Errors: THERMAL_RANGE unless NTU ≥ 0 and 0 ≤ C_r ≤ 1.
 */
export function effectiveness(arrangement: Arrangement, ntu: number, capacityRatio: number): number {
  if (!(ntu >= 0 && capacityRatio >= 0 && capacityRatio <= 1))
    throw new MonitorError('THERMAL_RANGE', `effectiveness needs NTU ≥ 0 and 0 ≤ Cr ≤ 1, got ${ntu}, ${capacityRatio}`)
  if (arrangement === 'isothermal') return -Math.expm1(-ntu)
  if (arrangement === 'parallel') return -Math.expm1(-ntu * (1 + capacityRatio)) / (1 + capacityRatio)
  const rest = 1 - capacityRatio
  if (rest < 1e-9) return ntu / (1 + ntu)
  const e = Math.expm1(-ntu * rest)
  return -e / (rest - capacityRatio * e)
}

/**
 * Logarithmic mean temperature difference (ΔT1 − ΔT2)/ln(ΔT1/ΔT2) [K] of the differences at the two ends; null where the ends differ in
 * sign or one is below 1 µK, because temperatures no longer carry it there.
 */
export function lmtd(dT1K: number, dT2K: number): number | null {
  if (Math.sign(dT1K) !== Math.sign(dT2K) || Math.min(Math.abs(dT1K), Math.abs(dT2K)) < 1e-6) return null
  const q = Math.log(dT1K / dT2K)
  return Math.abs(q) < 1e-6 ? (dT1K + dT2K) / 2 : (dT1K - dT2K) / q
}

export interface ExchangerInput {
  readonly arrangement: Arrangement
  /** Heat-capacity flows m·cp, W/K; null where that side stays at its temperature. */
  readonly hotWK: number
  readonly coldWK: number | null
  readonly hotInK: number
  readonly coldInK: number
  readonly uaWK: number
}

export interface ExchangerResult {
  readonly ntu: number
  readonly capacityRatio: number
  readonly effectiveness: number
  readonly dutyW: number
  readonly hotOutK: number
  readonly coldOutK: number
  readonly lmtdK: number | null
}

/** Duty and outlet temperatures of an exchanger by effectiveness-NTU; "hot" may be the colder one, the duty is then negative. */
export function exchanger(x: ExchangerInput): ExchangerResult {
  const cold = x.arrangement === 'isothermal' ? null : x.coldWK
  if (!(x.hotWK > 0 && (cold === null || cold > 0) && x.uaWK >= 0))
    throw new MonitorError('THERMAL_RANGE', 'exchanger needs positive heat-capacity flows and UA ≥ 0')
  const cMin = Math.min(x.hotWK, cold ?? Number.POSITIVE_INFINITY)
  const ratio = cold === null ? 0 : cMin / Math.max(x.hotWK, cold)
  const ntu = x.uaWK / cMin
  const eps = effectiveness(cold === null ? 'isothermal' : x.arrangement, ntu, ratio)
  const dutyW = eps * cMin * (x.hotInK - x.coldInK)
  const hotOutK = x.hotInK - dutyW / x.hotWK
  const coldOutK = cold === null ? x.coldInK : x.coldInK + dutyW / cold
  const ends =
    x.arrangement === 'parallel' ? [x.hotInK - x.coldInK, hotOutK - coldOutK] : [x.hotInK - coldOutK, hotOutK - x.coldInK]
  return { ntu, capacityRatio: ratio, effectiveness: eps, dutyW, hotOutK, coldOutK, lmtdK: lmtd(ends[0] ?? 0, ends[1] ?? 0) }
}

/**
 * Overall coefficient from live readings of a tube without reaction against a coolant of one temperature:
 *   U = (m cp / A) ln((T_in − T_c)/(T_out − T_c))   [W/(m² K)]
 * m flow [kg/s], cp [J/(kg K)], A inner area [m²], temperatures [K]. `low` and `high` follow from the readings' standard uncertainty
 * `uK` on each difference (first order). Null where the outlet has come within 3 uK of the coolant (or passed it): the reading carries no U.
 */
export function uFromReadings(
  massFlowKgS: number,
  cpJKgK: number,
  areaM2: number,
  inK: number,
  outK: number,
  coolantK: number,
  uK: number,
): { readonly uWM2K: number; readonly low: number; readonly high: number } | null {
  const a = inK - coolantK
  const b = outK - coolantK
  if (!(massFlowKgS > 0 && areaM2 > 0) || a * b <= 0 || Math.abs(b) <= 3 * uK || Math.abs(a) <= Math.abs(b)) return null
  const scale = (massFlowKgS * cpJKgK) / areaM2
  const u = scale * Math.log(a / b)
  const err = scale * Math.hypot(uK / a, uK / b)
  return { uWM2K: u, low: Math.max(0, u - 2 * err), high: u + 2 * err }
}
