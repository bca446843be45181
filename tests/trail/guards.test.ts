import { copyFileSync, readdirSync, readFileSync, rmSync, statSync, symlinkSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { beforeAll, describe, expect, it } from 'vitest'
import { fingerprintOf } from '../../server/trail/keys.ts'
import { cli } from '../helpers/cli.ts'
import { entriesOf } from '../store/appender.ts'
import { aRun, close, newFolder, newStore } from '../store/helpers.ts'
import { keptSample, proofOf as verify } from './sample-store.ts'

let sample: ReturnType<typeof keptSample>
beforeAll(() => {
  sample = keptSample('guards')
})

// REC-02
describe('append-only', () => {
  it.each([
    ...[
      'link',
      'chain',
      'seal',
      'store',
      'act',
      'segment',
      'strip',
      'word',
      'event',
      'alarm_transition',
      'audit',
      'settings',
      'run',
    ].map((table) => `DELETE FROM ${table}`),
    ...['link', 'seal', 'store', 'act', 'segment', 'strip', 'word', 'event', 'alarm_transition', 'audit', 'settings'].map(
      (table) => `UPDATE ${table} SET rowid = rowid`,
    ),
    "UPDATE run SET title = 'x'",
    'INSERT OR REPLACE INTO link SELECT * FROM link WHERE n = 0',
    'INSERT INTO link SELECT chain, n + 2, hash, kind, json FROM link WHERE chain = 0 ORDER BY n DESC LIMIT 1',
    ...['act', 'segment', 'strip', 'word', 'event', 'alarm_transition', 'audit', 'settings', 'seal'].map(
      (table) => `INSERT OR REPLACE INTO ${table} SELECT * FROM ${table} LIMIT 1`,
    ),
  ])('the database itself refuses %s', (sql) => {
    const db = new Database(join(sample.data, 'clearbore.db'))
    const text = sql.startsWith('UPDATE link')
      ? 'UPDATE link SET n = n'
      : sql.replace('rowid = rowid', `${keyOf(sql)} = ${keyOf(sql)}`)
    try {
      expect(() => db.exec(text)).toThrow(/append-only|stays|kept|keeps its id/)
    } finally {
      db.close()
    }
  })
  const keyOf = (sql: string): string =>
    /UPDATE (store|act|segment|strip|audit|settings)/.test(sql) ? 'id' : /UPDATE seal/.test(sql) ? 'count' : 'run'
})

describe('two connections of one process', () => {
  it('append to the same chains in turn, and what each wrote is signed by the one that holds the key', () => {
    const data = newFolder()
    const keys = newFolder()
    const main = newStore(data, { keys })
    const worker = newStore(data, { joined: true, keys })
    const run = main.runs.create(aRun)
    for (let i = 0; i < 40; i++) {
      const store = i % 2 === 0 ? main : worker
      store.sequence.append([{ run, entries: entriesOf(run, 20 * i, 20 * i + 20) }])
      store.audit.append({ tMs: i, person: 'demo engineer', act: 'sign-in', reason: '', body: null })
    }
    expect(worker.trail.signing().key).toBeNull()
    main.trail.seal(true)
    const proof = main.trail.verify()
    expect([proof.faults, proof.unsigned, proof.signed!.heads]).toEqual([[], 0, 1])
    const acts = entriesOf(run, 0, 800).filter((e) => e.kind === 'act').length
    expect(main.trail.ofRun(run).filter(({ record }) => record.kind === 'act').length).toBe(acts)
  })
})

describe('keys', () => {
  it('lie outside the data, readable by this user alone; a folder inside the data is refused', () => {
    const data = newFolder()
    const link = join(newFolder(), 'link')
    symlinkSync(data, link, 'dir')
    for (const inside of [data, join(data, 'keys'), join(data, 'a', '..', 'b'), link, join(link, 'keys', 'mine')])
      expect(() => newStore(data, { keys: inside })).toThrow('lies in the data folder')
    const keys = newFolder()
    const store = newStore(data, { keys })
    const { key, fingerprint, madeIn, trouble } = store.trail.signing()
    expect([madeIn, trouble, fingerprint]).toEqual([keys, null, fingerprintOf(key!)])
    const secret = readdirSync(keys).find((name) => name.endsWith('.key'))!
    if (process.platform !== 'win32') expect(statSync(join(keys, secret)).mode & 0o777).toBe(0o600)
    expect(readFileSync(join(keys, secret), 'utf8')).toContain('PRIVATE KEY')
  })
  it('that are gone do not stop the store: a new one signs, says so, and the change is a record', () => {
    const data = newFolder()
    const keys = newFolder()
    close(newStore(data, { keys }))
    for (const name of readdirSync(keys)) rmSync(join(keys, name))
    const store = newStore(data, { keys })
    expect(store.trail.signing()).toMatchObject({ madeIn: keys, trouble: expect.stringContaining('a new one signs from here on') })
    store.runs.create(aRun)
    close(store)
    const proof = verify(data)
    expect(proof.faults).toEqual([])
    expect(proof.signed!.keys.length).toBe(2)
  })
  it('that were left out for ten minutes of records are missed aloud: those records show accidents only', async () => {
    const data = newFolder()
    const keys = newFolder()
    const signed = newStore(data, { keys, wallMs: () => 1.9e12 })
    const run = signed.runs.create(aRun)
    close(signed)
    expect((await cli(['verify', '--data', data])).out).not.toContain('NOT SIGNED')
    const bare = newStore(data, { wallMs: () => 1.9e12 + 600_000 })
    bare.sequence.append([{ run, entries: entriesOf(run, 0, 20) }])
    close(bare)
    const said = await cli(['verify', '--data', data])
    expect([said.code, said.out]).toEqual([0, expect.stringContaining('NOT SIGNED for the last 10 min of records')])
  })
  it('that cannot be made leave the heads unsigned, and the store says so and runs', () => {
    const data = newFolder()
    const file = join(newFolder(), 'a-file')
    copyFileSync(import.meta.filename, file)
    const store = newStore(data, { keys: file })
    expect(store.trail.signing()).toMatchObject({ key: null, trouble: expect.stringContaining('heads are not signed') })
    store.runs.create(aRun)
    close(store)
    expect(verify(data)).toMatchObject({ signed: null, faults: [], unsigned: 3 })
  })
})
