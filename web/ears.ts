import type { AlarmRow, ServerMessage } from '../server/wire/index.ts'
import type { Feed } from './feed.ts'

/**
 * The alarms of every live run, whatever page is shown: for the counts of the foot and for the sound. The run that a page watches is subscribed by
 * that page; the others are here, for their alarms only.
 */
export function openEars(feed: Pick<Feed, 'send'>, changed: () => void) {
  const alarms = new Map<number, readonly AlarmRow[]>()
  let own = new Set<number>()
  const subscribe = (run: number): void => feed.send({ type: 'subscribe', run, topics: ['alarms'], sinceMs: null })
  return {
    take(m: ServerMessage): void {
      if (m.type === 'snapshot') alarms.set(m.run, m.state.alarms)
      else if (m.type === 'delta' && m.state?.alarms !== undefined) alarms.set(m.run, m.state.alarms)
      else if (m.type === 'delta' && m.alarms !== undefined && m.alarms.length > 0) {
        const fresh = new Set(m.alarms.map((a) => a.id))
        const kept = (alarms.get(m.run) ?? []).filter((a) => !fresh.has(a.id))
        alarms.set(
          m.run,
          [...kept, ...m.alarms.filter((a) => a.state !== 'NORM')].sort((a, b) => a.id - b.id),
        )
      } else return
      changed()
    },
    /** Which runs live now, and which of them a page watches itself. */
    follow(live: readonly number[], watched: number | null): void {
      const next = new Set(live.filter((run) => run !== watched))
      for (const run of next) if (!own.has(run)) subscribe(run)
      for (const run of own) if (!next.has(run) && run !== watched) feed.send({ type: 'unsubscribe', run })
      own = next
      for (const run of [...alarms.keys()]) if (!live.includes(run)) alarms.delete(run)
      changed()
    },
    /** The link came up again. */
    open(): void {
      for (const run of own) subscribe(run)
    },
    all: (): readonly (readonly [number, readonly AlarmRow[]])[] => [...alarms],
  }
}
