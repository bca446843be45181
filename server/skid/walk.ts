import {
  type Document,
  isAlias,
  isMap,
  isScalar,
  isSeq,
  type LineCounter,
  type Node,
  type Pair,
  type Scalar,
  type YAMLMap,
} from 'yaml'
import { type Path, type Problem, pathText, quote } from './problem.ts'

/** A document being read: finds nodes by path and collects problems with their place. */
export interface Walk {
  /** The node an alias stands for, or the node itself. */
  real(node: unknown): Node | null
  /** The pairs of a map by their right names; keys that stand twice are reported once. */
  pairs(map: YAMLMap, path: Path): Map<string, Pair>
  /** True when the file gives this key, rightly or wrongly. */
  has(path: Path): boolean
  /** The key before the value of `path`, as a place. */
  key(path: Path): unknown
  /** Records a problem at the value of `path`; where that is absent, at the nearest group around it. `node` overrides the place. */
  say(path: Path, message: string, expected: string, hint?: string | null, node?: unknown): void
  readonly problems: Problem[]
}

/** The text a scalar was written as: `010` and `no` stay what they are. */
export const written = (scalar: Scalar): string => (scalar.type === 'PLAIN' ? (scalar.source ?? '') : String(scalar.value))
export const isPlain = (scalar: Scalar): boolean => scalar.type === 'PLAIN'
/** An explicit `null` or `~`, which on an optional key is as good as leaving it out. */
export const isNull = (node: unknown): boolean => isScalar(node) && isPlain(node) && /^(null|~)$/i.test(written(node))
export const isBlank = (node: unknown): boolean => node === null || (isScalar(node) && isPlain(node) && written(node) === '')

/** What was found, in words. */
export function found(node: Node | null): string {
  if (node === null || isBlank(node)) return 'empty'
  if (isNull(node)) return 'null'
  if (isMap(node)) return 'a group of keys'
  if (isSeq(node)) return 'a list'
  if (!isScalar(node)) return 'an alias that names nothing'
  const text = written(node)
  return isPlain(node) && (typeof node.value === 'number' || typeof node.value === 'boolean') ? text : `the text ${quote(text)}`
}

export function walkOf(doc: Document.Parsed, lines: LineCounter): Walk {
  const names = new Map<YAMLMap, Map<string, Pair>>()
  const problems: Problem[] = []
  const real = (node: unknown): Node | null =>
    isAlias(node) ? (node.resolve(doc) ?? null) : ((node as Node | null | undefined) ?? null)
  const offsetOf = (node: unknown): number | null => (node as Node | null)?.range?.[0] ?? null

  /** The value at a path with the key before it, or null; aliases on the way are followed, the last one is not. */
  const find = (path: Path): { readonly node: unknown; readonly key: unknown } | null => {
    let at: { node: unknown; key: unknown } = { node: doc.contents, key: null }
    for (const step of path) {
      const inside = real(at.node)
      if (typeof step === 'number') {
        if (!isSeq(inside) || step >= inside.items.length) return null
        at = { node: inside.items[step], key: at.key }
      } else {
        const pair = isMap(inside) ? pairs(inside, []).get(step) : undefined
        if (pair === undefined) return null
        at = { node: pair.value, key: pair.key }
      }
    }
    return at
  }

  const pairs = (map: YAMLMap, path: Path): Map<string, Pair> => {
    const known = names.get(map)
    if (known !== undefined) return known
    const byName = new Map<string, Pair>()
    names.set(map, byName)
    for (const pair of map.items) {
      const key = real(pair.key)
      if (!isScalar(key)) {
        say(path, `a key that is ${found(key)}`, 'a key that is one word', "write 'key: value'", pair.key)
        continue
      }
      const name = written(key)
      const first = byName.get(name)
      if (first === undefined) byName.set(name, pair)
      else {
        const line = lines.linePos(offsetOf(first.key) ?? 0).line
        say([...path, name], `${quote(name)} stands twice`, 'each key once', `the first is on line ${line}; remove one`, pair.key)
      }
    }
    return byName
  }

  const say: Walk['say'] = (path, message, expected, hint = null, node) => {
    let offset = offsetOf(node)
    for (let length = path.length; offset === null && length >= 0; length--) {
      const at = find(path.slice(0, length))
      offset = at === null ? null : (offsetOf(at.node) ?? offsetOf(at.key))
    }
    const { line, col } = lines.linePos(offset ?? 0)
    problems.push({ line: Math.max(1, line), column: Math.max(1, col), path: pathText(path), message, expected, hint })
  }
  return { real, pairs, has: (path) => find(path) !== null, key: (path) => find(path)?.key, say, problems }
}
