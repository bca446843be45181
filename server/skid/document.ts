import { Composer, type CST, type Document, LineCounter, Parser, visit } from 'yaml'
import { inFileOrder, type Problem, quote } from './problem.ts'

/** A skid file is a few hundred lines; what is larger than this is another file. */
export const maxBytes = 1_000_000
/** The contract's deepest value lies 10 levels down; far deeper nesting overflows the composer's stack, which ends the process. */
const maxDepth = 60
/** One slip in YAML makes many: the first few say where. */
const maxSyntaxProblems = 5

export interface Parsed {
  readonly doc: Document.Parsed | null
  readonly lines: LineCounter
  readonly problems: readonly Problem[]
}

/** What a slip of YAML is called for a person, and how to mend it, by the parser's code. */
const slips: Record<string, readonly [message: string, expected: string, hint: string]> = {
  TAB_AS_INDENT: ['a tab indents this line', 'blanks as indentation', 'replace each tab by two blanks'],
  BAD_INDENT: [
    'the indentation fits no level above, or a bracket is not closed',
    'keys of one group in one column',
    'line it up with its neighbours, or close the bracket',
  ],
  MISSING_CHAR: [
    'a bracket, quote or comma is missing',
    'every bracket and quote closed, a comma between entries',
    'look here and at the nearest opening before this place',
  ],
  BLOCK_AS_IMPLICIT_KEY: ["a second ': ' on one line", 'one key and its value', "put the value in quotes when it holds ': '"],
  BLOCK_IN_FLOW: [
    'a comma is missing, or a list or group without brackets inside brackets',
    'entries with a comma between',
    'add the comma or bracket',
  ],
  KEY_OVER_1024_CHARS: ['a key longer than 1024 characters', 'a short key', 'look for a missing quote'],
  MULTILINE_IMPLICIT_KEY: ["a line without ': '", 'a key and its value', "write 'key: value'"],
  DUPLICATE_KEY: ['a key stands twice', 'each key once', 'remove one'],
}

/** Text to a YAML document (JSON is a subset), or what keeps it from being one. Never throws. */
export function parseSkidText(raw: string): Parsed {
  const text = raw.startsWith('\uFEFF') ? raw.slice(1) : raw
  const lines = new LineCounter()
  const problems: Problem[] = []
  const say = (offset: number, message: string, expected: string, hint: string | null) => {
    const { line, col } = lines.linePos(offset)
    problems.push({ line: Math.max(1, line), column: Math.max(1, col), path: '', message, expected, hint })
  }
  const failed = (): Parsed => ({ doc: null, lines, problems: inFileOrder(problems) })

  lines.addNewLine(0)
  if (Buffer.byteLength(text) > maxBytes) {
    say(0, `the file is larger than ${maxBytes / 1e6} MB`, 'a skid file', 'is this a log? give it as LOG.csv')
    return failed()
  }
  if (text.trim() === '') {
    say(0, 'the file is empty', "keys such as 'skid', 'tags', 'streams', 'segments'", null)
    return failed()
  }
  // biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what is looked for
  const strange = text.search(/[\u0000-\u0008\u000b\u000c\u000e-\u001f\u007f\ufffd\ufffe\uffff]/)
  if (strange >= 0) {
    for (let i = text.indexOf('\n'); i >= 0 && i < strange; i = text.indexOf('\n', i + 1)) lines.addNewLine(i + 1)
    const code = text.charCodeAt(strange).toString(16).padStart(4, '0')
    say(strange, `not a text file: character U+${code.toUpperCase()}`, 'text in UTF-8', 'save the file as UTF-8 text')
    return failed()
  }
  try {
    lines.lineStarts.length = 0
    const tokens = [...new Parser(lines.addNewLine).parse(text)]
    const deep = tokens.map(tooDeep).find((offset) => offset !== null)
    if (deep !== undefined) {
      say(
        deep,
        `nested more than ${maxDepth} levels deep`,
        'lists and groups as in the contract',
        'look for a bracket that is not closed',
      )
      return failed()
    }
    // Repeated keys are found by the walk, which knows both places; the library compares every key with every other.
    const docs = [
      ...new Composer({ lineCounter: lines, strict: true, uniqueKeys: false, prettyErrors: false, logLevel: 'error' }).compose(
        tokens,
        true,
        text.length,
      ),
    ]
    const doc = docs[0] as Document.Parsed
    const syntax = docs.flatMap((d) => [...d.errors, ...d.warnings]).sort((a, b) => a.pos[0] - b.pos[0])
    for (const slip of syntax.slice(0, maxSyntaxProblems)) {
      const [message, expected, hint] = slips[slip.code] ?? [
        `not YAML: ${quote(slip.message).slice(1, -1)}`,
        'YAML or JSON',
        'put text with special characters in quotes',
      ]
      say(slip.pos[0], message, expected, hint)
    }
    if (docs.length > 1)
      say(
        docs[1]!.range[0],
        `${docs.length} documents in one file`,
        'one skid in one file',
        "remove the '---' and what follows, or split the file",
      )
    checkAliases(doc, say)
    return problems.length > 0 ? failed() : { doc, lines, problems }
  } catch (cause) {
    say(0, `cannot be read as YAML: ${quote(cause instanceof Error ? cause.message : String(cause))}`, 'YAML or JSON', null)
    return failed()
  }
}

/** Aliases that name nothing, and aliases of aliases that would unfold to millions of values. */
function checkAliases(doc: Document.Parsed, say: (offset: number, message: string, expected: string, hint: string) => void): void {
  let first: number | null = null
  visit(doc, {
    Alias: (_, alias) => {
      first ??= alias.range?.[0] ?? 0
      if (alias.resolve(doc) === undefined)
        say(
          alias.range?.[0] ?? 0,
          `'*${alias.source}' names no anchor`,
          `an anchor '&${alias.source}' before it`,
          'write the value out',
        )
    },
  })
  if (first === null) return
  try {
    doc.toJS({ maxAliasCount: 20, mapAsMap: true })
  } catch (cause) {
    if (cause instanceof ReferenceError && cause.message.startsWith('Unresolved')) return
    say(first, 'aliases unfold to too many values', 'at most 20 values through aliases', 'write the values out')
  }
}

/** Offset of the first token nested too deep, or null; with a stack of its own, so that depth costs no call stack. */
function tooDeep(root: CST.Token): number | null {
  const stack: [CST.Token, number][] = [[root, 0]]
  for (let top = stack.pop(); top !== undefined; top = stack.pop()) {
    const [token, depth] = top
    if (depth > maxDepth) return Math.max(token.offset, 0)
    if ('items' in token) {
      for (const item of token.items) {
        if (item.key) stack.push([item.key, depth + 1])
        if (item.value) stack.push([item.value, depth + 1])
      }
    }
    if (token.type === 'document' && token.value) stack.push([token.value, depth + 1])
  }
  return null
}
