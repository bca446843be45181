import { MonitorError } from '../errors.ts'
import { risingRoot } from '../hydraulics/branches.ts'

export type ThermocoupleType = 'K' | 'T'

/** Coefficients of E = Σ c_i t^i [mV], t [°C], below and above 0 °C, with the range they hold for. */
const reference: Readonly<
  Record<ThermocoupleType, { readonly below: readonly number[]; readonly above: readonly number[]; readonly highC: number }>
> = {
  K: {
    below: [
      0, 0.039450128025, 2.3622373598e-5, -3.2858906784e-7, -4.9904828777e-9, -6.7509059173e-11, -5.7410327428e-13,
      -3.1088872894e-15, -1.0451609365e-17, -1.9889266878e-20, -1.6322697486e-23,
    ],
    above: [
      -0.017600413686, 0.038921204975, 1.8558770032e-5, -9.9457592874e-8, 3.1840945719e-10, -5.6072844889e-13, 5.6075059059e-16,
      -3.2020720003e-19, 9.7151147152e-23, -1.2104721275e-26,
    ],
    highC: 1372,
  },
  T: {
    below: [
      0, 0.038748106364, 4.4194434347e-5, 1.1844323105e-7, 2.0032973554e-8, 9.0138019559e-10, 2.2651156593e-11, 3.6071154205e-13,
      3.8493939883e-15, 2.8213521925e-17, 1.4251594779e-19, 4.8768662286e-22, 1.079553927e-24, 1.3945027062e-27, 7.9795153927e-31,
    ],
    above: [
      0, 0.038748106364, 3.329222788e-5, 2.0618243404e-7, -2.1882256846e-9, 1.0996880928e-11, -3.0815758772e-14, 4.547913529e-17,
      -2.7512901673e-20,
    ],
    highC: 400,
  },
}
/** The magnetic hump of type K above 0 °C, a0 exp(a1 (t − a2)²) [mV]. */
const hump = [0.1185976, -0.0001183432, 126.9686] as const
const lowC = -270
/** Rounding of the sums at the ends of the tables, mV; terms of the polynomial for T at −200 °C cancel to this. */
const roundingMv = 1e-9

function refuse(type: ThermocoupleType, tempC: number): void {
  const { highC } = reference[type]
  if (!(tempC >= lowC && tempC <= highC))
    throw new MonitorError('CONFIG_RANGE', `type ${type} has no table at ${tempC} °C: it is known from ${lowC} to ${highC} °C`)
}

/**
 * Electromotive force of a thermocouple against 0 °C, E(t) [mV]; type K −270 to 1372 °C, T −270 to 400 °C.
 *   E = Σ c_i t^i, for K above 0 °C with a0 exp(a1 (t − a2)²) more
 * Source: ITS-90 reference functions, NIST Monograph 175 (1993), as in IEC 60584-1; 0.5 µV of the printed tables. Errors: CONFIG_RANGE outside.
 */
export function emfMv(type: ThermocoupleType, tempC: number): number {
  refuse(type, tempC)
  const c = tempC < 0 ? reference[type].below : reference[type].above
  const sum = c.reduceRight((acc, x) => acc * tempC + x, 0)
  return type === 'K' && tempC >= 0 ? sum + hump[0] * Math.exp(hump[1] * (tempC - hump[2]) ** 2) : sum
}

/** Temperature of an EMF against 0 °C [°C], the exact inverse of `emfMv` from −200 °C (below it E is flat). Errors: CONFIG_RANGE outside. */
export function tempOfEmf(type: ThermocoupleType, mV: number): number {
  const { highC } = reference[type]
  const low = -200
  if (!(mV >= emfMv(type, low) - roundingMv && mV <= emfMv(type, highC) + roundingMv))
    throw new MonitorError('CONFIG_RANGE', `${mV} mV is no EMF of type ${type} from ${low} to ${highC} °C`)
  return risingRoot((t) => emfMv(type, t) - mV, low, highC)
}

/**
 * What a reading is off by when the cold junction is taken for `errorK` warmer than it is [K]: the instrument adds E of the wrong junction,
 *   t_read = E⁻¹(E(t) + E(j + e) − E(j)) − t
 * Below 0 °C it is more than errorK, as the wires give less per kelvin there (type K: 1.16 times at −60 °C). All channels of one module shift alike.
 * Errors: CONFIG_RANGE outside the tables.
 */
export function coldJunctionErrorK(type: ThermocoupleType, tempC: number, junctionC: number, errorK: number): number {
  return tempOfEmf(type, emfMv(type, tempC) + emfMv(type, junctionC + errorK) - emfMv(type, junctionC)) - tempC
}
