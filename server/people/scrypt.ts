import { randomBytes, scrypt, timingSafeEqual } from 'node:crypto'
import { MonitorError } from '../core/errors.ts'
import { passwordText } from './password.ts'

/** N = 2^logN. RFC 7914. */
export interface ScryptCost {
  readonly logN: number
  readonly r: number
  readonly p: number
}

/** 64 MiB and some tenths of a second for each guess. */
const usualCost: ScryptCost = { logN: 16, r: 8, p: 1 }
const saltBytes = 16
const hashBytes = 32

interface Stored extends ScryptCost {
  readonly salt: Buffer
  readonly hash: Buffer
}

const textOf = (s: Stored): string => ['scrypt', s.logN, s.r, s.p, s.salt.toString('base64'), s.hash.toString('base64')].join(':')
function storedOf(text: string): Stored {
  const [, logN, r, p, salt = '', hash = ''] = text.split(':')
  return { logN: Number(logN), r: Number(r), p: Number(p), salt: Buffer.from(salt, 'base64'), hash: Buffer.from(hash, 'base64') }
}

const compute = (password: string, salt: Buffer, { logN, r, p }: ScryptCost): Promise<Buffer> =>
  new Promise((done, fail) =>
    scrypt(passwordText(password), salt, hashBytes, { N: 2 ** logN, r, p, maxmem: 256 * 2 ** logN * r }, (error, key) =>
      error === null ? done(key) : fail(error),
    ),
  )

/**
 * Passwords as `scrypt:logN:r:p:salt:hash`. One is computed at a time and few wait: a storm of sign-ins keeps one core busy and never the
 * readings waiting. Errors: BUSY.
 */
export function createHasher({ cost = usualCost, mostWaiting = 12 }: { cost?: ScryptCost; mostWaiting?: number } = {}) {
  let last: Promise<unknown> = Promise.resolve()
  let waiting = 0
  let computed = 0
  async function inTurn(password: string, salt: Buffer, at: ScryptCost): Promise<Buffer> {
    if (waiting >= mostWaiting)
      throw new MonitorError('BUSY', 'too many people are signing in at this moment', { hint: 'try again in some seconds' })
    waiting++
    const mine = last.then(() => compute(password, salt, at))
    last = mine.catch(() => undefined)
    try {
      return await mine
    } finally {
      waiting--
      computed++
    }
  }
  const nobody: Stored = { ...cost, salt: randomBytes(saltBytes), hash: randomBytes(hashBytes) }

  return {
    async hash(password: string): Promise<string> {
      const salt = randomBytes(saltBytes)
      return textOf({ ...cost, salt, hash: await inTurn(password, salt, cost) })
    },
    /** `stored` null, of somebody who is not there: the same work, and false. */
    async verify(password: string, stored: string | null): Promise<boolean> {
      const against = stored === null ? nobody : storedOf(stored)
      const same = timingSafeEqual(await inTurn(password, against.salt, against), against.hash)
      return same && stored !== null
    },
    /** Kept under other costs than those of now. */
    isStale(stored: string): boolean {
      const { logN, r, p } = storedOf(stored)
      return logN !== cost.logN || r !== cost.r || p !== cost.p
    },
    /** Computations so far. */
    computed: (): number => computed,
  }
}
export type Hasher = ReturnType<typeof createHasher>
