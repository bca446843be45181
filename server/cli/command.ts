/** What a command may touch of the process; tests hand in their own. */
export interface Io {
  /** Writes to stdout and resolves once it may be followed by more (back-pressure). */
  out(text: string): Promise<void>
  err(text: string): void
  readonly errIsTerminal: boolean
  /** True when stdout is a terminal. */
  readonly outIsTerminal: boolean
  /** Milliseconds of a steady clock, for progress only. */
  nowMs(): number
  /** Environment of the process; left out, nothing is taken from it. */
  readonly env?: Readonly<Record<string, string | undefined>>
  /** Aborted on SIGINT or SIGTERM. */
  readonly signal: AbortSignal
  /** The program itself, to be started again as a thread; left out, there is only this thread. */
  readonly program?: URL
}

/** One command of the command line. `run` resolves to the exit code; a MonitorError it throws is printed as one line by the caller. */
export interface Command {
  readonly name: string
  readonly summary: string
  /** The whole of `--help`. */
  readonly help: string
  run(args: readonly string[], io: Io): Promise<number>
}
