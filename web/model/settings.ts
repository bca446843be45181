import type { SettingValue } from '../../server/core/settings/flat.ts'
import type { ActRow, OpenSetting, SettingRow } from '../../server/wire/index.ts'

/** A setting as a person reads it. */
export function settingText(value: SettingValue, unit: string | null): string {
  if (value === null) return 'not set'
  if (value === true) return 'yes'
  if (value === false) return 'no'
  if (typeof value === 'object') return value.join(', ')
  const text = typeof value === 'number' ? String(value).replace('-', '−') : value
  return unit === null ? text : `${text} ${unit}`
}

/** What a setting takes: one of some words, a number, a list, or text. */
export type Kind = { readonly kind: 'number' | 'list' | 'text' } | { readonly kind: 'words'; readonly words: readonly string[] }

export function kindOf(s: Pick<OpenSetting, 'path' | 'unit' | 'value'>): Kind {
  const name = s.path.split('.').at(-1)!
  if (name === 'priority') return { kind: 'words', words: ['low', 'medium', 'high'] }
  if (name === 'latching') return { kind: 'words', words: ['yes', 'no'] }
  if (Array.isArray(s.value) || s.path.startsWith('suppression.')) return { kind: 'list' }
  const isNumber = s.unit !== null || typeof s.value === 'number' || /^(disturbances|segments|detection|streams)\./.test(s.path)
  return { kind: isNumber || name === 'deadband' ? 'number' : 'text' }
}

/** What was typed as a value of a setting; a text with what is wrong where it is none. An empty field takes the setting away. */
export function readSetting(kind: Kind, typed: string): { readonly value: SettingValue } | string {
  const text = typed.trim()
  if (text === '') return { value: null }
  if (kind.kind === 'number') {
    const number = Number(text.replace('−', '-').replace(/^(-?\d+),(\d+)$/, '$1.$2'))
    return Number.isFinite(number) ? { value: number } : `“${text}” is no number – write it like 5.5`
  }
  if (kind.kind === 'list') return { value: text.split(/[,\s]+/).filter((x) => x !== '') }
  if (kind.kind === 'words' && kind.words.includes('yes')) return { value: text === 'yes' }
  return { value: text }
}

const words: Readonly<Record<string, string>> = {
  dpHighBar: 'pressure drop, high',
  dpHighHighBar: 'pressure drop, high-high',
  pressureHighBar: 'inlet pressure, high',
  temperatureHighC: 'temperature, high',
  temperatureHighHighC: 'temperature, high-high',
  temperatureLowC: 'temperature, low',
  flowLow: 'flow, low',
  waterPpm: 'water',
  baselineVersion: 'baseline learnt anew by version',
  falseAlarmDays: 'one false alarm in',
  riseToFindPct: 'rise to be found',
}

/** A path in words where it has some: `R1: pressure drop, high`. */
export function pathText(path: string): string {
  const parts = path.split('.')
  const name = parts.at(-1)!
  const known = words[name] ?? (parts.at(-2) === 'feedRatio' ? `feed ratio, ${name}` : null)
  if (parts[0] === 'suppression') return `logic ${parts[1]}, ${name}`
  if (parts[0] === 'alarms') return `alarm ${parts[1]}: ${name}`
  if (known === null) return path
  return parts[0] === 'segments' || parts[0] === 'streams' ? `${parts[1]}: ${known}` : known
}

/** `R1: pressure drop, high: 6 bar → 5.5 bar`. */
export const changeText = (c: SettingRow | { path: string; unit: null; old: SettingValue; new: SettingValue }): string =>
  `${pathText(c.path)}: ${settingText(c.old, c.unit)} → ${settingText(c.new, c.unit)}`

/** What a run's acts say of its settings and of what was entered, oldest first; null where an act is of neither. */
export function entryText(a: ActRow['act']): string | null {
  if (a.kind === 'comment') return a.text
  if (a.kind !== 'event') return null
  const value = a.value === null ? '' : ` ${settingText(a.value, a.unit)}`
  const of = a.of == null ? '' : ` of ${a.of}`
  return `${a.event}${of}${value}${a.note === '' ? '' : `: ${a.note}`}`
}
