import { MonitorError } from '../../../server/core/errors.ts'
import type { RowBlock } from '../../../server/core/reading.ts'
import type { LogFormat, Skid, TagSpec } from '../../../server/core/skid.ts'
import type { Quantity, Unit } from '../../../server/core/units.ts'
import { type LogOptions, PushReader } from '../../../server/ingest/csv/reader.ts'
import type { LogTally } from '../../../server/ingest/csv/tally.ts'

export const tag = (name: string, more: Partial<TagSpec> = {}): TagSpec => ({
  tag: name, column: name, quantity: 'pressure' as Quantity, unit: 'bar' as Unit | null, range: null, accuracyPct: 0.25, accuracyAssumed: true,
  signal: null, sensor: null, burnout: null, setpointFor: null, ...more,
}) // biome-ignore format: a list

export const logFormat = (more: Partial<LogFormat> = {}): LogFormat => ({
  files: null, time: null, timeFormat: [], missing: [], clockOffsetSeconds: 0, ...more,
}) // biome-ignore format: a list

export const skidOf = (tags: readonly (string | TagSpec)[], more: Partial<Skid> = {}): Skid => ({
  skid: 'plover', title: 'Plover bench', timeZone: 'UTC', scanSeconds: 1, lateSeconds: 2, phaseColumn: null, log: [],
  detection: { falseAlarmDays: 30, riseToFindPct: 5 }, tags: tags.map((t) => (typeof t === 'string' ? tag(t) : t)),
  streams: [], segments: [], alarms: {}, ...more,
}) // biome-ignore format: a list

export interface Read {
  readonly t: number[]
  /** Per tag: values, with null where the code is no value. */
  readonly values: (number | null)[][]
  readonly codes: number[][]
  readonly words: string[]
  readonly tally: LogTally
}

/** Copies rows out of blocks, which the reader uses again. */
export function collector(width: number): {
  add(blocks: readonly RowBlock[]): void
  t: number[]
  values: (number | null)[][]
  codes: number[][]
} {
  const t: number[] = []
  const values: (number | null)[][] = Array.from({ length: width }, () => [])
  const codes: number[][] = Array.from({ length: width }, () => [])
  return {
    t,
    values,
    codes,
    add(blocks) {
      for (const b of blocks) {
        for (let r = 0; r < b.rows; r++) {
          t.push(b.tMs[r]!)
          for (let c = 0; c < width; c++) {
            const code = b.codes[r * width + c]!
            codes[c]!.push(code)
            values[c]!.push(code === 1 || code >= 4 ? b.values[r * width + c]! : null)
          }
        }
      }
    },
  }
}

export const bytesOf = (text: string | Uint8Array): Uint8Array => (typeof text === 'string' ? new TextEncoder().encode(text) : text)
export const latin1 = (text: string): Uint8Array => Uint8Array.from(text, (c) => c.charCodeAt(0))
export const utf16 = (text: string, bigEndian: boolean): Uint8Array => {
  const out = new Uint8Array(2 * text.length)
  for (let i = 0; i < text.length; i++) new DataView(out.buffer).setUint16(2 * i, text.charCodeAt(i), !bigEndian)
  return out
}

/** Reads a whole file in pieces cut at `cuts` (ascending offsets). */
export function read(
  file: string | Uint8Array,
  skid: Skid,
  more: Partial<LogOptions> & { name?: string; cuts?: readonly number[] } = {},
): Read {
  const { name = 'run.csv', cuts = [], ...options } = more
  const bytes = bytesOf(file)
  const words: string[] = []
  const reader = new PushReader(name, { skid, words, startMs: null, ...options })
  const out = collector(skid.tags.length + (skid.phaseColumn === null ? 0 : 1))
  let from = 0
  for (const cut of [...cuts, bytes.length]) {
    out.add(reader.feed(bytes.subarray(from, cut)))
    from = cut
  }
  out.add(reader.end())
  return { t: out.t, values: out.values, codes: out.codes, words, tally: reader.tally }
}

/** The one line of the MonitorError that `f` throws. */
export function mistake(f: () => unknown): MonitorError {
  try {
    f()
  } catch (e) {
    if (e instanceof MonitorError) return e
    throw e
  }
  throw new Error('expected a MonitorError, but nothing was thrown')
}

export const at = (iso: string): number => Date.parse(iso)
