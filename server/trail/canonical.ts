import { MonitorError } from '../core/errors.ts'

/** A surrogate without its other half; with the flag u a pair is one character and does not match. */
const lone = /\p{Surrogate}/u
const eachLone = /\p{Surrogate}/gu

const refused = (what: string) => new MonitorError('STORE_DATA', `${what} has no canonical JSON (RFC 8785)`)

/**
 * JSON as RFC 8785 has it: no white space, members sorted by UTF-16 code units, numbers and texts as ECMAScript writes them (−0 as 0). As
 * UTF-8 these are the bytes that are hashed and signed. Members that are undefined are left out.
 * Errors: STORE_DATA for NaN, infinities, lone surrogates, and what is no JSON.
 */
export function canonical(value: unknown): string {
  if (value === null || typeof value === 'boolean') return String(value)
  if (typeof value === 'number') {
    if (!Number.isFinite(value)) throw refused(String(value))
    return JSON.stringify(value)
  }
  if (typeof value === 'string') {
    if (lone.test(value)) throw refused('a lone surrogate')
    return JSON.stringify(value)
  }
  if (Array.isArray(value)) return `[${value.map(canonical).join(',')}]`
  if (typeof value !== 'object') throw refused(`a ${typeof value}`)
  const of = value as Readonly<Record<string, unknown>>
  const names = Object.keys(of).filter((name) => of[name] !== undefined)
  // The default order of sort is by UTF-16 code units.
  return `{${names
    .sort()
    .map((name) => `${canonical(name)}:${canonical(of[name])}`)
    .join(',')}}`
}

/** The same value with every lone surrogate replaced by U+FFFD, as the database keeps text. */
export function wellFormed<T>(value: T): T {
  if (typeof value === 'string') return value.replace(eachLone, '\ufffd') as T
  if (Array.isArray(value)) return value.map(wellFormed) as T
  if (value === null || typeof value !== 'object') return value
  return Object.fromEntries(Object.entries(value).map(([k, v]) => [wellFormed(k), wellFormed(v)])) as T
}
