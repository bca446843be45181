import { type Unit, units } from '../../core/units.ts'

/** Other spellings of the tool's units, folded (no blanks, lower case, ° and µ gone plain). */
const aliases: Readonly<Record<string, Unit>> = {
  '°c': 'degC', c: 'degC', celsius: 'degC', ºc: 'degC', '°f': 'degF', ºf: 'degF', f: 'degF', fahrenheit: 'degF', kelvin: 'K', '°k': 'K',
  barg: 'bar', 'bar(g)': 'bar', psig: 'psi', 'psi(g)': 'psi', kpag: 'kPa', mbarg: 'mbar', hpa: 'mbar', 'n/m2': 'Pa',
  'kg/hr': 'kg/h', kgh: 'kg/h', 'kg·h-1': 'kg/h', 'gr/min': 'g/min', 'ml/m': 'mL/min', 'ml·min-1': 'mL/min', sccm: 'mL/min', 'cm3/min': 'mL/min',
  'cc/min': 'mL/min', 'l/hr': 'L/h', lph: 'L/h', '1/min': 'rpm', 'min-1': 'rpm', 'u/min': 'rpm', 'kg/m^3': 'kg/m3', 'kg/m³': 'kg/m3',
  percent: '%', pct: '%',
} // biome-ignore format: a table

/** Units of the trade that the tool does not take; met in a units row they contradict whatever the skid says. */
const foreign: ReadonlySet<string> = new Set([
  'l/min', 'l/s', 'ml/h', 'ml/s', 'ul/min', 'µl/min', 'μl/min', 'ul/h', 'm3/h', 'm³/h', 'm^3/h', 'gpm', 'kg/min', 'kg/s', 'g/h', 'g/s', 't/h', 'lb/h', 'mg/min',
  'torr', 'mmhg', 'atm', 'inhg', 'inh2o', 'mmh2o', 'mh2o', 'bara', 'bar(a)', 'psia', 'psi(a)', 'kpaa', 'mbara', 'ubar', 'g/cm3', 'g/ml', 'kg/l', 'us/cm', 'µs/cm',
  's/m', 'rps', 'hz', 'rad/s', 'v', 'mv', 'a', 'ppm', 'mg', 't', 'lb', '°r',
]) // biome-ignore format: a table

const folded = new Map<string, Unit>(Object.keys(units).map((u) => [u.toLowerCase(), u as Unit]))

/** What a unit's text means: one of the tool's, a foreign one (`false`), or no unit that is known (`null`). */
export function unitOfText(text: string): Unit | false | null {
  const bare = text
    .trim()
    .replace(/^[[(]\s*(.*?)\s*[\])]$/, '$1')
    .replace(/\s+/g, '')
  // MPa and mPa differ by case alone; the tool has only the former.
  if (bare === 'mPa') return false
  const key = bare.toLowerCase()
  return folded.get(key) ?? aliases[key] ?? (foreign.has(key) ? false : null)
}

/** The unit in brackets at the end of a header, null where there is none. */
export function unitInHeader(header: string): string | null {
  return /[[(]([^[\]()]*(?:\([ag]\))?)[\])]\s*$/.exec(header)?.[1] ?? null
}

/** The header without a unit in brackets at its end. */
export function withoutUnit(header: string): string {
  return header.replace(/\s*[[(][^[\]()]*[\])]\s*$/, '')
}
