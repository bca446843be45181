import type { LiveState } from '../../server/wire/index.ts'
import { type Link, silentMs } from '../feed.ts'

/** A run's now on this page: the server's, carried on by this machine's clock while the link is up. */
export function runClock() {
  let received = 0
  let link: Link = { up: false, heardAt: null, retryInMs: null }
  return {
    link: (): Link => link,
    linked(next: Link): void {
      link = next
    },
    /** A state has just come. */
    received(): void {
      received = performance.now()
    },
    now(state: LiveState): number {
      const since = (Math.min(performance.now(), (link.heardAt ?? received) + silentMs) - received) * state.clock.speed
      return state.clock.nowMs + Math.max(0, since)
    },
  }
}
