import { phases } from '../../core/reading.ts'

/**
 * What loggers write where they have no number; compared trimmed and without regard to case. Common practice: spreadsheet error
 * values, the runtime library's spellings of NaN and infinity, and the digital states of data historians.
 */
export const missingWords: ReadonlySet<string> = new Set([
  '', 'nan', '-nan', '+nan', 'nan(ind)', '-nan(ind)', 'na', 'n/a', 'n.a.', '#n/a', '#na', 'null', 'nil', 'none',
  '-', '--', '---', '----', '-----', '*', '**', '***', '****', '?', '??', '???',
  'inf', '+inf', '-inf', 'infinity', '+infinity', '-infinity',
  '1.#inf', '-1.#inf', '1.#qnan', '-1.#qnan', '1.#snan', '1.#ind', '-1.#ind', '1.#inf00', '-1.#inf00', '1.#qnan0', '-1.#ind00',
  '#div/0!', '#value!', '#ref!', '#num!', '#name?', '#null!',
  'bad', 'bad input', 'bad quality', 'bad value', 'no data', 'nodata', 'no_data', 'no value', 'no result', 'not available',
  'not connected', 'not connect', 'missing', 'invalid', 'error', 'err', 'fault', 'failed', 'offline', 'scan off', 'calc failed',
  'comm fail', 'comm failure', 'i/o timeout', 'timeout', 'under range', 'underrange', 'over range', 'overrange', 'out of range',
  'overflow', 'ovl', 'ovld', 'open', 'open tc', 'open circuit', 'short', 'sensor fault',
]) // biome-ignore format: a table reads better by kind

/** Missing in a column of text, where `none`, `open` or `bad` may be a state of its own. */
export const missingTexts: ReadonlySet<string> = new Set(['', 'nan', 'n/a', '#n/a', 'null'])

/** Text without the apostrophe that keeps a spreadsheet from taking it for a formula; exports put one in front (record/csv-cell.ts). */
export const unguarded = (text: string): string => (/^'[=+\-@]/.test(text) ? text.slice(1) : text)

/** Distinct texts a run may hold; a column of free text past it counts as unreadable instead of filling the memory. */
export const maxWords = 65_536

/** The run's list of words as a lookup. `words` is shared by all files of a run; phases stand first. */
export function wordList(words: string[]): { index(text: string, isPhase: boolean): number } {
  const byText = new Map<string, number>()
  let seen = 0
  if (words.length === 0) words.push(...phases)
  return {
    /** Index of the text, added if new; −1 where the list is full. Phases match in any case. */
    index(written, isPhase) {
      const text = unguarded(written)
      for (; seen < words.length; seen++) byText.set(words[seen]!, seen)
      const key = isPhase && (phases as readonly string[]).includes(text.toLowerCase()) ? text.toLowerCase() : text
      const known = byText.get(key)
      if (known !== undefined) return known
      if (words.length >= maxWords) return -1
      words.push(key)
      return words.length - 1
    },
  }
}
