import { cpSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import type { RunId } from '../../server/store/keys.ts'
import type { Store } from '../../server/store/open.ts'
import { entriesOf } from '../store/appender.ts'
import { aRun, close, newFolder, newStore } from '../store/helpers.ts'

/** A store with something of everything that is chained, signed twice: two runs that stand, one that was deleted. */
function sampleStore(): { data: string; keys: string; run: RunId } {
  const data = newFolder()
  const keys = newFolder()
  let now = Date.UTC(2031, 4, 5)
  const store = newStore(data, { synchronous: 'NORMAL', keys, toolVersion: '1.2.3', wallMs: () => (now += 1000) })
  const run = store.runs.create(aRun)
  store.settings.put({ scope: 'heron', tMs: 1, person: 'demo engineer', reason: 'first version', settings: { dpHighBar: 6 } })
  fill(store, run, 0, 600, 100)
  store.events.append(
    run,
    0,
    [0, 1, 2].map((seq) => ({ seq, tMs: seq, kind: 'note', body: { text: `note ${seq}` } })),
  )
  transitions(store, run, 0, 4)
  const other = store.runs.create({ ...aRun, title: 'day' })
  fill(store, other, 0, 700, 100)
  const gone = store.runs.create({ ...aRun, title: 'a mistake' })
  fill(store, gone, 0, 60, 30)
  store.trail.seal(true)
  store.audit.append({ tMs: 2, person: 'demo engineer', act: 'sign-in', reason: '', body: null })
  store.audit.append({
    tMs: 3, person: 'demo engineer', act: 'settings.change', reason: 'trial of a wider limit', body: null, run, old: { dpHighBar: 6 }, new: { dpHighBar: 7 },
  }) // biome-ignore format: a list
  store.runs.delete(gone, { tMs: 4, person: 'demo engineer', reason: 'imported twice' })
  fill(store, run, 600, 1300, 100)
  transitions(store, run, 4, 6)
  store.runs.setState(run, 'ended')
  store.upkeep()
  close(store)
  return { data, keys, run }
}

function fill(store: Store, run: RunId, from: number, to: number, batch: number): void {
  for (let at = from; at < to; at += batch)
    store.sequence.append([
      {
        run,
        entries: entriesOf(run, at, Math.min(to, at + batch)),
        ...(at === 0 ? { words: { from: 0, words: ['startup', 'production'] } } : {}),
      },
    ])
}

function transitions(store: Store, run: RunId, from: number, to: number): void {
  const batch = Array.from({ length: to - from }, (_, i) => {
    const t = { tMs: 1000 * (from + i), from: 'NORM', to: 'UNACK', input: 'act', person: null, reason: null, value: 6.5 + i }
    return { alarm: from + i + 1, ...t, more: { alarm: from + i + 1, key: `dp-limit:R1:${from + i}`, ...t } }
  })
  store.transitions.append(run, from, batch)
}

/** A copy of a store whose guards are off, changed by `act`. */
export function tampered(data: string, act: (db: Database.Database) => void): string {
  const copy = newFolder()
  cpSync(data, copy, { recursive: true })
  const db = new Database(join(copy, 'clearbore.db'))
  db.pragma('foreign_keys = OFF')
  const triggers = db.prepare("SELECT name FROM sqlite_master WHERE type = 'trigger'").pluck().all() as string[]
  for (const name of triggers) db.exec(`DROP TRIGGER ${name}`)
  act(db)
  db.close()
  return copy
}

/** The sample in a folder that stays for the whole test file; the folders of helpers go after each test. */
export function keptSample(name: string): { readonly data: string; readonly keys: string } {
  const made = sampleStore()
  const root = join(process.env['CLEARBORE_KEYS'] ?? '', name)
  const kept = { data: join(root, 'data'), keys: join(root, 'keys') }
  for (const part of ['data', 'keys'] as const) cpSync(made[part], kept[part], { recursive: true })
  return kept
}

/** What `verify` finds of a store. */
export function proofOf(data: string, more: Parameters<Store['trail']['verify']>[0] = {}, keys?: string) {
  const store = newStore(data, { readonly: true, ...(keys === undefined ? {} : { keys }) })
  const proof = store.trail.verify(more)
  close(store)
  return proof
}
