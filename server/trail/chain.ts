import { createHash } from 'node:crypto'
import { wellFormed } from './canonical.ts'

/** What stands before the first record of a chain: 32 bytes of zero. */
export const nothing: Buffer = Buffer.alloc(32)

/**
 * Hash of a record of a chain: SHA-256 over the 32 bytes of the previous record's hash followed by the UTF-8 bytes of the record's canonical
 * JSON. There is nothing else in the preimage: no length, no separator, no line end.
 */
export const hashOf = (previous: Uint8Array, text: string): Buffer =>
  createHash('sha256').update(previous).update(text, 'utf8').digest()

/** SHA-256 of a text's UTF-8 bytes, as 64 hex digits. */
export const sha256 = (text: string): string => createHash('sha256').update(text, 'utf8').digest('hex')

/**
 * SHA-256 over the columns of a database row, as the JSON array of what is stored in them, or of several rows as an
 * array of such arrays. For finite numbers, texts and null this JSON is the canonical one.
 */
export const rowHash = (columns: readonly unknown[]): string => sha256(JSON.stringify(wellFormed(columns)))

/** SHA-256 over some byte strings, each behind its length as four bytes, most significant first. */
export function partsHash(parts: readonly Uint8Array[]): string {
  const hash = createHash('sha256')
  const length = new DataView(new ArrayBuffer(4))
  for (const part of parts) {
    length.setUint32(0, part.length)
    hash.update(new Uint8Array(length.buffer)).update(part)
  }
  return hash.digest('hex')
}
