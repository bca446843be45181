import { createHash, randomBytes } from 'node:crypto'

/** 256 random bits, base64url: 43 characters. Goes to the person and is kept nowhere; the store has its hash. */
export const newToken = (): string => randomBytes(32).toString('base64url')
export const isToken = (text: string): boolean => /^[\w-]{43}$/.test(text)
export const tokenHash = (token: string): Buffer => createHash('sha256').update(token).digest()
