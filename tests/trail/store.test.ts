import { rmSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import fc from 'fast-check'
import { beforeAll, describe, expect, it } from 'vitest'
import { hashOf, nothing } from '../../server/trail/chain.ts'
import { fingerprintOf } from '../../server/trail/keys.ts'
import { close, newFolder, newStore } from '../store/helpers.ts'
import { keptSample, tampered, proofOf as verify } from './sample-store.ts'

type Db = Database.Database
interface Link {
  readonly hash: Buffer
  readonly kind: string
  readonly json: string
}
let sample: ReturnType<typeof keptSample>
beforeAll(() => {
  sample = keptSample('store')
})

const faultsOf = (data: string) => verify(data).faults

// REC-10, REC-11
describe('a store', () => {
  it('that nobody touched verifies: all chains, at least two signed heads, nothing unsigned, rows sealed and staged counted', () => {
    const proof = verify(sample.data, {}, sample.keys)
    expect(proof.faults).toEqual([])
    expect(proof.unsigned).toBe(0)
    expect(proof.signed!.heads).toBeGreaterThanOrEqual(2)
    expect(proof.chains.map((c) => [c.chain, c.isDeleted])).toEqual([[0, false], [1, false], [2, false], [3, true]]) // biome-ignore format: a list
    const truth = new Database(join(sample.data, 'clearbore.db'), { readonly: true })
    const heads = truth.prepare('SELECT run, rows, staged_rows AS staged FROM head ORDER BY run').all() as {
      run: number
      rows: number
      staged: number
    }[]
    truth.close()
    for (const { run, rows, staged } of heads.filter((h) => h.run < 3)) {
      expect(proof.chains[run]).toMatchObject({ sealedRows: rows - staged, stagedRows: staged })
    }
    expect(proof.chains[1]!.stagedRows).toBe(0)
    expect(proof.chains[2]!.stagedRows).toBeGreaterThan(400)
  })

  /** What a record stands for, and how a byte of it is changed. */
  const chained = {
    link: ['chain', 'n', 'hash', 'kind', 'json'],
    chain: ['count', 'head'],
    seal: ['count', 't_ms', 'key', 'signature'],
    store: ['id'],
    run: ['skid_id', 'title', 'skid_file', 'skid_text', 'source', 'started_ms', 'tool_version', 'state'],
    word: ['idx', 'word'],
    act: ['id', 'sum', 'json'],
    event: ['idx', 'seq', 't_ms', 'kind', 'json'],
    alarm_transition: ['idx', 'alarm', 't_ms', 'from_state', 'to_state', 'input', 'value', 'more'],
    segment: ['id', 'body'],
    strip: ['strip', 'body'],
    audit: ['t_ms', 'person', 'act', 'json', 'run', 'old', 'new', 'recorded_ms'],
    settings: ['scope', 't_ms', 'person', 'reason', 'json'],
  } as const
  const columns = Object.entries(chained).flatMap(([table, names]) => names.map((name) => [table, name] as const))

  /** Changes one byte of a text or blob, or a number by one; false where the row has nothing there. */
  function changeOne(db: Db, table: string, column: string, pick: number, at: number): boolean {
    const where = table === 'run' ? " WHERE state <> 'deleted'" : ''
    const rowid =
      table === 'link'
        ? "chain || ':' || n"
        : table === 'word' || table === 'event' || table === 'alarm_transition'
          ? "run || ':' || idx"
          : 'rowid'
    const keys = db.prepare(`SELECT ${rowid} FROM ${table}${where}`).pluck().all() as (number | string)[]
    const key = keys[pick % keys.length]!
    const old = db.prepare(`SELECT ${column} FROM ${table} WHERE ${rowid} = ?`).pluck().get(key) as number | string | Buffer | null
    if (old === null || old === '') return false
    const set = (value: unknown) => db.prepare(`UPDATE ${table} SET ${column} = ? WHERE ${rowid} = ?`).run(value, key)
    if (typeof old === 'number') set(old + 1e6)
    else {
      const bytes = Buffer.from(old as string)
      bytes[at % bytes.length]! ^= 1
      set(typeof old === 'string' ? bytes.toString('latin1') : bytes)
    }
    return true
  }

  it.each(columns)('shows any change of one byte of %s.%s and names a record or a chain', (table, column) => {
    let tried = 0
    fc.assert(
      fc.property(fc.nat(), fc.nat(), (pick, at) => {
        let isChanged = false
        const data = tampered(sample.data, (db) => {
          isChanged = changeOne(db, table, column, pick, at)
        })
        if (!isChanged) return
        tried++
        const [first] = faultsOf(data)
        expect(first, `${table}.${column}`).toBeDefined()
        expect(first!.found).not.toBe('')
        rmSync(data, { recursive: true })
      }),
      { numRuns: 4 },
    )
    expect(tried).toBeGreaterThan(0)
  })

  it('names the very record that was changed, removed, doubled or swapped, anywhere in a chain', () => {
    const count = (chain: number) => verify(sample.data).chains.find((c) => c.chain === chain)!.records
    const counts = [0, 1, 2].map(count)
    fc.assert(
      fc.property(
        fc.constantFrom(0, 1, 2),
        fc.nat(),
        fc.constantFrom('changed', 'removed', 'doubled', 'swapped'),
        (chain, pick, way) => {
          const n = pick % (counts[chain]! - 2)
          const data = tampered(sample.data, (db) => {
            const row = (at: number) =>
              db.prepare('SELECT hash, kind, json FROM link WHERE chain = ? AND n = ?').get(chain, at) as Link
            const set = (at: number, { hash, kind, json }: Link) =>
              db.prepare('UPDATE link SET hash = ?, kind = ?, json = ? WHERE chain = ? AND n = ?').run(hash, kind, json, chain, at)
            const shift = (from: number, by: number) => {
              db.prepare('UPDATE link SET n = -n - 1 WHERE chain = ? AND n >= ?').run(chain, from)
              db.prepare('UPDATE link SET n = -n - 1 + ? WHERE chain = ? AND n < 0').run(by, chain)
            }
            if (way === 'changed')
              set(n, { ...row(n), json: row(n).json.replace(/"recordedMs":(\d)/, (_, d) => `"recordedMs":${(Number(d) % 9) + 1}`) })
            if (way === 'removed') {
              db.prepare('DELETE FROM link WHERE chain = ? AND n = ?').run(chain, n)
              if (pick % 2 === 0) shift(n + 1, -1)
            }
            if (way === 'doubled') {
              const twice = row(n)
              shift(n + 1, 1)
              db.prepare('INSERT INTO link (chain, n, hash, kind, json) VALUES (?, ?, ?, ?, ?)').run(
                chain,
                n + 1,
                twice.hash,
                twice.kind,
                twice.json,
              )
            }
            if (way === 'swapped') {
              const [a, b] = [row(n), row(n + 1)]
              set(n, b)
              set(n + 1, a)
            }
          })
          const first = faultsOf(data).find((f) => f.chain === chain)
          expect([first?.n, way]).toEqual([way === 'doubled' ? n + 1 : n, way])
          rmSync(data, { recursive: true })
        },
      ),
      { numRuns: 40 },
    )
  })

  it.each([
    ['an act put in', 'INSERT INTO act (id, sum, json) SELECT id + 100000, sum, json FROM act LIMIT 1', 1],
    ['an act taken out', 'DELETE FROM act WHERE id = (SELECT max(id) FROM act WHERE id < 2 * 68719476736)', 1],
    [
      'an alarm put in',
      'INSERT INTO alarm_transition SELECT run, 99, alarm, t_ms, from_state, to_state, input, person, reason, value, more FROM alarm_transition LIMIT 1',
      1,
    ],
    ['an alarm taken out', 'DELETE FROM alarm_transition WHERE idx = 2', 1],
    ['an audit put in', "INSERT INTO audit (t_ms, person, act, reason, json) VALUES (1, 'nobody', 'sign-in', '', 'null')", 0],
    ['an audit taken out', 'DELETE FROM audit WHERE id = 2', 0],
    ['a run taken out', "UPDATE run SET state = 'deleted' WHERE id = 2", 2],
    [
      'a run taken out whole',
      'DELETE FROM run WHERE id = 2; DELETE FROM head WHERE run = 2; DELETE FROM chain WHERE id = 2; DELETE FROM link WHERE chain = 2',
      2,
    ],
    [
      'a run put in',
      'INSERT INTO run SELECT 9, skid_id, title, skid_file, skid_text, source, started_ms, tool_version, state FROM run WHERE id = 2',
      9,
    ],
    ['a segment taken out', 'DELETE FROM strip; DELETE FROM segment', 1],
    ['rows that were not counted', 'UPDATE head SET rows = rows + 1 WHERE run = 1', 1],
    ['the signatures taken out', 'DELETE FROM seal WHERE count = (SELECT max(count) FROM seal)', 0],
  ] as const)('finds %s', (_, sql, chain) => {
    const data = tampered(sample.data, (db) => db.exec(sql))
    expect(faultsOf(data).map((f) => f.chain)).toContain(chain)
  })

  /** What somebody would do who holds the file and knows the form: change a record and make every hash behind it anew. */
  function rebuild(db: Db, chain: number, edit: (text: string) => string): void {
    let head: Uint8Array = nothing
    const links = db.prepare('SELECT n, json FROM link WHERE chain = ? ORDER BY n').all(chain) as { n: number; json: string }[]
    for (const { n, json } of links) {
      const text = edit(json)
      head = hashOf(head, text)
      db.prepare('UPDATE link SET json = ?, hash = ? WHERE chain = ? AND n = ?').run(text, head, chain, n)
    }
    db.prepare('UPDATE chain SET head = ? WHERE id = ?').run(head, chain)
  }

  it('whose chain was made anew from a changed record on shows it: a run by the chain of the site, the site by the signatures', () => {
    const run = tampered(sample.data, (db) => {
      const edit = (t: string) => t.replace('"text":"note ', '"text":"other ')
      rebuild(db, 1, (text) => (text.includes('"kind":"act"') ? edit(text) : text))
    })
    expect(faultsOf(run)[0]).toMatchObject({ chain: 1, what: "act 'comment' of demo operator, entry 0" })
    const heads = faultsOf(run).find((f) => f.found.includes("of the site's chain says"))
    expect(heads).toMatchObject({ chain: 1 })
    const site = tampered(sample.data, (db) => {
      rebuild(db, 0, (text) => text.replace('trial of a wider limit', 'trial of a wider range'))
      db.exec("UPDATE audit SET reason = 'trial of a wider range' WHERE id = 2")
    })
    expect(faultsOf(site).find((f) => f.what === 'a signed head')).toMatchObject({
      chain: 0,
      found: expect.stringContaining('signature does not fit'),
    })
  })

  it('that was rewritten and signed with a key of the forger’s own is found by the true public key, and by the head kept beside it', () => {
    const own = verify(sample.data, {}, sample.keys).signed!.keys[0]!
    // All signatures and heads dropped, then a start with another folder for keys signs anew.
    const data = tampered(sample.data, (db) => {
      db.exec('DELETE FROM seal')
      const texts = (db.prepare('SELECT json FROM link WHERE chain = 0 ORDER BY n').pluck().all() as string[])
        .filter((t) => !/"kind":"(heads|key)"/.test(t))
        .map((t, n) => t.replace(/"n":\d+/, `"n":${n}`))
      db.exec('DELETE FROM link WHERE chain = 0')
      let head: Uint8Array = nothing
      texts.forEach((text, n) => {
        head = hashOf(head, text)
        db.prepare('INSERT INTO link VALUES (0, ?, ?, ?, ?)').run(n, head, (JSON.parse(text) as { kind: string }).kind, text)
      })
      db.prepare('UPDATE chain SET sealed = 0').run()
      db.prepare('UPDATE chain SET head = ?, count = ? WHERE id = 0').run(head, texts.length)
    })
    const forged = newStore(data, { keys: newFolder() })
    close(forged)
    // By itself it looks right, which is why the fingerprint is printed to be compared.
    const alone = verify(data)
    expect(alone.faults).toEqual([])
    expect(alone.signed!.keys.map(fingerprintOf)).not.toEqual([fingerprintOf(own)])
    expect(verify(data, { publicKeys: [own] }).faults[0]).toMatchObject({ what: 'a signed head' })
    expect(verify(data, {}, sample.keys).faults[0]!.what).toContain('the folder of the key')
    // A start with the true keys writes the break into the record, where it stays.
    const back = newStore(data, { keys: sample.keys })
    expect(back.trail.signing().trouble).toContain('not the one that was signed last')
    close(back)
    expect(verify(data).faults[0]).toMatchObject({ chain: 0, what: 'break' })
  })

  it('whose end was cut off, signatures and all, is found by a head and count kept elsewhere', () => {
    const before = verify(sample.data).chains
    const data = tampered(sample.data, (db) => {
      for (const chain of [0, 1, 2, 3]) {
        const keep = chain === 0 ? 12 : (db.prepare('SELECT count(*) FROM link WHERE chain = ?').pluck().get(chain) as number)
        db.prepare('DELETE FROM link WHERE chain = ? AND n >= ?').run(chain, keep)
      }
      db.exec(`UPDATE chain SET count = 12, head = (SELECT hash FROM link WHERE chain = 0 AND n = 11) WHERE id = 0;
        DELETE FROM seal WHERE count > 12; DELETE FROM audit; DELETE FROM settings WHERE id > 1`)
    })
    const head = { chain: 0, count: before[0]!.records, head: before[0]!.head, from: 'the printed report' }
    const found = verify(data, { heads: [head] }).faults.find((f) => f.what.includes('printed'))
    expect(found).toMatchObject({ n: head.count - 1, found: expect.stringContaining(`only 12 of ${head.count} records`) })
    expect(verify(sample.data, { heads: [head] }).faults).toEqual([])
  })
})
