import type { Skid } from '../skid.ts'

/** A setting as one value; null is not set. */
export type SettingValue = number | string | boolean | null | readonly (number | string)[]

/** One changed setting by its dotted path; null is not set, so null → value adds and value → null removes. */
export interface SettingChange {
  readonly path: string
  readonly old: SettingValue
  readonly new: SettingValue
}

/** Every setting that has a value, by dotted path, in order of path. */
export type FlatSettings = Readonly<Record<string, Exclude<SettingValue, null>>>

const isScalar = (v: unknown): v is number | string => typeof v === 'number' || typeof v === 'string'
/** By which of its keys something is named; null where it has no name. */
const nameKey = (v: unknown): 'id' | 'tag' | null => {
  const named = v as { id?: unknown; tag?: unknown } | null
  return typeof named?.id === 'string' ? 'id' : typeof named?.tag === 'string' ? 'tag' : null
}

/**
 * A whole skid configuration as dotted paths: `segments.R1.limits.dpHighBar`, `tags.PT-101.range`. What has a name goes by it, with the order
 * of the names under `.order`; lists of plain values are one value, deeper ones their JSON.
 */
export function flatten(skid: Skid): FlatSettings {
  const out: Record<string, Exclude<SettingValue, null>> = {}
  const walk = (path: string, value: unknown): void => {
    if (value === null || value === undefined) return
    if (typeof value !== 'object') out[path] = value as string | number | boolean
    else if (!Array.isArray(value)) {
      for (const [key, v] of Object.entries(value)) walk(path === '' ? key : `${path}.${key}`, v)
    } else if (value.every(isScalar)) out[path] = value
    else if (value.every((v) => nameKey(v) !== null)) {
      const named = value.map((v: Record<string, unknown>) => ({ v, by: nameKey(v)! }))
      out[`${path}.order`] = named.map(({ v, by }) => v[by] as string)
      for (const { v, by } of named)
        for (const [key, x] of Object.entries(v)) if (key !== by) walk(`${path}.${v[by] as string}.${key}`, x)
    } else out[path] = JSON.stringify(value)
  }
  walk('', skid)
  return sorted(out)
}

const sorted = <T>(of: Record<string, T>): Record<string, T> =>
  Object.fromEntries(Object.entries(of).sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0)))

/** Two settings are the same: lists by their elements. */
export const sameSetting = (a: SettingValue, b: SettingValue): boolean => JSON.stringify(a) === JSON.stringify(b)

/** What must change in `a` to give `b`, in order of path. Laid over `a` it is `b`. */
export function diff(a: FlatSettings, b: FlatSettings): SettingChange[] {
  const paths = [...new Set([...Object.keys(a), ...Object.keys(b)])].sort()
  return paths.flatMap((path) => {
    const [old, now] = [a[path] ?? null, b[path] ?? null]
    return sameSetting(old, now) ? [] : [{ path, old, new: now }]
  })
}
