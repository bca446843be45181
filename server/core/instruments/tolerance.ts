import { leadErrorK } from './pt100.ts'
import { coldJunctionErrorK, type ThermocoupleType } from './thermocouple.ts'

interface Class {
  readonly fixedK: number
  /** Share of |t| [°C]; the larger of the two is the tolerance. */
  readonly share: number
  readonly rangeC: readonly [number, number]
}

/** Tolerances of thermocouple wires, classes 1 to 3. Source: IEC 60584-1 (from memory). */
const classes: Readonly<Record<ThermocoupleType, readonly [Class, Class, Class]>> = {
  K: [
    { fixedK: 1.5, share: 0.004, rangeC: [-40, 1000] },
    { fixedK: 2.5, share: 0.0075, rangeC: [-40, 1200] },
    { fixedK: 2.5, share: 0.015, rangeC: [-200, 40] },
  ],
  T: [
    { fixedK: 0.5, share: 0.004, rangeC: [-40, 350] },
    { fixedK: 1, share: 0.0075, rangeC: [-40, 350] },
    { fixedK: 1, share: 0.015, rangeC: [-200, 40] },
  ],
}

/** Tolerance of a thermocouple of one class [K]; null where the class does not hold. Source: IEC 60584-1 (from memory). */
export function thermocoupleTolerance(type: ThermocoupleType, of: 1 | 2 | 3, tempC: number): number | null {
  const c = classes[type][of - 1]
  if (c === undefined || tempC < c.rangeC[0] || tempC > c.rangeC[1]) return null
  return Math.max(c.fixedK, c.share * Math.abs(tempC))
}

/** Tolerance of a Pt100, class A 0.15 K + 0.002 |t|, B 0.30 K + 0.005 |t| [K]. Source: IEC 60751 (from memory). */
export const pt100Tolerance = (of: 'A' | 'B', tempC: number): number =>
  of === 'A' ? 0.15 + 0.002 * Math.abs(tempC) : 0.3 + 0.005 * Math.abs(tempC)

export interface TemperatureUncertainty {
  /** Standard uncertainty of one reading, K. */
  readonly uK: number
  readonly basis: string
}

/** What an input card adds, common practice: its cold junction to 0.5 K at 25 °C in the cabinet; leads of a Pt100 uneven by 0.1 Ω. */
const card = { junctionC: 25, junctionK: 0.5, leadOhm: 0.1 }
const unknownK = 1
/** Standard deviation of what is known to lie within ± a only: a/√3 (rectangular; JCGM 100:2008, 4.3.7). */
const rectangular = (...a: number[]): number => Math.hypot(...a) / Math.sqrt(3)

/**
 * Standard uncertainty of a temperature reading by its sensor: the tolerance of its class (thermocouples class 1, below −40 °C class 3; Pt100
 * class B, all assumed) and what the input adds, each within ±a. A sensor that the file does not name counts 1 K. Errors: none; beyond a
 * sensor's tables it counts as not named.
 */
export function temperatureUncertainty(sensor: string | null, tempC: number): TemperatureUncertainty {
  const kind = (sensor ?? '')
    .trim()
    .toUpperCase()
    .replace(/^TYPE[ -]?/, '')
  if (kind === 'K' || kind === 'T') {
    const first = thermocoupleTolerance(kind, 1, tempC)
    const tolerance = first ?? thermocoupleTolerance(kind, 3, tempC)
    if (tolerance !== null)
      return {
        uK: rectangular(tolerance, coldJunctionErrorK(kind, tempC, card.junctionC, card.junctionK)),
        basis: `type ${kind}, class ${first === null ? 3 : 1} (±${tolerance.toPrecision(2)} K) and a cold junction to ${card.junctionK} K, assumed`,
      }
  }
  if (kind.startsWith('PT100') && tempC >= -200 && tempC <= 600) {
    const tolerance = pt100Tolerance('B', tempC)
    return {
      uK: rectangular(tolerance, leadErrorK(tempC, card.leadOhm)),
      basis: `Pt100, class B (±${tolerance.toPrecision(2)} K) and leads to ${card.leadOhm} Ω, assumed`,
    }
  }
  return { uK: unknownK, basis: `${sensor === null ? 'sensor not named' : `sensor ${sensor}`}: ${unknownK} K assumed` }
}
