/** `GET /api/service`: what serves this page. */
export interface Service {
  readonly api: 1
  readonly tool: { readonly name: 'clearbore'; readonly version: string }
  /** To be shown on start and beside every recommendation (advisory only, site procedures, can be wrong). */
  readonly cautions: readonly string[]
  /** True while a simulated skid runs: the page must say so. */
  readonly demo: boolean
  readonly uploadMaxBytes: number
  /** Wall clock of the server, ms UTC. */
  readonly wallMs: number
}

/** A run's own clock. A simulated run's is the simulator's, `speed` times faster than time. */
export interface RunClock {
  readonly kind: 'wall' | 'simulated'
  /** The monitor's now in the run's time, ms UTC. */
  readonly nowMs: number
  /** Seconds of the run a second of the wall. */
  readonly speed: number
}

/** Body of every reply that is not 2xx, and of `error` on the socket. */
export interface Problem {
  /** For programs: `server/core/errors.ts`, or HTTP_400, HTTP_404 ... */
  readonly code: string
  /** For people: what was wanted and what came. */
  readonly message: string
  /** What to do next. */
  readonly hint: string | null
  readonly place: { readonly file: string; readonly line: number | null; readonly column: number | null } | null
}
