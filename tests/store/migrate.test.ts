import { createHash } from 'node:crypto'
import { readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { gunzipSync } from 'node:zlib'
import Database from 'better-sqlite3'
import { expect, it } from 'vitest'
import { steps } from '../../server/store/migrate.ts'
import { close, newFolder, newStore } from './helpers.ts'

/** A step that some store has been through stays as it is; a change of the schema is a further step, and its sum is added here. */
const sums = ['cd12d2db41cb2e92', '18ff7357d702d49b', '4e55f6e174a7f6d9', '172c362f934f1200']

it('has not changed a step of the schema that stores out there have been through', () => {
  expect(steps.map((step) => createHash('sha256').update(step).digest('hex').slice(0, 16))).toEqual(sums)
})

it('reads a store of the first schema with everything in it, and goes on in it', () => {
  const dir = newFolder()
  writeFileSync(join(dir, 'clearbore.db'), gunzipSync(readFileSync(new URL('fixtures/schema-1.db.gz', import.meta.url))))
  expect(() => newStore(dir, { readonly: true })).toThrow('the store has schema 1')
  const store = newStore(dir)
  const [run] = store.runs.list()
  const id = run!.id
  // As the script that made it wrote: 6,000 entries at once, 500 in five live appends.
  const rows = [...store.sequence.read(id)].flatMap(({ entry }) =>
    entry.kind === 'rows' ? [...entry.block.values.subarray(0, entry.block.rows * 2)] : [],
  )
  const isRow = (seq: number) => (seq * 7) % 11 !== 0 && !((seq * 7) % 11 === 1 && seq % 50 < 10)
  const truth = Array.from({ length: 6500 }, (_, seq) => seq)
    .filter(isRow)
    .flatMap((seq) => [0, 1].map((c) => Math.round(Math.sin(seq / 40 + c) * 1000) / 100))
  expect(rows).toEqual(truth)
  expect(store.readings.samples(id, [0], 1.7e12, 1.7e12 + 650_000)[0]!.values.length).toBe(truth.length / 2)
  expect(store.runs.words(id)).toEqual(['startup', 'production'])
  expect([
    store.sequence.sourceState(id),
    store.snapshots.latest(id)?.seq,
    store.events.count(id),
    store.settings.at('heron', 2)?.version,
  ]).toEqual([{ byte: 6400 }, 6400, 1, 1])
  // What it held unchained is in its chains now, as it lies there, behind a record that says so.
  const chain = store.trail.ofRun(id).map(({ record }) => record)
  expect(chain.slice(0, 3).map((r) => r.kind)).toEqual(['genesis', 'adopted', 'words'])
  const kinds = (kind: string) => chain.filter((r) => r.kind === kind).length
  expect([kinds('act'), kinds('readings'), kinds('events')]).toEqual([store.sequence.acts(id).length, 1, 1])
  expect(store.trail.ofSite().map(({ record }) => record.kind)).toEqual(['genesis', 'adopted', 'settings', 'run.begun'])
  expect(store.trail.verify()).toMatchObject({ faults: [], signed: null })
  store.sequence.append([{ run: id, entries: [{ kind: 'tick', tMs: 1.7e12 }] }])
  store.runs.setState(id, 'ended')
  store.upkeep()
  expect(store.sequence.count(id).entries).toBe(6501)
  expect(store.check()).toEqual([])
  const { faults, chains } = store.trail.verify()
  expect([faults, chains[1]]).toMatchObject([[], { stagedRows: 0, sealedRows: truth.length / 2 }])
})

it('begins the chains of an old store once, in the commit of its migration: a second opening adds nothing', () => {
  const dir = newFolder()
  writeFileSync(join(dir, 'clearbore.db'), gunzipSync(readFileSync(new URL('fixtures/schema-1.db.gz', import.meta.url))))
  const heads = [0, 1].map(() => {
    const store = newStore(dir)
    const found = [store.trail.signing().store, store.trail.head(0), store.trail.head(store.runs.list()[0]!.id)]
    close(store)
    return found
  })
  expect(heads[1]).toEqual(heads[0])
})

it('makes strict tables only, counts its steps, and writes nothing when it opens a store that is up to date', () => {
  const dir = newFolder()
  close(newStore(dir))
  const file = join(dir, 'clearbore.db')
  const before = readFileSync(file)
  close(newStore(dir))
  expect(readFileSync(file).equals(before)).toBe(true)
  const db = new Database(file, { readonly: true })
  expect(db.pragma('user_version', { simple: true })).toBe(steps.length)
  expect(db.pragma('journal_mode', { simple: true })).toBe('wal')
  expect(db.pragma('auto_vacuum', { simple: true })).toBe(2)
  const lax = db
    .prepare("SELECT name FROM pragma_table_list WHERE type = 'table' AND strict = 0 AND name NOT LIKE 'sqlite%'")
    .pluck()
    .all()
  expect(lax).toEqual([])
  db.close()
})
