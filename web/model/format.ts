/** Numbers and durations as the pages print them: true minus sign, no digit finer than asked, nothing for what is not known. */

/** A number with fixed digits; null where it is not known. */
export function fixed(value: number | null | undefined, digits: number): string | null {
  if (value === null || value === undefined || !Number.isFinite(value)) return null
  const text = value.toFixed(digits)
  return /^-[0.]*$/.test(text) ? text.slice(1) : text.replace('-', '−')
}

const unitWords: Readonly<Record<string, string>> = {
  degC: '°C',
  degF: '°F',
  'kg/m3': 'kg/m³',
  ratio: '× clean',
  'mol/mol': 'mol/mol',
}
/** A unit as it is printed; a number without one is a ratio of two alike, shown [–] on axes. */
export const unitText = (unit: string | null | undefined): string => (unit == null ? '' : (unitWords[unit] ?? unit))
export const axisUnit = (unit: string | null | undefined): string =>
  unit == null || unit === 'ratio' ? '[–]' : `[${unitText(unit)}]`

/** Digits worth showing, by unit: no finer than what the instruments of a skid resolve. */
export function digitsOf(unit: string | null | undefined): number {
  switch (unit) {
    case 'degC':
    case 'K':
    case 'degF':
    case 'mL/min':
    case '%':
    case 'mbar':
      return 1
    case 'rpm':
    case 'kg/m3':
    case 'Pa':
    case 's':
      return 0
    default:
      return 2
  }
}

/** Value with unit, `no reading` where there is none. */
export function figure(value: number | null | undefined, unit: string | null | undefined, digits = digitsOf(unit)): string {
  const text = fixed(value, digits)
  if (text === null) return 'no reading'
  const u = unitText(unit)
  return u === '' ? text : `${text} ${u}`
}

/** A length of time to two parts: `45 s`, `12 min`, `1 h 55`, `3 d 4 h`. The last part is cut, not rounded: never more time than there is. */
export function duration(ms: number): string {
  const s = Math.max(0, Math.floor(ms / 1000))
  if (s < 60) return `${s} s`
  const min = Math.floor(s / 60)
  if (min < 60) return `${min} min`
  const h = Math.floor(min / 60)
  if (h < 48) return min % 60 === 0 ? `${h} h` : `${h} h ${String(min % 60).padStart(2, '0')}`
  return h % 24 === 0 ? `${h / 24} d` : `${Math.floor(h / 24)} d ${h % 24} h`
}

/** An age as the strip prints it: tenths below ten seconds. */
export const age = (ms: number): string => (ms < 9950 ? `${(Math.max(0, ms) / 1000).toFixed(1)} s` : duration(ms))

/** From low to high from now on. The upper end is rounded up to its minute: a range that promises to hold must not be cut on either side. */
export function range(lowMs: number, highMs: number): { low: string; high: string } {
  return { low: duration(lowMs), high: duration(highMs < 60_000 ? highMs : Math.ceil(highMs / 60_000) * 60_000) }
}

/** Cuts a long name for a narrow place; the whole of it stays in the title. */
export const short = (text: string, most: number): string => (text.length <= most ? text : `${text.slice(0, most - 1)}…`)
