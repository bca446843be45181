/** What a tag measures. */
export const quantities = [
  'pressure',
  'differentialPressure',
  'temperature',
  'massFlow',
  'volumeFlow',
  'mass',
  'level',
  'speed',
  'density',
  'conductivity',
  'ph',
  'oxygen',
  'dewPoint',
  'output',
  'setpoint',
  'state',
  'text',
] as const
export type Quantity = (typeof quantities)[number]

/**
 * Units a log may use, with the linear step to SI: si = factor · value + offset. Pressures are gauge throughout (the tool only
 * uses differences and limits stated in gauge). Factors are exact by definition (SI brochure, 9th ed.; psi from the
 * international pound and inch: 6894.757293168...). `mA` is the raw loop current; the tag's range turns it into a value.
 */
export const units = {
  Pa: { of: 'pressure', factor: 1, offset: 0 },
  kPa: { of: 'pressure', factor: 1e3, offset: 0 },
  MPa: { of: 'pressure', factor: 1e6, offset: 0 },
  mbar: { of: 'pressure', factor: 100, offset: 0 },
  bar: { of: 'pressure', factor: 1e5, offset: 0 },
  psi: { of: 'pressure', factor: 6894.757293168361, offset: 0 },
  mA: { of: 'current', factor: 1e-3, offset: 0 },
  degC: { of: 'temperature', factor: 1, offset: 273.15 },
  degF: { of: 'temperature', factor: 5 / 9, offset: 273.15 - (32 * 5) / 9 },
  K: { of: 'temperature', factor: 1, offset: 0 },
  'kg/h': { of: 'massFlow', factor: 1 / 3600, offset: 0 },
  'g/min': { of: 'massFlow', factor: 1e-3 / 60, offset: 0 },
  'mL/min': { of: 'volumeFlow', factor: 1e-6 / 60, offset: 0 },
  'L/h': { of: 'volumeFlow', factor: 1e-3 / 3600, offset: 0 },
  kg: { of: 'mass', factor: 1, offset: 0 },
  g: { of: 'mass', factor: 1e-3, offset: 0 },
  rpm: { of: 'speed', factor: 1 / 60, offset: 0 },
  'kg/m3': { of: 'density', factor: 1, offset: 0 },
  'mS/cm': { of: 'conductivity', factor: 0.1, offset: 0 },
  '%': { of: 'share', factor: 0.01, offset: 0 },
} as const
export type Unit = keyof typeof units

/** Units that a quantity may carry; an empty list means the quantity has none. `mA` fits whatever a loop can carry. */
export const unitsOf: Record<Quantity, readonly Unit[]> = {
  pressure: ['Pa', 'kPa', 'MPa', 'mbar', 'bar', 'psi', 'mA'],
  differentialPressure: ['Pa', 'kPa', 'MPa', 'mbar', 'bar', 'psi', 'mA'],
  temperature: ['degC', 'K', 'degF', 'mA'],
  massFlow: ['kg/h', 'g/min', 'mA'],
  volumeFlow: ['mL/min', 'L/h', 'mA'],
  mass: ['kg', 'g'],
  level: ['%', 'mA'],
  speed: ['rpm', 'mA'],
  density: ['kg/m3', 'mA'],
  conductivity: ['mS/cm', 'mA'],
  ph: [],
  oxygen: ['%', 'mA'],
  dewPoint: ['degC', 'K', 'degF', 'mA'],
  output: ['%', 'mA'],
  setpoint: ['Pa', 'kPa', 'MPa', 'mbar', 'bar', 'psi', 'degC', 'K', 'degF', 'kg/h', 'g/min', 'mL/min', 'L/h', 'rpm', '%'],
  state: [],
  text: [],
}

/** The plant unit a quantity is shown in; also the unit of the range of a tag that is logged as raw loop current. */
export const plantUnit: Record<Quantity, Unit | null> = {
  pressure: 'bar',
  differentialPressure: 'bar',
  temperature: 'degC',
  massFlow: 'kg/h',
  volumeFlow: 'mL/min',
  mass: 'kg',
  level: '%',
  speed: 'rpm',
  density: 'kg/m3',
  conductivity: 'mS/cm',
  ph: null,
  oxygen: '%',
  dewPoint: 'degC',
  output: '%',
  setpoint: null,
  state: null,
  text: null,
}
/** The unit of a tag's value once a raw loop current has been turned into one. */
export const valueUnit = (tag: { readonly quantity: Quantity; readonly unit: Unit | null }): Unit | null =>
  tag.unit === 'mA' ? plantUnit[tag.quantity] : tag.unit

/** A value in its plant unit as SI (K, Pa, kg/s, m3/s ...). Unit null: the number as it is. */
export const toSi = (value: number, unit: Unit | null): number =>
  unit === null ? value : units[unit].factor * value + units[unit].offset
/** An SI value in a plant unit. */
export const fromSi = (si: number, unit: Unit | null): number =>
  unit === null ? si : (si - units[unit].offset) / units[unit].factor

export const paFromBar = (bar: number): number => bar * 1e5
export const barFromPa = (pa: number): number => pa / 1e5
export const kFromC = (c: number): number => c + 273.15
export const cFromK = (k: number): number => k - 273.15
export const m3sFromMlMin = (q: number): number => q / 60e6
export const mlMinFromM3s = (q: number): number => q * 60e6
