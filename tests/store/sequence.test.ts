import fc from 'fast-check'
import { expect, it } from 'vitest'
import { cell, type RowBlock } from '../../server/core/reading.ts'
import type { Entry } from '../../server/core/sequence.ts'
import { act, anyDouble, aRun, blockOf, close, linesOf, newFolder, newStore, type Row, readLines } from './helpers.ts'

const cellOf = fc.oneof(
  { weight: 50, arbitrary: anyDouble.map((v) => [cell.value, v] as const) },
  { weight: 20, arbitrary: fc.constantFrom(cell.absent, cell.missing, cell.unreadable).map((code) => [code, 0] as const) },
  { weight: 10, arbitrary: fc.tuple(fc.constantFrom(cell.uncertain, cell.bad), anyDouble) },
  // Meaningless by contract, kept all the same.
  { weight: 1, arbitrary: anyDouble.map((v) => [cell.absent, v] as const) },
)
const anyTime = fc.oneof(
  { weight: 5, arbitrary: fc.integer({ min: 1.7e12, max: 1.7e12 + 1e7 }) },
  { weight: 1, arbitrary: fc.double({ noNaN: true, noDefaultInfinity: true }) },
)

const entryOf = (width: number): fc.Arbitrary<Entry> =>
  fc.oneof(
    {
      weight: 4,
      arbitrary: fc
        .array(fc.record({ tMs: anyTime, cells: fc.array(cellOf, { minLength: width, maxLength: width }) }), { maxLength: 8 })
        .map((rows): Entry => ({ kind: 'rows', block: blockOf(rows as Row[], width) })),
    },
    { weight: 2, arbitrary: anyTime.map((tMs): Entry => ({ kind: 'tick', tMs })) },
    { weight: 1, arbitrary: fc.nat(999).map((n): Entry => ({ kind: 'act', act: act(n) })) },
  )

/** Regular rows in bulk, with gaps now and then, so that segments fill. */
function manyRows(n: number, width: number, from: number): RowBlock {
  return blockOf(
    Array.from({ length: n }, (_, i) => ({
      tMs: 1.7e12 + 100 * (from + i),
      cells: Array.from({ length: width }, (_, c) =>
        (from + i) % 97 === c
          ? ([cell.missing, 0] as const)
          : ([cell.value, Math.round(Math.sin(i / 50 + c) * 1e4) / 1e3] as const),
      ),
    })),
    width,
  )
}

it('reads back any sequence in the same order with the same bits, from any number on, appended in any batches, packed at any moment, over a restart', () => {
  const step = fc.oneof(
    { weight: 6, arbitrary: fc.record({ add: fc.array(entryOf(3), { maxLength: 6 }) }) },
    {
      weight: 2,
      arbitrary: fc.record({ bulk: fc.integer({ min: 1000, max: 9000 }), add: fc.array(entryOf(3), { maxLength: 3 }) }),
    },
    { weight: 2, arbitrary: fc.constant('pack' as const) },
    { weight: 1, arbitrary: fc.constant('restart' as const) },
  )
  fc.assert(
    fc.property(fc.array(step, { minLength: 1, maxLength: 14 }), fc.double({ min: 0, max: 1, noNaN: true }), (steps, share) => {
      const folder = newFolder()
      let store = newStore(folder)
      const run = store.runs.create(aRun)
      const truth: string[] = []
      for (const what of steps) {
        if (what === 'pack') store.upkeep()
        else if (what === 'restart') {
          close(store)
          store = newStore(folder)
        } else {
          const entries: Entry[] =
            'bulk' in what ? [...what.add, { kind: 'rows', block: manyRows(what.bulk, 3, truth.length) }] : what.add
          const [next] = store.sequence.append([{ run, entries }])
          truth.push(...linesOf(entries))
          expect(next).toBe(truth.length)
        }
      }
      const from = Math.floor(share * truth.length)
      const check = () => {
        expect(readLines(store, run)).toEqual(truth)
        expect(readLines(store, run, from)).toEqual(truth.slice(from))
        expect(store.sequence.count(run).entries).toBe(truth.length)
      }
      check()
      store.runs.setState(run, 'ended')
      store.upkeep()
      check()
      close(store)
    }),
    { numRuns: 25 },
  )
})

it('numbers blocks, ticks and acts by their place, counting rows one each', () => {
  const store = newStore()
  const run = store.runs.create(aRun)
  const rows = (n: number, from: number): Entry => ({ kind: 'rows', block: manyRows(n, 2, from) })
  const entries: Entry[] = [rows(3, 0), { kind: 'tick', tMs: 1.7e12 }, { kind: 'act', act: act(1) }, rows(2, 3)]
  store.sequence.append([{ run, entries }])
  const seen = () => Array.from(store.sequence.read(run), ({ seq, entry }) => `${seq} ${entry.kind}`)
  expect(seen()).toEqual(['0 rows', '3 tick', '4 act', '5 rows'])
  expect(store.sequence.acts(run)).toEqual([{ seq: 4, act: act(1) }])
  store.runs.setState(run, 'ended')
  store.upkeep()
  expect(seen()).toEqual(['0 rows', '3 tick', '4 act', '5 rows'])
})

it('is read and packed exactly beside a second connection of the same process that appends to another run', () => {
  const folder = newFolder()
  const live = newStore(folder)
  const beside = newStore(folder, { joined: true, synchronous: 'NORMAL' })
  const a = live.runs.create(aRun)
  const b = beside.runs.create({ ...aRun, skidId: 'egret' })
  const truth = { a: [] as string[], b: [] as string[] }
  const add = (store: typeof live, run: typeof a, n: number, lines: string[]) => {
    const entries: Entry[] = [
      { kind: 'rows', block: manyRows(n, 2, lines.length) },
      { kind: 'act', act: act(lines.length) },
    ]
    store.sequence.append([{ run, entries }])
    lines.push(...linesOf(entries))
  }
  for (let round = 0; round < 12; round++) {
    add(live, a, 700, truth.a)
    add(beside, b, 5000, truth.b)
    if (round % 4 === 1) beside.upkeep()
    if (round % 4 === 3) live.upkeep()
  }
  // Packing by the one while the other is half-way through.
  const half = beside.sequence.read(a)
  const seen: Entry[] = [half.next().value!.entry]
  live.runs.setState(a, 'ended')
  live.upkeep()
  for (const { entry } of half) seen.push(entry)
  expect(linesOf(seen)).toEqual(truth.a)
  expect(readLines(live, b)).toEqual(truth.b)
  expect(live.check()).toEqual([])
})

it('keeps several runs apart in one commit, with the state of each source', () => {
  const store = newStore()
  const a = store.runs.create(aRun)
  const b = store.runs.create({ ...aRun, skidId: 'egret' })
  const of = (width: number): Entry[] => [{ kind: 'rows', block: manyRows(5, width, 0) }]
  expect(store.sequence.sourceState(a)).toBeNull()
  store.sequence.append([
    { run: a, entries: of(2), sourceState: { byte: 120 } },
    { run: b, entries: of(3) },
  ])
  store.sequence.append([{ run: a, entries: [] }])
  expect(store.sequence.sourceState(a)).toEqual({ byte: 120 })
  expect(readLines(store, a)).toEqual(linesOf(of(2)))
  expect(readLines(store, b)).toEqual(linesOf(of(3)))
})

it('refuses rows of another width, of no finite time, or of no run, and keeps nothing of that append', () => {
  const store = newStore()
  const run = store.runs.create(aRun)
  const good: Entry = { kind: 'rows', block: manyRows(5, 2, 0) }
  store.sequence.append([{ run, entries: [good] }])
  const wide: Entry = { kind: 'rows', block: manyRows(1, 3, 0) }
  const timeless: Entry = { kind: 'rows', block: blockOf([{ tMs: Number.NaN, cells: [] }], 2) }
  expect(() => store.sequence.append([{ run, entries: [good, wide] }])).toThrow('rows of 2 tags, these have 3')
  expect(() =>
    store.sequence.append([
      { run, entries: [good] },
      { run, entries: [timeless] },
    ]),
  ).toThrow('no finite time')
  expect(() => store.sequence.append([{ run: (run + 7) as typeof run, entries: [good] }])).toThrow('there is no run')
  expect(readLines(store, run)).toEqual(linesOf([good]))
})

it('keeps the words of a run in the same commit as the first rows that use them, and takes them twice', () => {
  const store = newStore()
  const run = store.runs.create(aRun)
  const entries: Entry[] = [{ kind: 'rows', block: manyRows(1, 1, 0) }]
  store.sequence.append([{ run, entries, words: { from: 0, words: ['startup', 'production'] } }])
  store.sequence.append([{ run, entries, words: { from: 1, words: ['production', 'flush'] } }])
  expect(store.runs.words(run)).toEqual(['startup', 'production', 'flush'])
  expect(() => store.sequence.append([{ run, entries, words: { from: 2, words: ['hold'] } }])).toThrow(
    "word 2 of run 1 is 'flush', not 'hold'",
  )
  expect(store.sequence.count(run)).toEqual({ entries: 2, rows: 2, width: 1 })
})
