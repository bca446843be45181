/** One mistake in a skid file. Line and column count from 1; `message` is one line and says what was found. */
export interface Problem {
  readonly line: number
  readonly column: number
  /** Where in the file's structure, as `segments[0].limits.dpHighBar`; empty for the file as a whole. */
  readonly path: string
  readonly message: string
  /** What belongs there, in words. */
  readonly expected: string
  /** The mend, or the nearest right name. */
  readonly hint: string | null
}

export type Path = readonly (string | number)[]

/** `['segments', 0, 'limits']` as `segments[0].limits`. */
export const pathText = (path: Path): string =>
  path.map((step, i) => (typeof step === 'number' ? `[${step}]` : i === 0 ? step : `.${step}`)).join('')

/** The last key of a path with the indices behind it: `range[1]`. */
export function keyText(path: Path): string {
  const from = path.findLastIndex((step) => typeof step === 'string')
  return from < 0 ? 'the file' : pathText(path.slice(from))
}

/** A word of the file for a message: quoted, on one line, cut when long. */
export function quote(text: string): string {
  const line = text.replace(/[\s\p{Cc}\p{Cf}\u2028\u2029]+/gu, ' ')
  return `'${line.length > 40 ? `${line.slice(0, 40)}…` : line}'`
}

/** In file order, each once: an anchor read through several aliases would repeat its mistakes. */
export function inFileOrder(problems: readonly Problem[]): Problem[] {
  const seen = new Set<string>()
  return problems
    .filter((p) => {
      const key = `${p.line}:${p.column}:${p.message}`
      return !seen.has(key) && seen.add(key)
    })
    .sort((a, b) => a.line - b.line || a.column - b.column)
}
