import type { Skid } from '../skid.ts'
import { valueUnit } from '../units.ts'

/** Units by the end of a setting's name, longest first. */
const endings: readonly (readonly [end: string, unit: string])[] = [
  ['WM2K', 'W/(m² K)'],
  ['WMK', 'W/(m K)'],
  ['KPerMin', 'K/min'],
  ['MolL', 'mol/L'],
  ['KJMol', 'kJ/mol'],
  ['KgM3', 'kg/m³'],
  ['MPaS', 'mPa s'],
  ['Seconds', 's'],
  ['Minutes', 'min'],
  ['Days', 'd'],
  ['Pct', '%'],
  ['Ppm', 'ppm'],
  ['Bar', 'bar'],
  ['Ml', 'mL'],
  ['Mm', 'mm'],
  ['Um', 'µm'],
  ['Pa', 'Pa'],
  ['H', 'h'],
  ['C', '°C'],
  ['M', 'm'],
]

/** Unit of a setting by its path; null where it has none. */
export function settingUnit(skid: Skid, path: string): string | null {
  const parts = path.split('.')
  const name = parts.at(-1)!
  if (parts[0] === 'segments' && name === 'flowLow') {
    const spec = skid.segments.find((s) => s.id === parts[1])
    const stream = skid.streams.find((s) => s.id === spec?.streams[0])
    const tag = skid.tags.find((t) => t.tag === stream?.flowTag)
    return tag === undefined ? null : valueUnit(tag)
  }
  if (parts.at(-2) === 'feedRatio' && (name === 'low' || name === 'high')) return 'mol/mol'
  if (parts[0] === 'alarms' || parts[0] === 'tags') return name.endsWith('Seconds') ? 's' : name.endsWith('Pct') ? '%' : null
  return endings.find(([end]) => name.endsWith(end))?.[1] ?? null
}
