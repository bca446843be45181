import { copyFileSync, mkdirSync, readFileSync, statSync, truncateSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import Database from 'better-sqlite3'
import { expect, it } from 'vitest'
import { MonitorError } from '../../server/core/errors.ts'
import { openStore, type Store } from '../../server/store/open.ts'
import { entriesOf as entries } from './appender.ts'
import { damageRounds, fill, oneLine } from './damage.ts'
import { aRun, close, linesOf, newFolder, newStore, noise, readLines } from './helpers.ts'
import { startAppender } from './killing.ts'

function errorOf(act: () => unknown): MonitorError {
  try {
    act()
  } catch (error) {
    if (error instanceof MonitorError) return error
    throw error
  }
  throw new Error('nothing was thrown')
}

it('refuses a second process on one store while the first lives, and takes the store over when that one was killed', async () => {
  const dir = newFolder()
  const first = newStore(dir)
  const run = first.runs.create(aRun)
  expect(errorOf(() => openStore(dir)).code).toBe('STORE_LOCKED')
  close(first)
  const child = startAppender(newFolder(), dir, [run])
  await new Promise<void>((resolve) => createInterface({ input: child.stdout! }).once('line', () => resolve()))
  const refused = errorOf(() => openStore(dir))
  expect(refused.code).toBe('STORE_LOCKED')
  expect(refused.line()).toContain('in use by another process; stop that one, or choose another --data folder')
  const looking = newStore(dir, { readonly: true })
  expect(looking.sequence.count(run).entries).toBeGreaterThan(0)
  const gone = new Promise((resolve) => child.once('close', resolve))
  child.kill('SIGKILL')
  await gone
  expect(newStore(dir).sequence.count(run).entries).toBeGreaterThanOrEqual(looking.sequence.count(run).entries)
})

it('says what to do when the folder cannot be made, is a file, or holds no store to read', () => {
  const file = join(newFolder(), 'taken')
  writeFileSync(file, 'not a folder')
  for (const error of [
    errorOf(() => openStore(file)),
    errorOf(() => openStore(join(file, 'below'))),
    errorOf(() => openStore(newFolder(), { readonly: true })),
  ]) {
    expect(error.code).toBe('STORE_OPEN')
    expect(error.hint).toContain('--data')
    oneLine(error)
  }
})

it('refuses to write where it only looks, and a file in its place that is no database', () => {
  const dir = newFolder()
  const store = newStore(dir)
  close(store)
  const error = errorOf(() => newStore(dir, { readonly: true }).runs.create(aRun))
  expect(error.code).toBe('STORE_OPEN')
  const other = newFolder()
  writeFileSync(join(other, 'clearbore.db'), 'a text of more than a hundred bytes, which no database begins with. '.repeat(40))
  const broken = errorOf(() => openStore(other))
  expect(broken.code).toBe('STORE_CORRUPT')
  oneLine(broken)
  // The refusal let go of the lock.
  expect(errorOf(() => openStore(other)).code).toBe('STORE_CORRUPT')
})

it('refuses a store of a newer version and leaves it untouched', () => {
  const dir = newFolder()
  close(newStore(dir))
  const db = new Database(join(dir, 'clearbore.db'))
  db.pragma('user_version = 99')
  db.close()
  const before = readFileSync(join(dir, 'clearbore.db'))
  for (const options of [{}, { readonly: true }]) {
    const error = errorOf(() => openStore(dir, options))
    expect(error.code).toBe('STORE_SCHEMA_NEWER')
    expect(error.line()).toContain('use the newer version of the tool')
  }
  expect(readFileSync(join(dir, 'clearbore.db')).equals(before)).toBe(true)
})

it('says that the disk is full, keeps what was acknowledged, and goes on from there once there is room', () => {
  const dir = newFolder()
  const small = newStore(dir, { maxPages: 100, synchronous: 'NORMAL' })
  const run = small.runs.create(aRun)
  let acknowledged = 0
  const full = errorOf(() => {
    for (let n = 0; n < 1000; n++) {
      small.sequence.append([{ run, entries: entries(0, acknowledged, acknowledged + 200) }])
      acknowledged += 200
    }
  })
  expect(full.code).toBe('DISK_FULL')
  expect(full.line()).toContain('free some space')
  expect(acknowledged).toBeGreaterThan(1000)
  expect(readLines(small, run)).toEqual(linesOf(entries(0, 0, acknowledged)))
  close(small)
  const roomy = newStore(dir)
  expect(roomy.sequence.count(run).entries).toBe(acknowledged)
  fill(roomy, run, acknowledged + 9000, 9000)
  roomy.upkeep()
  expect(readLines(roomy, run)).toEqual(linesOf(entries(0, 0, acknowledged + 9000)))
})

it('never reads other readings out of a file damaged in 40 ways (pages, sectors, single bits): it says so, or the place did not matter', () => {
  expect(damageRounds(40, 5).said).toBeGreaterThan(20)
})

it('tells a lost record of any table from a gap in the readings', () => {
  const dir = newFolder()
  const store = newStore(dir)
  const run = store.runs.create(aRun)
  fill(store, run, 48_000, 6000)
  fill(store, run, 49_000, 100)
  const { fromMs, toMs } = store.readings.span(run)!
  close(store)
  const file = join(dir, 'clearbore.db')
  const sound = readFileSync(file)
  const asks: Record<string, (s: Store) => unknown> = {
    read: (s) => readLines(s, run),
    envelope: (s) => s.readings.envelope(run, [0], fromMs, toMs, 50),
    samples: (s) => s.readings.samples(run, [0], fromMs, toMs),
    acts: (s) => s.sequence.acts(run),
  }
  const lost: [table: string, condition: string, asks: string[]][] = [
    ['tier', 'level = 0', ['samples']],
    ['tier', 'level = 0 AND end_seq = (SELECT max(end_seq) FROM tier)', ['samples']],
    ['tier', 'level = 1', ['envelope', 'samples']],
    ['segment', 'true', ['read', 'samples']],
    ['strip', 'true', ['read', 'samples']],
    ['stage', 'true', ['read', 'envelope', 'samples']],
    ['act', 'true', ['read', 'acts']],
  ]
  for (const [table, condition, names] of lost) {
    writeFileSync(file, sound)
    const db = new Database(file)
    db.pragma('foreign_keys = OFF')
    db.exec(`DROP TRIGGER IF EXISTS ${table}_kept`)
    const rowids = db.prepare(`SELECT rowid FROM ${table} WHERE ${condition} ORDER BY rowid`).pluck().all()
    db.prepare(`DELETE FROM ${table} WHERE rowid = ?`).run(rowids[Math.floor((rowids.length - 1) / 2)])
    db.close()
    const opened = newStore(dir)
    for (const name of names) expect(() => asks[name]!(opened), `${table} ${condition} ${name}`).toThrow('has lost or damaged')
    expect(opened.check().length).toBeGreaterThan(0)
    close(opened)
  }
})

it('comes back to the last whole commit when its log of writes was cut short anywhere, and goes on from there', () => {
  const dir = newFolder()
  const store = newStore(dir)
  const run = store.runs.create(aRun)
  fill(store, run, 3000, 100)
  const wal = join(dir, 'clearbore.db-wal')
  const size = statSync(wal).size
  const next = noise(9)
  for (let round = 0; round < 12; round++) {
    const copy = newFolder()
    mkdirSync(copy, { recursive: true })
    for (const name of ['clearbore.db', 'clearbore.db-wal']) copyFileSync(join(dir, name), join(copy, name))
    // The first commits of the log hold the schema and the run; without them there is no run to ask for.
    truncateSync(join(copy, 'clearbore.db-wal'), Math.floor(size * (0.5 + next() / 2)))
    const back = newStore(copy)
    const { entries: kept } = back.sequence.count(run)
    expect(kept % 100).toBe(0)
    expect(readLines(back, run)).toEqual(linesOf(entries(0, 0, kept)))
    fill(back, run, kept + 500, 250)
    expect(readLines(back, run)).toEqual(linesOf(entries(0, 0, kept + 500)))
    close(back)
  }
})
