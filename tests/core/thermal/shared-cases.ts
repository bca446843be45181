import { existsSync, readFileSync } from 'node:fs'

/** Check values of the design papers; the folder stands beside the checkout or not at all. */
const folder = new URL('../../../../shared/reference/', import.meta.url)
export const hasShared = existsSync(folder)

/** One side of a case, read by kind; a wrong kind throws, so a renamed field cannot pass unseen. */
export function side(values: Record<string, unknown>) {
  const fail = (key: string): never => {
    throw new Error(`shared case has no usable '${key}'`)
  }
  return {
    has: (key: string) => values[key] !== undefined,
    num: (key: string): number => (typeof values[key] === 'number' ? values[key] : fail(key)),
    numOrNull: (key: string): number | null =>
      values[key] === null ? null : typeof values[key] === 'number' ? values[key] : fail(key),
    text: (key: string): string => (typeof values[key] === 'string' ? values[key] : fail(key)),
    list: (key: string): number[] => (Array.isArray(values[key]) ? values[key].map(Number) : fail(key)),
  }
}

export function sharedCases(name: string) {
  const file: { cases: { in: Record<string, unknown>; out: Record<string, unknown> }[] } = JSON.parse(
    readFileSync(new URL(name, folder), 'utf8'),
  )
  return file.cases.map((c) => ({ i: side(c.in), out: side(c.out) }))
}
