import { MonitorError } from '../core/errors.ts'
import type { Skid } from '../core/skid.ts'
import { checkConsistency } from './consistency.ts'
import { parseSkidText } from './document.ts'
import { notesOn } from './notes.ts'
import { inFileOrder, type Problem } from './problem.ts'
import { checkReferences } from './references.ts'
import { resolveSkid } from './resolve.ts'
import { skidShape } from './skid-shape.ts'
import { walkOf } from './walk.ts'

export type { Problem } from './problem.ts'

export interface SkidCheck {
  /** Null as soon as there is one problem. */
  readonly skid: Skid | null
  /** Every mistake, in file order. */
  readonly problems: readonly Problem[]
  /** For a good file: what the tool leaves out or assumes. */
  readonly notes: readonly string[]
}

/** Reads a skid file, YAML or JSON, and finds all of its mistakes at once. Never throws, whatever the text. */
export function checkSkid(text: string, _file: string): SkidCheck {
  const { doc, lines, problems } = parseSkidText(text)
  if (doc === null) return { skid: null, problems, notes: [] }
  const walk = walkOf(doc, lines)
  const file = skidShape.read(doc.contents, [], walk)
  if (file !== undefined) {
    checkReferences(file, walk)
    checkConsistency(file, walk)
  }
  if (file === undefined || walk.problems.length > 0) return { skid: null, problems: inFileOrder(walk.problems), notes: [] }
  const skid = resolveSkid(file)
  return { skid, problems: [], notes: notesOn(skid) }
}

/** One problem on one line: `FILE:line:column: message; expected …; hint`. */
export const problemLine = (file: string, p: Problem): string =>
  `${file}:${p.line}:${p.column}: ${p.message}; expected ${p.expected}${p.hint === null ? '' : `; ${p.hint}`}`

/** The skid of a file's text. Errors: SKID_FILE with the first mistake, its place, and how many more there are. */
export function loadSkid(text: string, file: string): Skid {
  const { skid, problems } = checkSkid(text, file)
  if (skid !== null && problems.length === 0) return skid
  throw firstOf(problems, file, 'clearbore check-skid FILE lists them all', 'see the skid file keys in README.md')
}

/** The first of the mistakes in a file as an error; `all` says where the others are listed, `otherwise` what to do where it has no mend. */
export function firstOf(problems: readonly Problem[], file: string, all: string | null, otherwise: string): MonitorError {
  const [first] = problems
  if (first === undefined) return new MonitorError('SKID_FILE', 'the file cannot be read', { place: { file }, hint: otherwise })
  const more = problems.length - 1
  const others = more === 0 ? '' : ` (and ${more} more ${more === 1 ? 'mistake' : 'mistakes'})`
  return new MonitorError('SKID_FILE', `${first.message}; expected ${first.expected}${others}`, {
    hint: [first.hint, more > 0 ? all : null].filter((part) => part !== null).join('; ') || otherwise,
    place: { file, line: first.line, column: first.column },
  })
}
