import { crc32 } from 'node:zlib'
import { MonitorError } from '../core/errors.ts'

/** CRC-32 of some numbers (their 64 bits each) and a text: SQLite has no checksum of its own over a page. */
export function checksum(numbers: readonly number[], text = ''): number {
  return crc32(text, crc32(new Uint8Array(Float64Array.from(numbers).buffer)))
}

/** A record that is not there or not as it was written. */
export const damaged = (what: string) =>
  new MonitorError('STORE_CORRUPT', `the store has lost or damaged ${what}`, { hint: 'restore the data folder from a backup' })
