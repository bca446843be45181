import { MonitorError } from '../../core/errors.ts'

export type Encoding = 'utf-8' | 'utf-16le' | 'utf-16be' | 'windows-1252'

/** First bytes of files that people hand in by mistake, with what to do about them. */
const magics: readonly (readonly [bytes: readonly number[], what: string, mend: string])[] = [
  [[0x1f, 0x8b], 'a gzip archive', 'unpack it first (gunzip)'],
  [[0x50, 0x4b, 3, 4], 'a zip archive or a spreadsheet workbook', 'unpack it, or save the sheet as CSV'],
  [[0xd0, 0xcf, 0x11, 0xe0], 'an old spreadsheet workbook', 'save the sheet as CSV'],
  [[0x25, 0x50, 0x44, 0x46], 'a PDF document', 'export the log as CSV'],
]

/** What a window of a file's first bytes is written in, and how many bytes of byte order mark stand before the text. */
export function detectEncoding(name: string, head: Uint8Array): { encoding: Encoding; skip: number } {
  for (const [bytes, what, mend] of magics) {
    if (bytes.every((b, i) => head[i] === b))
      throw new MonitorError('CSV_BINARY', `found ${what}, expected CSV text`, { hint: mend, place: { file: name } })
  }
  if (head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf) return { encoding: 'utf-8', skip: 3 }
  if (head[0] === 0xff && head[1] === 0xfe) return { encoding: 'utf-16le', skip: 2 }
  if (head[0] === 0xfe && head[1] === 0xff) return { encoding: 'utf-16be', skip: 2 }
  const nuls = [0, 0]
  for (let i = 0; i < head.length; i++) if (head[i] === 0) nuls[i & 1]!++
  const pairs = head.length >> 1
  if (nuls[0] === 0 && nuls[1] === 0) return { encoding: isUtf8(head) ? 'utf-8' : 'windows-1252', skip: 0 }
  // Latin text in UTF-16 has a NUL in nearly every pair, on the same side but for a rare character such as U+0100.
  const [even, odd] = [nuls[0]! / pairs, nuls[1]! / pairs]
  if (even < 0.1 && odd > 0.7) return { encoding: 'utf-16le', skip: 0 }
  if (odd < 0.1 && even > 0.7) return { encoding: 'utf-16be', skip: 0 }
  const at = head.indexOf(0)
  let line = 1
  for (let i = 0; i < at; i++) if (head[i] === 10) line++
  throw new MonitorError('CSV_BINARY', `found binary data (a NUL byte at offset ${at}), expected CSV text`, {
    hint: 'export the log as text from the data logger',
    place: { file: name, line },
  })
}

/** True for valid UTF-8; a character cut off by the end of the window does not count against it. */
function isUtf8(bytes: Uint8Array): boolean {
  try {
    new TextDecoder('utf-8', { fatal: true }).decode(bytes, { stream: true })
    return true
  } catch {
    return false
  }
}

/** Text of a cell or header line. A byte that is no UTF-8 far behind the window is read as Latin-1, as loggers mean it. */
export function cellDecoder(encoding: Encoding): (bytes: Uint8Array) => string {
  const latin = new TextDecoder('windows-1252')
  if (encoding === 'windows-1252') return (bytes) => latin.decode(bytes)
  const utf8 = new TextDecoder('utf-8', { fatal: true, ignoreBOM: true })
  return (bytes) => {
    try {
      return utf8.decode(bytes)
    } catch {
      return latin.decode(bytes)
    }
  }
}

/** UTF-16 bytes to UTF-8 bytes, in pieces of any size. */
export function transcoder(encoding: 'utf-16le' | 'utf-16be'): { feed(bytes: Uint8Array): Uint8Array; end(): Uint8Array } {
  const decoder = new TextDecoder(encoding, { ignoreBOM: true })
  const encoder = new TextEncoder()
  return {
    feed: (bytes) => encoder.encode(decoder.decode(bytes, { stream: true })),
    end: () => encoder.encode(decoder.decode()),
  }
}

/** How many UTF-16 bytes the text of these UTF-8 bytes takes: one unit a character, two for those of four bytes. */
export function utf16Length(utf8: Uint8Array): number {
  let units = 0
  for (const b of utf8) units += (b & 0xc0) === 0x80 ? 0 : b >= 0xf0 ? 2 : 1
  return 2 * units
}
