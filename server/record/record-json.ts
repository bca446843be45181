import { createReadStream } from 'node:fs'
import { createInterface } from 'node:readline'
import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import { MonitorError } from '../core/errors.ts'
import { cell, type RowBlock, rowBlock } from '../core/reading.ts'
import type { Report } from '../core/report.ts'
import type { Act, Entry } from '../core/sequence.ts'
import { type Sign, withProof } from '../trail/proof.ts'
import type { ExportFacts } from './facts.ts'

/** The head of a record: all that is needed to run its sequence again. */
export interface RecordHead extends ExportFacts {
  readonly record: 1
  /** How to check it, with and without this tool. */
  readonly verify: typeof howToVerify
  readonly skidFile: { readonly name: string; readonly text: string }
  readonly words: readonly string[]
}

/** Printed with every record, so that it can be checked when this tool is gone. */
export const howToVerify = [
  'clearbore verify FILE tells whether this record is untouched.',
  'By hand: "content" in the last line is the SHA-256 of all bytes before that line.',
  'Its "signature" is Ed25519 by "key" (32 bytes in hex) over the UTF-8 bytes of {"content":"…","statement":"clearbore record 1"} with that content; compare the key with one kept elsewhere.',
  'Each line of "chain" is a record in canonical JSON (RFC 8785), without the comma behind it. Its hash is the SHA-256 of the 32 bytes of the hash before it (zeros for the first) followed by its own UTF-8 bytes. The last hash is "head" of "trail".',
  'Times named …Ms are milliseconds since 1970-01-01 UTC. A row of "sequence" is its time, a digit for each tag (0 not given, 1 value, 2 missing, 3 unreadable, 4 uncertain, 5 bad), and the values in the order of the skid file’s tags.',
] as const

/** Rows of a record: time, one digit of quality a cell (`cell` of core/reading.ts), then the values; 0 where the code says there is none. */
type RowText = readonly [tMs: number, codes: string, ...values: number[]]
type EntryText = { readonly seq: number } & (
  | { readonly rows: readonly RowText[] }
  | { readonly tick: number }
  | { readonly act: Act }
)

export interface RecordParts {
  readonly head: RecordHead
  readonly entries: Iterable<{ readonly seq: number; readonly entry: Entry }>
  readonly transitions: readonly AlarmRecord[]
  readonly report: Report
  /** Canonical texts of the run's chain, in order. */
  readonly chain: readonly string[]
  readonly sign: Sign
}

const number = (v: number): string => (Object.is(v, -0) ? '-0' : String(v))

function entryLine(seq: number, entry: Entry): string {
  if (entry.kind === 'tick') return `{"seq":${seq},"tick":${number(entry.tMs)}}`
  if (entry.kind === 'act') return `{"seq":${seq},"act":${JSON.stringify(entry.act)}}`
  const { rows, width, tMs, values, codes } = entry.block
  const lines: string[] = []
  for (let r = 0; r < rows; r++) {
    let digits = ''
    let text = ''
    for (let c = r * width; c < (r + 1) * width; c++) {
      digits += codes[c]
      text += `,${codes[c] === cell.value || codes[c]! >= cell.uncertain ? number(values[c]!) : '0'}`
    }
    lines.push(`[${number(tMs[r]!)},"${digits}"${text}]`)
  }
  return `{"seq":${seq},"rows":[${lines.join(',\n')}]}`
}

/**
 * A whole run as JSON text in pieces: head, the recorded sequence in its exact order, every transition, the report, the chain a record a line, and
 * the line that proves all bytes before it.
 */
export const recordText = (p: RecordParts): Generator<string> => withProof(provable(p), p.sign)

function* provable(p: RecordParts): Generator<string> {
  yield `${JSON.stringify(p.head).slice(0, -1)},\n"sequence":[\n`
  let first = true
  for (const { seq, entry } of p.entries) {
    yield `${first ? '' : ',\n'}${entryLine(seq, entry)}`
    first = false
  }
  yield `\n],\n"transitions":${JSON.stringify(p.transitions)},\n"report":${JSON.stringify(p.report)},\n"chain":[\n`
  yield `${p.chain.join(',\n')}\n],\n`
}

function entryOf(text: EntryText): Entry {
  if ('tick' in text) return { kind: 'tick', tMs: text.tick }
  if ('act' in text) return { kind: 'act', act: text.act }
  const width = text.rows[0]?.[1].length ?? 0
  const block: RowBlock = rowBlock(text.rows.length, width)
  block.rows = text.rows.length
  text.rows.forEach(([tMs, codes, ...values], r) => {
    block.tMs[r] = tMs
    for (let c = 0; c < width; c++) {
      block.codes[r * width + c] = codes.charCodeAt(c) - 48
      block.values[r * width + c] = values[c]!
    }
  })
  return { kind: 'rows', block }
}

/** Reads a record as it was written, a line at a time. Errors: FILE_READ, RECORD_FILE with its line. */
export async function readRecord(
  file: string,
): Promise<{ head: RecordHead; entries: AsyncGenerator<Entry>; rest: () => AsyncGenerator<string> }> {
  const lines = createInterface({ input: createReadStream(file, { encoding: 'utf8' }), crlfDelay: Number.POSITIVE_INFINITY })[
    Symbol.asyncIterator
  ]()
  let line = 0
  const next = async (): Promise<string | null> => {
    line++
    try {
      const { value, done } = await lines.next()
      return done ? null : value
    } catch (cause) {
      throw new MonitorError('FILE_READ', `cannot read: ${(cause as Error).message}`, { place: { file }, cause })
    }
  }
  const bad = (message: string, cause?: unknown): MonitorError =>
    new MonitorError('RECORD_FILE', message, { place: { file, line }, hint: 'export the record again', cause })
  const parse = <T>(text: string): T => {
    try {
      return JSON.parse(text) as T
    } catch (cause) {
      throw bad(`found no JSON of a record: ${(cause as Error).message}`, cause)
    }
  }
  const first = await next()
  if (first === null || !first.startsWith('{') || !first.endsWith(','))
    throw bad('found no record, expected one written by clearbore export')
  const head = parse<RecordHead>(`${first.slice(0, -1)}}`)
  if (head.record !== 1) throw bad(`found a record of version ${String(head.record)}, expected 1`)
  if ((await next()) !== '"sequence":[') throw bad('found no sequence below the head of the record')
  let isRead = false
  async function* entries(): AsyncGenerator<Entry> {
    let text = ''
    for (;;) {
      const more = await next()
      if (more === null) throw bad('the record ends in the middle of its sequence')
      if (more === '],' && text === '') {
        isRead = true
        return
      }
      if (more === '') continue
      text += more
      // An entry of several rows goes over several lines; its last one closes the object.
      if (!text.endsWith('}') && !text.endsWith('},')) continue
      yield entryOf(parse<EntryText>(text.endsWith(',') ? text.slice(0, -1) : text))
      text = ''
    }
  }
  /** Lines behind the sequence, which is skipped where it was not read. */
  async function* rest(): AsyncGenerator<string> {
    for (let inside = !isRead; ; ) {
      const text = await next()
      if (text === null) return
      if (!inside) yield text
      else if (text === '],') inside = false
    }
  }
  return { head, entries: entries(), rest }
}
