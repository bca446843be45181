import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { createPair } from '../../server/monitor/catalogue.ts'
import type { Store } from '../../server/store/open.ts'
import { skidText } from './input.ts'

/** What one measure gives: CPU of the work alone, user and system, without the start of the process; peak memory of the whole process. */
export interface Measured {
  readonly cpuS: number
  readonly rssMb: number
  /** Rows and sums by channel, as text to the last bit; both sides of a pair must give the same. */
  readonly sum?: string
  readonly figures?: Readonly<Record<string, number>>
}

export const cpuS = (): number => {
  const u = process.cpuUsage()
  return (u.user + u.system) / 1e6
}
/** Gives a folder that is gone afterwards. */
export function inFolder<T>(act: (dir: string) => T): T {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-bench-'))
  const clean = () => rmSync(dir, { recursive: true, force: true })
  const out = act(dir)
  if (out instanceof Promise) return out.finally(clean) as T
  clean()
  return out
}
export const pairIn = (store: Store) =>
  createPair(store, {
    kind: 'imported', about: 'bench', skidId: 'bench', title: 'bench', skidFile: 'bench.json', skidText, startedMs: 0, toolVersion: 'bench', state: 'importing',
  }) // biome-ignore format: a list
