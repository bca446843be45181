import { createHash } from 'node:crypto'
import { canonical } from './canonical.ts'

/** The last line of an exported record. */
export interface Proof {
  /** SHA-256 of all bytes of the file before this line. */
  readonly content: string
  /** Public key and signature (Ed25519) in hex; null where the store had no key. */
  readonly key: string | null
  readonly signature: string | null
}

export type Sign = (statement: unknown) => { readonly key: string; readonly signature: string } | null

/** What the signature of a record says. */
export const recordStatement = (content: string) => ({ statement: 'clearbore record 1', content })

const mark = '"proof":'

/** The text of a file closed by the line that proves it. The text must end with `,` and a line end. */
export function* withProof(pieces: Iterable<string>, sign: Sign): Generator<string> {
  const hash = createHash('sha256')
  for (const piece of pieces) {
    hash.update(piece, 'utf8')
    yield piece
  }
  yield proofLine(hash.digest('hex'), sign)
}

const proofLine = (content: string, sign: Sign): string => {
  const by = sign(recordStatement(content))
  return lineOf({ content, key: by?.key ?? null, signature: by?.signature ?? null })
}
const lineOf = (proof: Proof): string => `${mark}${canonical(proof)}}\n`

/** Longest a proof line can be. */
export const longestProof = 512

/** Finds the proof line at the end of a file; null where it is not exactly as `withProof` writes it. `at` is its first byte in the tail. */
export function readProof(tail: Buffer): { readonly proof: Proof; readonly at: number } | null {
  const at = tail.lastIndexOf(`\n${mark}`) + 1
  if (at === 0) return null
  const text = tail.subarray(at).toString('utf8')
  try {
    const proof = JSON.parse(text.slice(mark.length, -2)) as Proof
    const isWhole = lineOf(proof) === text && Object.keys(proof).length === 3
    return isWhole && isHex(proof.content, 64) && isHexOrNull(proof.key, 64) && isHexOrNull(proof.signature, 128)
      ? { proof, at }
      : null
  } catch {
    return null
  }
}

const isHex = (text: unknown, digits: number): boolean =>
  typeof text === 'string' && text.length === digits && /^[0-9a-f]+$/.test(text)
const isHexOrNull = (text: unknown, digits: number): boolean => text === null || isHex(text, digits)
