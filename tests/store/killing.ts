import { type ChildProcess, spawn } from 'node:child_process'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import { fileURLToPath } from 'node:url'
import { buildSync } from 'esbuild'
import { expect } from 'vitest'
import type { RunId } from '../../server/store/keys.ts'
import { entriesOf, entryAt } from './appender.ts'
import { aRun, close, linesOf, newFolder, newStore, noise, readLines } from './helpers.ts'

const root = fileURLToPath(new URL('../..', import.meta.url))

/** Starts a bundle of appender.ts on a store. */
export function startAppender(folder: string, dir: string, runs: readonly RunId[]): ChildProcess {
  const outfile = join(folder, 'appender.cjs')
  buildSync({
    stdin: {
      contents: `import { work } from './appender.ts'; work(${JSON.stringify(dir)}, ${JSON.stringify(runs)}, (line) => require('node:fs').writeSync(1, line + '\\n'))`,
      resolveDir: join(root, 'tests/store'),
      loader: 'ts',
    },
    bundle: true,
    platform: 'node',
    target: 'node20',
    format: 'cjs',
    packages: 'external',
    outfile,
  })
  return spawn(process.execPath, [outfile], {
    env: { ...process.env, NODE_PATH: join(root, 'node_modules') },
    stdio: ['ignore', 'pipe', 'inherit'],
  })
}

/** Lets a child append, kills it after some acknowledgements and a few ms more; gives the last it said and how it ended. */
async function killed(
  child: ChildProcess,
  afterLines: number,
  afterMs: number,
): Promise<{ said: number[]; signal: string | null }> {
  let said: number[] = []
  let lines = 0
  const ended = new Promise<string | null>((resolve) => child.once('close', (_, signal) => resolve(signal)))
  for await (const line of createInterface({ input: child.stdout! })) {
    said = JSON.parse(line) as number[]
    lines++
    if (lines === afterLines) setTimeout(() => child.kill('SIGKILL'), afterMs)
  }
  return { said, signal: await ended }
}

/**
 * Kills an appending process `times` times at seeded moments on one store. After each: nothing acknowledged is gone, nothing is doubled,
 * what belongs to one commit (entries, source state, event, snapshot, chain) stands at the same number, and the chains verify with every
 * acknowledged act in them. Gives what was stored in the end.
 */
export async function killRounds(times: number, seed: number): Promise<{ entries: number; unacknowledged: number }> {
  const next = noise(seed)
  const folder = newFolder()
  const dir = newFolder()
  const first = newStore(dir)
  const runs = [first.runs.create(aRun), first.runs.create({ ...aRun, skidId: 'egret' })]
  close(first)
  let unacknowledged = 0
  let entries = 0
  for (let round = 0; round < times; round++) {
    const { said, signal } = await killed(startAppender(folder, dir, runs), 1 + Math.floor(next() * 25), next() * 30)
    expect(signal).toBe('SIGKILL')
    const store = newStore(dir, { synchronous: 'NORMAL', keys: process.env['CLEARBORE_KEYS'] ?? '' })
    runs.forEach((run, i) => {
      const { entries: stored } = store.sequence.count(run)
      expect(stored).toBeGreaterThanOrEqual(said[i]!)
      if (stored > said[i]!) unacknowledged++
      expect(store.sequence.sourceState(run)).toEqual({ next: stored })
      expect(store.snapshots.latest(run)).toEqual({ seq: stored, state: { taken: stored } })
      const events = store.events.list(run)
      expect(events.map(({ idx }) => idx)).toEqual(events.map((_, k) => k))
      expect(events.at(-1)?.body).toBe(stored)
      if (round === times - 1 || stored < 30_000) {
        const truth = Array.from({ length: stored }, (_, seq) => entryAt(run, seq))
        expect(readLines(store, run)).toEqual(linesOf(truth))
      }
      entries = Math.max(entries, stored)
    })
    expect(store.check()).toEqual([])
    const { faults, signed } = store.trail.verify()
    expect(faults).toEqual([])
    expect(signed).not.toBeNull()
    runs.forEach((run, i) => {
      const chained = store.trail.ofRun(run).flatMap(({ record }) => (record.kind === 'act' ? [record.seq] : []))
      expect(chained).toEqual(store.sequence.acts(run).map(({ seq }) => seq))
      expect(chained.filter((seq) => seq < said[i]!).length).toBe(
        entriesOf(run, 0, said[i]!).filter((e) => e.kind === 'act').length,
      )
    })
    close(store)
  }
  return { entries, unacknowledged }
}
