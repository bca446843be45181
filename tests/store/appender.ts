import type { Entry } from '../../server/core/sequence.ts'
import type { RunId } from '../../server/store/keys.ts'
import { openStore } from '../../server/store/open.ts'

/**
 * A process to be killed: appends to two runs and says on stdout what was acknowledged. Which entry comes at which number is fixed, so
 * that the test can tell the whole sequence; a restart goes on where the store says it stands.
 */
const width = 3

export function entryAt(run: number, seq: number): Entry {
  const kind = (seq * 7 + run) % 11
  if (kind === 0) return { kind: 'tick', tMs: 1.7e12 + seq * 100 }
  if (kind === 1)
    return {
      kind: 'act',
      act: { kind: 'comment', alarm: null, text: `note ${seq}`, tMs: 1.7e12 + seq * 100, person: 'demo operator' },
    }
  const values = Float64Array.from({ length: width }, (_, c) => Math.round(Math.sin(seq / 40 + c + run) * 1000) / 100)
  return {
    kind: 'rows',
    block: { rows: 1, width, tMs: Float64Array.of(1.7e12 + seq * 100), values, codes: new Uint8Array(width).fill(1) },
  }
}

/** Entries with from ≤ number < to. */
export const entriesOf = (run: number, from: number, to: number): Entry[] =>
  Array.from({ length: to - from }, (_, i) => entryAt(run, from + i))

export function work(dir: string, runs: readonly RunId[], say: (line: string) => void): void {
  const store = openStore(dir, { keys: process.env['CLEARBORE_KEYS'] ?? '' })
  for (let round = 0; ; round++) {
    const batch = runs.map((run, i) => {
      const from = store.sequence.count(run).entries
      // Small live appends, now and then a bulk one as an import makes it.
      const length = round % 17 === 16 ? 9000 : 40 + ((round * 31 + i) % 200)
      return { run, entries: Array.from({ length }, (_, k) => entryAt(run, from + k)), sourceState: { next: from + length } }
    })
    const next = store.together(() => {
      const after = store.sequence.append(batch)
      runs.forEach((run, i) => {
        store.events.append(run, store.events.count(run), [{ seq: after[i]!, tMs: 0, kind: 'mark', body: after[i]! }])
        store.snapshots.put(run, after[i]!, { taken: after[i]! })
      })
      return after
    })
    say(JSON.stringify(next))
    store.upkeep({ maxMs: 20 })
  }
}
