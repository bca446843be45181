import type { Quantity, Unit } from '../core/units.ts'

/** In which unit the range of a tag in mA is given: a loop current says nothing of it, so it is fixed by quantity. */
export const mAUnit: Partial<Record<Quantity, Unit>> = {
  pressure: 'bar',
  differentialPressure: 'bar',
  temperature: 'degC',
  massFlow: 'kg/h',
  volumeFlow: 'mL/min',
  level: '%',
  speed: 'rpm',
  density: 'kg/m3',
  conductivity: 'mS/cm',
  oxygen: '%',
  dewPoint: 'degC',
  output: '%',
}
