import { MonitorError } from '../errors.ts'
import { risingRoot } from '../hydraulics/branches.ts'

const R0 = 100
const A = 3.9083e-3
const B = -5.775e-7
const C = -4.183e-12
const rangeC = [-200, 850] as const

/**
 * Resistance of a Pt100 [Ω]: R = R0 (1 + A t + B t² + C (t − 100) t³), the last term below 0 °C only; −200 to 850 °C.
 * Source: Callendar and Van Dusen, coefficients of IEC 60751:2008. Errors: CONFIG_RANGE outside.
 */
export function pt100Ohm(tempC: number): number {
  if (!(tempC >= rangeC[0] && tempC <= rangeC[1]))
    throw new MonitorError('CONFIG_RANGE', `a Pt100 has no table at ${tempC} °C: it is known from ${rangeC[0]} to ${rangeC[1]} °C`)
  return R0 * (1 + A * tempC + B * tempC ** 2 + (tempC < 0 ? C * (tempC - 100) * tempC ** 3 : 0))
}

/** Temperature of a resistance [°C], the exact inverse of `pt100Ohm`. Errors: CONFIG_RANGE outside 18.52 to 390.48 Ω. */
export function tempOfPt100(ohm: number): number {
  if (!(ohm >= pt100Ohm(rangeC[0]) && ohm <= pt100Ohm(rangeC[1])))
    throw new MonitorError('CONFIG_RANGE', `${ohm} Ω is no resistance of a Pt100`)
  return risingRoot((t) => pt100Ohm(t) - ohm, rangeC[0], rangeC[1])
}

/** What `extraOhm` of lead resistance that is not compensated adds to a reading [K]; about 0.25 K for 0.1 Ω. Errors: CONFIG_RANGE outside. */
export const leadErrorK = (tempC: number, extraOhm: number): number => tempOfPt100(pt100Ohm(tempC) + extraOhm) - tempC
