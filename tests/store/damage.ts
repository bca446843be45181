import { readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { expect } from 'vitest'
import { MonitorError } from '../../server/core/errors.ts'
import type { RunId } from '../../server/store/keys.ts'
import type { Store } from '../../server/store/open.ts'
import { entriesOf } from './appender.ts'
import { aRun, close, newFolder, newStore, noise, readLines } from './helpers.ts'

export const oneLine = (error: MonitorError) => expect(error.line()).not.toContain('\n')

/** Appends entries up to number `count`, `batch` a commit. */
export function fill(store: Store, run: RunId, count: number, batch: number): void {
  for (let from = store.sequence.count(run).entries; from < count; from += batch) {
    store.sequence.append([{ run, entries: entriesOf(0, from, Math.min(count, from + batch)) }])
  }
}

function damage(file: Buffer, way: number, next: () => number): Buffer {
  const broken = Buffer.from(file)
  const page = 4096 * (1 + Math.floor(next() * (file.length / 4096 - 1)))
  const noisy = (from: number, count: number) => {
    for (let i = 0; i < count; i++) broken[from + i] = Math.floor(next() * 256)
  }
  if (way === 0) broken.fill(0, page, page + 4096)
  else if (way === 1) noisy(page, 4096)
  else if (way === 2) noisy(page + 512 * Math.floor(next() * 8), 512)
  else {
    const at = page + Math.floor(next() * 4096)
    broken[at] = broken[at]! ^ (1 << Math.floor(next() * 8))
  }
  return broken
}

/**
 * Damages a store's file `times` times, each from the sound one: a page of zeros, a page of noise, a sector of noise, one bit. Whatever is
 * read then is as before or refused as STORE_CORRUPT. Gives how often it was refused.
 */
export function damageRounds(times: number, seed: number): { said: number } {
  const next = noise(seed)
  const dir = newFolder()
  const store = newStore(dir)
  const run = store.runs.create(aRun)
  fill(store, run, 15_000, 6000)
  fill(store, run, 16_000, 100)
  const { fromMs, toMs } = store.readings.span(run)!
  const questions = [
    (s: Store) => readLines(s, run),
    (s: Store) => s.sequence.acts(run),
    (s: Store) => s.readings.envelope(run, [0, 2], fromMs, toMs, 500),
    (s: Store) => s.readings.samples(run, [1], fromMs, toMs + 1),
  ]
  const answers = questions.map((ask) => JSON.stringify(ask(store)))
  close(store)
  const file = join(dir, 'clearbore.db')
  const sound = readFileSync(file)
  let said = 0
  for (let round = 0; round < times; round++) {
    writeFileSync(file, damage(sound, round % 4, next))
    questions.forEach((ask, i) => {
      try {
        const opened = newStore(dir)
        try {
          expect(JSON.stringify(ask(opened)) === answers[i]).toBe(true)
        } finally {
          close(opened)
        }
      } catch (error) {
        if (!(error instanceof MonitorError)) throw error
        expect(error.code).toBe('STORE_CORRUPT')
        oneLine(error)
        said++
      }
    })
  }
  return { said }
}
