import type { Store } from '../store/open.ts'

/** The part of the store that the monitor writes to and reads from. */
export type MonitorStore = Pick<
  Store,
  'runs' | 'sequence' | 'readings' | 'events' | 'transitions' | 'snapshots' | 'settings' | 'together' | 'upkeep' | 'trail' | 'audit'
>

/** Clocks of the process: handed in, so that tests own time. */
export interface Clocks {
  /** ms since 1970 UTC; may step. */
  wallMs(): number
  /** ms of a clock that only goes forward. */
  steadyMs(): number
}
