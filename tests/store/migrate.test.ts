import { createHash } from 'node:crypto'
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { expect, it } from 'vitest'
import { steps } from '../../server/store/migrate.ts'
import { close, newFolder, newStore } from './helpers.ts'

/** A step that some store has been through stays as it is; a change of the schema is a further step, and its sum is added here. */
const sums = ['cd12d2db41cb2e92']

it('has not changed a step of the schema that stores out there have been through', () => {
  expect(steps.map((step) => createHash('sha256').update(step).digest('hex').slice(0, 16))).toEqual(sums)
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
