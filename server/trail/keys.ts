import { createHash, createPrivateKey, createPublicKey, generateKeyPairSync, type KeyObject, sign, verify } from 'node:crypto'
import { chmodSync, existsSync, mkdirSync, readFileSync, realpathSync, renameSync, writeFileSync } from 'node:fs'
import { basename, dirname, join, relative, resolve, sep } from 'node:path'
import { MonitorError } from '../core/errors.ts'
import { canonical } from './canonical.ts'

/** A signed head as the key's folder remembers it, and as `verify --against` takes it. */
export interface Anchor {
  readonly store: string
  readonly count: number
  readonly head: string
}

export interface Signer {
  /** The 32 raw bytes of the public key in hex. */
  readonly key: string
  readonly fingerprint: string
  /** Signature (Ed25519) of a statement's canonical JSON. */
  sign(statement: unknown): Buffer
}

const publicHex = (key: KeyObject): string => Buffer.from(key.export({ format: 'jwk' }).x ?? '', 'base64url').toString('hex')

/** First 32 hex digits of the SHA-256 of the public key's 32 bytes. */
export const fingerprintOf = (key: string): string =>
  createHash('sha256').update(Buffer.from(key, 'hex')).digest('hex').slice(0, 32)

/** Whether a signature over a statement's canonical JSON is that of a public key in hex. */
export function isSigned(statement: unknown, signature: Uint8Array, key: string): boolean {
  if (!/^[0-9a-f]{64}$/.test(key) || signature.length !== 64) return false
  try {
    const x = Buffer.from(key, 'hex').toString('base64url')
    const publicKey = createPublicKey({ key: { kty: 'OKP', crv: 'Ed25519', x }, format: 'jwk' })
    return verify(null, Buffer.from(canonical(statement)), publicKey, signature)
  } catch {
    return false
  }
}

/** A public key from a PEM file or from 64 hex digits. Errors: FILE_READ. */
export function readPublicKey(file: string): string {
  let text: string
  try {
    text = readFileSync(file, 'utf8').trim()
  } catch (cause) {
    throw new MonitorError('FILE_READ', `cannot read: ${(cause as Error).message}`, { place: { file }, cause })
  }
  if (/^[0-9a-f]{64}$/i.test(text)) return text.toLowerCase()
  try {
    const key = createPublicKey(text)
    if (key.asymmetricKeyType === 'ed25519') return publicHex(key)
  } catch {
    // Told below.
  }
  throw new MonitorError('FILE_READ', 'found no public key of Ed25519, expected a PEM file or 64 hex digits', { place: { file } })
}

/** Errors: USAGE when the folder for keys lies in the folder of the data: who holds the data would hold the key. */
export function checkApart(keys: string, data: string): void {
  // What is not there yet is judged by the nearest folder that is: a link may lead into the data.
  const real = (path: string): string => {
    const full = resolve(path)
    return existsSync(full) || dirname(full) === full ? realpathSync(full) : join(real(dirname(full)), basename(full))
  }
  const way = relative(real(data), real(keys))
  if (way === '' || (!way.startsWith(`..${sep}`) && way !== '..' && resolve(way) !== way))
    throw new MonitorError('USAGE', `the folder for keys ${keys} lies in the data folder ${data}`, {
      hint: 'keep keys apart from the data: whoever holds both can rewrite the record',
    })
}

const signerOf = (secret: KeyObject): Signer => {
  const key = publicHex(createPublicKey(secret))
  return { key, fingerprint: fingerprintOf(key), sign: (s) => sign(null, Buffer.from(canonical(s)), secret) }
}

/** The keys and the last signed heads of stores, a file each, in a folder outside the data. */
export function keyFolder(dir: string, store: string) {
  const file = (end: string): string => join(dir, `${store}.${end}`)
  return {
    /** The key of this store; null where there is none. Errors: STORE_OPEN when it cannot be read. */
    find(): Signer | null {
      if (!existsSync(file('key'))) return null
      try {
        return signerOf(createPrivateKey(readFileSync(file('key'), 'utf8')))
      } catch (cause) {
        throw new MonitorError('STORE_OPEN', `cannot read the key ${file('key')}: ${(cause as Error).message}`, { cause })
      }
    },
    /** A new key, readable by this user alone, with its public half beside it. */
    make(): Signer {
      const { privateKey, publicKey } = generateKeyPairSync('ed25519')
      mkdirSync(dir, { recursive: true, mode: 0o700 })
      writeFileSync(file('key'), privateKey.export({ type: 'pkcs8', format: 'pem' }), { mode: 0o600, flag: 'wx', flush: true })
      chmodSync(file('key'), 0o600)
      writeFileSync(file('pub'), publicKey.export({ type: 'spki', format: 'pem' }))
      return signerOf(privateKey)
    },
    /** The head that was signed last; null where none is remembered or it cannot be read. */
    anchor(): Anchor | null {
      try {
        return JSON.parse(readFileSync(file('head.json'), 'utf8')) as Anchor
      } catch {
        return null
      }
    },
    remember(anchor: Anchor): void {
      const temporary = file(`head.${process.pid}.part`)
      writeFileSync(temporary, `${canonical(anchor)}\n`, { flush: true })
      renameSync(temporary, file('head.json'))
    },
  }
}
export type KeyFolder = ReturnType<typeof keyFolder>

/** What a signed head of the site's chain says. */
export const headStatement = (store: string, count: number, head: string, tMs: number) => ({
  statement: 'clearbore head 1',
  store,
  count,
  head,
  tMs,
})
