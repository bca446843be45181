import { statSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { expect, it } from 'vitest'
import type { AlarmTransition } from '../../server/store/journal.ts'
import { entryAt } from './appender.ts'
import { aRun, close, linesOf, newFolder, newStore, readLines } from './helpers.ts'

const entries = (n: number) => Array.from({ length: n }, (_, i) => entryAt(0, i))

it('lists runs with what they were made from and lets one end', () => {
  const store = newStore()
  const run = store.runs.create(aRun)
  expect(store.runs.get(run)).toEqual({ ...aRun, id: run, state: 'live' })
  store.runs.setState(run, 'ended')
  expect(store.runs.list().map(({ id, state }) => [id, state])).toEqual([[run, 'ended']])
  expect(() => store.runs.setState((run + 1) as typeof run, 'ended')).toThrow(`there is no run ${run + 1}`)
})

it('deletes a run for every reader at once, keeps the act with person and reason and its chain, gives the other space back, and never reuses its number', () => {
  const dir = newFolder()
  const store = newStore(dir)
  const kept = store.runs.create(aRun)
  store.sequence.append([{ run: kept, entries: entries(300) }])
  const doomed = store.runs.create({ ...aRun, title: 'a mistake' })
  for (let i = 0; i < 5; i++) store.sequence.append([{ run: doomed, entries: entries(60_000) }])
  store.sequence.append([{ run: doomed, entries: entries(50), words: { from: 0, words: ['startup'] } }])
  store.snapshots.put(doomed, 10, { a: 1 })
  store.events.append(doomed, 0, [{ seq: 1, tMs: 1, kind: 'x', body: null }])
  const raised: AlarmTransition = {
    alarm: 1,
    tMs: 1,
    from: 'normal',
    to: 'unacknowledged',
    input: 'condition',
    person: null,
    reason: null,
    value: 1.1,
    more: { unit: 'ratio' },
  }
  store.transitions.append(doomed, 0, [raised])
  const pages = (): number => {
    const db = new Database(join(dir, 'clearbore.db'), { readonly: true })
    const count = db.pragma('page_count', { simple: true }) as number
    db.close()
    return count
  }
  const before = pages()
  store.runs.delete(doomed, { tMs: 5, person: 'demo engineer', reason: 'imported twice' })
  expect(() => store.sequence.count(doomed)).toThrow(`there is no run ${doomed}`)
  expect(() => store.runs.get(doomed)).toThrow(`there is no run ${doomed}`)
  expect(store.runs.list().map(({ id }) => id)).toEqual([kept])
  const [entry] = store.audit.list()
  expect(entry).toMatchObject({
    tMs: 5,
    person: 'demo engineer',
    act: 'run.delete',
    reason: 'imported twice',
    body: { id: doomed, title: 'a mistake', entries: 300_050 },
  })
  let steps = 0
  while (store.upkeep({ maxMs: 0 }).pending) steps++
  expect(steps).toBeGreaterThan(10)
  expect(before).toBeGreaterThan(400)
  store.runs.setState(kept, 'ended')
  store.upkeep({ spareMb: 0 })
  // The chain of a deleted run stays: 27,275 comments here, each a record.
  const chain = store.trail.ofRun(doomed)
  expect(chain.length).toBeGreaterThan(27_275)
  const chainPages = chain.reduce((sum, { text }) => sum + text.length + 45, 0) / 4096
  expect(pages()).toBeLessThan(60 + 1.15 * chainPages)
  expect(store.check()).toEqual([])
  expect(readLines(store, kept)).toEqual(linesOf(entries(300)))
  expect(store.runs.create(aRun)).toBe(doomed + 1)
  close(store)
  expect(statSync(join(dir, 'clearbore.db')).size).toBeLessThan((60 + 1.15 * chainPages) * 4096)
})

// REC-02
it('lets nobody change or drop an entry of the audit trail or a version of the settings, not even by SQL', () => {
  const dir = newFolder()
  const store = newStore(dir)
  store.audit.append({ tMs: 1, person: 'demo engineer', act: 'sign', reason: 'shift end', body: { n: 1 } })
  store.settings.put({ scope: 'heron', tMs: 1, person: 'demo engineer', reason: 'first', settings: { dpHighBar: 6 } })
  close(store)
  const db = new Database(join(dir, 'clearbore.db'))
  expect(() => db.exec("UPDATE audit SET person = 'nobody'")).toThrow('append-only')
  expect(() => db.exec('DELETE FROM audit')).toThrow('append-only')
  expect(() => db.exec("UPDATE settings SET json = '{}'")).toThrow('kept by version')
  expect(() => db.exec('DELETE FROM settings')).toThrow('kept by version')
  db.close()
})

// REC-06
it('keeps settings as whole versions and knows which was in force when', () => {
  const store = newStore()
  const put = (tMs: number, dpHighBar: number) =>
    store.settings.put({ scope: 'heron', tMs, person: 'demo engineer', reason: 'trial', settings: { dpHighBar } })
  expect([put(100, 6), put(200, 7)]).toEqual([1, 2])
  expect(store.settings.at('heron', 99)).toBeNull()
  expect(store.settings.at('heron', 199)?.settings).toEqual({ dpHighBar: 6 })
  expect(store.settings.at('heron', 200)).toEqual({
    version: 2,
    scope: 'heron',
    tMs: 200,
    person: 'demo engineer',
    reason: 'trial',
    settings: { dpHighBar: 7 },
  })
  expect(store.settings.list('egret')).toEqual([])
  expect(store.settings.list('heron').map(({ version }) => version)).toEqual([1, 2])
})

it('takes events said again after a restart once only and reports those that differ from what was said first', () => {
  const store = newStore()
  const run = store.runs.create(aRun)
  const event = (n: number) => ({ seq: n, tMs: 1000 * n, kind: 'timeline', body: { ratio: 1 + n / 100 } })
  expect(store.events.append(run, 0, [event(0), event(1), event(2)])).toEqual({ added: 3, differing: 0 })
  expect(store.events.append(run, 1, [event(1), event(2), event(3)])).toEqual({ added: 1, differing: 0 })
  expect(store.events.append(run, 3, [event(7)])).toEqual({ added: 0, differing: 1 })
  expect(store.events.list(run)).toEqual([0, 1, 2, 3].map((n) => ({ idx: n, ...event(n) })))
  expect(store.events.list(run, 1, 2).map(({ idx }) => idx)).toEqual([1, 2])
  expect(store.events.count(run)).toBe(4)

  const to = (state: string): AlarmTransition => ({
    alarm: 3,
    tMs: 5,
    from: 'normal',
    to: state,
    input: 'ack',
    person: 'demo operator',
    reason: 'seen',
    value: null,
    more: { unit: 'bar' },
  })
  expect(store.transitions.append(run, 0, [to('acknowledged'), to('normal')])).toEqual({ added: 2, differing: 0 })
  expect(store.transitions.append(run, 1, [to('normal'), to('shelved')])).toEqual({ added: 1, differing: 0 })
  expect(store.transitions.append(run, 0, [to('shelved')])).toEqual({ added: 0, differing: 1 })
  expect(store.transitions.list(run)).toEqual([to('acknowledged'), to('normal'), to('shelved')])
})

it('keeps the last three snapshots and gives the latest, or the latest before some number', () => {
  const dir = newFolder()
  const store = newStore(dir)
  const run = store.runs.create(aRun)
  expect(store.snapshots.latest(run)).toBeNull()
  for (const seq of [10, 20, 30, 40, 40]) store.snapshots.put(run, seq, { seq })
  expect(store.snapshots.latest(run)).toEqual({ seq: 40, state: { seq: 40 } })
  expect(store.snapshots.latest(run, 39)).toEqual({ seq: 30, state: { seq: 30 } })
  expect(store.snapshots.latest(run, 19)).toBeNull()
})

it('commits entries, events and a snapshot together or not at all', () => {
  const store = newStore()
  const run = store.runs.create(aRun)
  expect(() =>
    store.together(() => {
      store.sequence.append([{ run, entries: entries(100) }])
      store.events.append(run, 0, [{ seq: 1, tMs: 1, kind: 'x', body: null }])
      throw new Error('half-way')
    }),
  ).toThrow('half-way')
  expect([store.sequence.count(run).entries, store.events.count(run)]).toEqual([0, 0])
  expect(store.together(() => store.sequence.append([{ run, entries: entries(100) }]))).toEqual([100])
})
