import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import fc from 'fast-check'
import { afterEach } from 'vitest'
import type { RowBlock } from '../../server/core/reading.ts'
import type { Act, Entry } from '../../server/core/sequence.ts'
import type { RunId } from '../../server/store/keys.ts'
import { openStore, type Store, type StoreOptions } from '../../server/store/open.ts'
import type { NewRun } from '../../server/store/runs.ts'

const folders: string[] = []
const stores: Store[] = []
afterEach(() => {
  for (const store of stores.splice(0)) store.close()
  for (const folder of folders.splice(0)) rmSync(folder, { recursive: true, force: true })
})

export function newFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), 'store-'))
  folders.push(folder)
  return folder
}

export function newStore(folder = newFolder(), options: StoreOptions = { synchronous: 'NORMAL' }): Store {
  const store = openStore(folder, options)
  stores.push(store)
  return store
}

export function close(store: Store): void {
  stores.splice(stores.indexOf(store), 1)
  store.close()
}

export const aRun: NewRun = {
  skidId: 'heron',
  title: 'night',
  skidFile: 'heron.yaml',
  skidText: 'skid: heron\n',
  source: 'simulator',
  startedMs: 1_700_000_000_000,
  toolVersion: '0.1.0',
}

export interface Row {
  readonly tMs: number
  readonly cells: readonly (readonly [code: number, value: number])[]
}

export function blockOf(rows: readonly Row[], width: number): RowBlock {
  const block: RowBlock = {
    rows: rows.length,
    width,
    tMs: new Float64Array(rows.length),
    values: new Float64Array(rows.length * width),
    codes: new Uint8Array(rows.length * width),
  }
  rows.forEach((row, i) => {
    block.tMs[i] = row.tMs
    row.cells.forEach(([code, value], c) => {
      block.codes[i * width + c] = code
      block.values[i * width + c] = value
    })
  })
  return block
}

const bits = new DataView(new ArrayBuffer(8))
/** The 64 bits of a double, so that NaN, −0 and +0 are told apart. */
export function bitsOf(value: number): string {
  bits.setFloat64(0, value)
  return bits.getBigUint64(0).toString(16)
}

/** A sequence as flat lines, one a row, tick or act, whatever the sizes of its blocks. */
export function linesOf(entries: Iterable<Entry>): string[] {
  const lines: string[] = []
  for (const entry of entries) {
    if (entry.kind === 'tick') lines.push(`tick ${bitsOf(entry.tMs)}`)
    else if (entry.kind === 'act') lines.push(`act ${JSON.stringify(entry.act)}`)
    else {
      const { rows, width, tMs, values, codes } = entry.block
      for (let i = 0; i < rows; i++) {
        const cells = Array.from({ length: width }, (_, c) => `${codes[i * width + c]}:${bitsOf(values[i * width + c]!)}`)
        lines.push(`row ${bitsOf(tMs[i]!)} ${cells.join(' ')}`)
      }
    }
  }
  return lines
}

export const readLines = (store: Store, run: RunId, from = 0): string[] =>
  linesOf(Array.from(store.sequence.read(run, from), ({ entry }) => entry))

export const act = (n: number): Act => ({
  kind: 'comment',
  alarm: null,
  text: `note ${n}`,
  tMs: 1_700_000_000_000 + n,
  person: 'demo operator',
})

/** A seeded noise in [0, 1). */
export function noise(seed: number): () => number {
  let s = seed
  return () => {
    s = (Math.imul(s, 1664525) + 1013904223) >>> 0
    return s / 4294967296
  }
}

/** Doubles of every kind, most of them on a decimal grid as loggers write them. */
export const anyDouble: fc.Arbitrary<number> = fc.oneof(
  {
    weight: 6,
    arbitrary: fc.tuple(fc.integer({ min: -99999, max: 99999 }), fc.integer({ min: 0, max: 4 })).map(([k, d]) => k / 10 ** d),
  },
  { weight: 2, arbitrary: fc.double() },
  { weight: 1, arbitrary: fc.float() },
  {
    weight: 1,
    arbitrary: fc.constantFrom(
      0,
      -0,
      Number.NaN,
      Infinity,
      -Infinity,
      5e-324,
      1.7976931348623157e308,
      2 ** 51,
      -(2 ** 51),
      2 ** 53,
      0.1 + 0.2,
    ),
  },
)
