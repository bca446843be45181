import { isMap, isScalar, isSeq, type Node } from 'yaml'
import { meant, nearest } from './nearest.ts'
import { keyText, type Path, quote } from './problem.ts'
import { found, isBlank, isNull, isPlain, type Walk, written } from './walk.ts'

/** Reads one kind of value. `read` gives undefined once it has said what is wrong; it never throws. */
export interface Reader<T> {
  /** What belongs there, in words. */
  readonly says: string
  /** Names of the keys, for a group. */
  readonly keys?: readonly string[]
  read(node: unknown, path: Path, walk: Walk): T | undefined
}
export type Read<R> = R extends Reader<infer T> ? T : never

const wrong = (walk: Walk, path: Path, node: Node | null, says: string, hint: string | null = null): undefined => {
  walk.say(path, `${keyText(path)} is ${found(node)}`, says, hint)
}

/** Any scalar as it is written. `refuse` gives what is wrong with a text, and its mend. */
export function text<T extends string = string>(
  says = 'a text',
  refuse: (value: string) => { readonly says?: string; readonly hint: string | null } | null = () => null,
): Reader<T> {
  return {
    says,
    read(at, path, walk) {
      const node = walk.real(at)
      if (!isScalar(node) || isBlank(node) || isNull(node))
        return wrong(walk, path, node, says, isSeq(node) ? 'one value, without brackets or dashes' : null)
      const value = written(node).trim()
      if (value === '') return wrong(walk, path, node, says)
      const refused = refuse(value)
      return refused === null ? (value as T) : wrong(walk, path, node, refused.says ?? says, refused.hint)
    },
  }
}

/** An id: letters, digits and '-'. */
export const id = text("letters, digits and '-'", (value) =>
  /^[A-Za-z0-9-]{1,64}$/.test(value) ? null : { hint: `for example '${value.replace(/[^A-Za-z0-9]+/g, '-').slice(0, 64)}'` },
)

/** One of a list of words, exactly as listed. */
export const choice = <const T extends string>(words: readonly T[]): Reader<T> =>
  text<T>(`one of ${words.join(', ')}`, (value) => (words.includes(value as T) ? null : { hint: meant(value, words) }))

export interface Bounds {
  readonly min?: number
  readonly max?: number
  readonly above?: number
  readonly whole?: boolean
  /** Unit in words, for the message. */
  readonly unit?: string
}

function boundsText({ min, max, above, whole, unit }: Bounds): string {
  const kind = whole ? 'a whole number' : 'a number'
  const low =
    min !== undefined ? (max === undefined ? ` of at least ${min}` : ` from ${min}`) : above !== undefined ? ` above ${above}` : ''
  const high = max === undefined ? '' : min === undefined ? ` up to ${max}` : ` to ${max}`
  return `${kind}${low}${high}${unit === undefined ? '' : ` (${unit})`}`
}

/** How to mend a text where a number belongs. */
function numberHint(value: string, plain: boolean): string | null {
  if (decimal.test(value)) return plain ? null : `without quotes: ${value}`
  if (/^[+-]?\d+,\d+$/.test(value)) return `with a decimal point: ${value.replace(',', '.')}`
  if (/^[+-]?0\d+(\.\d*)?$/.test(value)) return `without leading zeros (some readers take ${value} as octal)`
  const first = /^([+-]?\d+(?:\.\d+)?)\s*(?!x)[\p{L}°%µ]/u.exec(value)
  return first === null ? null : `the number alone (${first[1]}); the key carries the unit`
}

/** Decimal, as JSON writes it and with what people add: a sign, a bare point. No octal, hexadecimal, infinity. */
const decimal = /^[+-]?(?:0|[1-9]\d*|(?=\.\d))(?:\.\d*)?(?:[eE][+-]?\d+)?$/

export function number(bounds: Bounds = {}): Reader<number> {
  const says = boundsText(bounds)
  return {
    says,
    read(at, path, walk) {
      const node = walk.real(at)
      if (!isScalar(node) || isBlank(node) || isNull(node)) return wrong(walk, path, node, says)
      const source = written(node)
      if (!isPlain(node) || !decimal.test(source)) return wrong(walk, path, node, says, numberHint(source, isPlain(node)))
      const value = Number(source)
      const { min = -Infinity, max = Infinity, above = -Infinity, whole = false } = bounds
      if (!Number.isFinite(value) || value < min || value > max || value <= above || (whole && !Number.isInteger(value)))
        return wrong(walk, path, node, says)
      return value
    },
  }
}

export const flag: Reader<boolean> = {
  says: 'true or false',
  read(at, path, walk) {
    const node = walk.real(at)
    const value = isScalar(node) && isPlain(node) ? written(node) : null
    if (value === 'true' || value === 'false') return value === 'true'
    return wrong(
      walk,
      path,
      node,
      'true or false',
      value === null ? null : /^(yes|on)$/i.test(value) ? "'true'" : /^(no|off)$/i.test(value) ? "'false'" : null,
    )
  },
}

/** A list; entries that are wrong are undefined in it, so that the others keep their index. */
export function list<T>(
  of: Reader<T>,
  { min = 0, max = 100_000, name = 'entries' }: { min?: number; max?: number; name?: string } = {},
): Reader<(T | undefined)[]> {
  const says = `a list of ${min === max ? `${min} ` : ''}${name}${min > 0 && min !== max ? `, at least ${min}` : ''}`
  return {
    says,
    read(at, path, walk) {
      const node = walk.real(at)
      if (!isSeq(node))
        return wrong(walk, path, node, says, isScalar(node) && !isBlank(node) ? 'in brackets, even when there is one: [ … ]' : null)
      if (node.items.length < min || node.items.length > max) {
        walk.say(path, `${keyText(path)} has ${node.items.length} entries`, says)
        if (node.items.length > max) return undefined
      }
      return node.items.map((item, i) => of.read(item, [...path, i], walk))
    },
  }
}

/** A group with fixed keys. A misspelt key whose right name is clear and free is reported and then read as if it were right. */
export function group<F extends Record<string, Reader<unknown>>>(
  fields: F,
  { required = [], nullable = true }: { required?: readonly (keyof F & string)[]; nullable?: boolean } = {},
): Reader<{ [K in keyof F]: Read<F[K]> | undefined }> {
  const keys = Object.keys(fields)
  const says = `a group with keys ${keys.join(', ')}`
  return {
    says,
    keys,
    read(at, path, walk) {
      const node = walk.real(at)
      if (!isMap(node)) return wrong(walk, path, node, says)
      const pairs = walk.pairs(node, path)
      for (const [name, pair] of [...pairs]) {
        if (Object.hasOwn(fields, name)) continue
        const free = keys.filter((key) => !pairs.has(key))
        const near = nearest(name, free)
        const home = keys.find((key) => fields[key]!.keys?.includes(name))
        const hint =
          home !== undefined ? `'${name}' belongs under '${home}'` : near !== null ? `did you mean '${near}'?` : meant(name, keys)
        const where = path.length === 0 ? '' : ` in ${keyText(path)}`
        walk.say([...path, name], `unknown key ${quote(name)}${where}`, `one of ${keys.join(', ')}`, hint, pair.key)
        if (home === undefined && near !== null) pairs.set(near, pair)
      }
      const values: Record<string, unknown> = {}
      for (const key of keys) {
        const pair = pairs.get(key)
        const here = [...path, key]
        if (pair === undefined) {
          if (required.includes(key))
            walk.say(here, `'${key}' is missing${path.length === 0 ? '' : ` in ${keyText(path)}`}`, fields[key]!.says)
        } else if (!(nullable && !required.includes(key) && isNull(walk.real(pair.value))))
          values[key] = fields[key]!.read(pair.value, here, walk)
      }
      return values as { [K in keyof F]: Read<F[K]> | undefined }
    },
  }
}

/** A group whose keys are data; `refuse` says what is wrong with a key. */
export function dictionary<T>(
  says: string,
  of: Reader<T>,
  refuse: (key: string) => { hint: string | null } | null,
): Reader<Map<string, T | undefined>> {
  return {
    says: `a group by ${says}`,
    read(at, path, walk) {
      const node = walk.real(at)
      if (!isMap(node)) return wrong(walk, path, node, `a group by ${says}`, isBlank(node) ? 'write {} for none' : null)
      const values = new Map<string, T | undefined>()
      for (const [key, pair] of walk.pairs(node, path)) {
        const refused = refuse(key)
        if (refused !== null)
          walk.say([...path, key], `unknown key ${quote(key)} in ${keyText(path)}`, says, refused.hint, pair.key)
        values.set(key, of.read(pair.value, [...path, key], walk))
      }
      return values
    },
  }
}

/** One value, or a list of one or more of the same. */
export function oneOrMore<T>(of: Reader<T>, max = 100): Reader<(T | undefined)[]> {
  const many = list(of, { min: 1, max, name: 'such values' })
  return {
    says: `${of.says}, or a list of such`,
    ...(of.keys === undefined ? {} : { keys: of.keys }),
    read(at, path, walk) {
      if (isSeq(walk.real(at))) return many.read(at, path, walk)
      const value = of.read(at, path, walk)
      return value === undefined ? undefined : [value]
    },
  }
}
