import { appendFileSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { onTestFinished } from 'vitest'
import type { Entry } from '../../../server/core/sequence.ts'
import { followSource } from '../../../server/ingest/follow.ts'
import type { Json } from '../../../server/store/keys.ts'
import { skidOf, tag } from '../csv/helpers.ts'

export const skid = skidOf(['PT-1', tag('XV', { quantity: 'state', unit: null })], { timeZone: 'UTC' })
export const startMs = Date.UTC(2031, 4, 5, 18)
export const header = 'time,PT-1,XV\n'
export const line = (i: number, word = 'open'): string => `${new Date(startMs + 1000 * i).toISOString()},${i + 0.5},${word}\n`

/** A folder with a log in it, and a follower whose state survives only what was "committed", as the store would keep it. */
export function logger() {
  const dir = mkdtempSync(join(tmpdir(), 'follow-'))
  onTestFinished(() => rmSync(dir, { recursive: true, force: true }))
  const path = join(dir, 'log.csv')
  let steady = 1000
  let state: Json = null
  let words: string[] = []
  const rows: { tMs: number; value: number; word: string | undefined }[] = []
  const ticks: number[] = []
  const begin = () =>
    followSource({ skid, path, startMs: null, wallMs: () => 5_000_000_000 + steady, steadyMs: () => steady, state, words: [...words] })
  let source = begin()
  const take = (entries: readonly Entry[]): void => {
    for (const e of entries) {
      if (e.kind === 'tick') ticks.push(e.tMs)
      if (e.kind !== 'rows') continue
      const { block: b } = e
      for (let r = 0; r < b.rows; r++) rows.push({ tMs: b.tMs[r]!, value: b.values[r * 2]!, word: words[b.values[r * 2 + 1]!] })
    }
  }
  /** Polls until nothing more waits; commits each poll. */
  const poll = async (passMs = 1000): Promise<void> => {
    steady += passMs
    for (let more = true; more; ) {
      const polled = await source.poll()
      if (polled.words !== undefined) words = [...words.slice(0, polled.words.from), ...polled.words.words]
      if (polled.state !== undefined) state = polled.state
      take(polled.entries)
      more = polled.more
    }
  }
  return {
    path, dir, rows, ticks, poll,
    write: (text: string | Uint8Array): void => writeFileSync(path, text),
    append: (text: string | Uint8Array): void => appendFileSync(path, text),
    /** A poll whose rows never reach the disk: the process dies before the commit. */
    lostPoll: async (): Promise<void> => {
      await source.poll()
    },
    restart: async (): Promise<void> => {
      await source.close()
      state = JSON.parse(JSON.stringify(state)) as Json
      source = begin()
    },
    status: () => source.status(),
    clock: () => source.clock(),
    pass: (ms: number): void => {
      steady += ms
    },
    close: () => source.close(),
    state: () => state,
  }
} // biome-ignore format: a list
