import type { TimeParser } from './time-digits.ts'
import { timeParser } from './time-parse.ts'
import { LocalClock } from './zone.ts'

const dayMs = 86_400_000

/** What a file's clock remembers between rows; plain JSON, for resuming a file that grows. */
export interface ClockState {
  /** Index of the format last used. */
  format: number
  /** Last time read and the last step forward, ms; null before the first row. */
  lastMs: number | null
  stepMs: number
  /** Local day and time of day last read from a bare time of day, ms. */
  dayMs: number | null
  ofDayMs: number
}

export const freshClock = (): ClockState => ({ format: 0, lastMs: null, stepMs: 0, dayMs: null, ofDayMs: 0 })

/**
 * A file's time cells to ms since 1970 UTC. Of several formats the one last used goes first. A bare time of day takes the date of
 * the start (the next one where it lies more than 12 h before the start) and from then on the day nearest the row before, so that it
 * rolls over at midnight and a late row across midnight does not.
 */
export class FileClock {
  readonly state: ClockState
  readonly parsers: readonly TimeParser[]
  readonly zone: LocalClock
  private readonly startMs: number | null
  private readonly offsetMs: number

  constructor(formats: readonly string[], timeZone: string, startMs: number | null, offsetSeconds: number, state: ClockState) {
    this.parsers = formats.map(timeParser)
    this.zone = new LocalClock(timeZone)
    this.startMs = startMs
    this.offsetMs = offsetSeconds * 1000
    this.state = state
  }

  /** The first format that counts from a start, null where every one carries its date. */
  needsStart(): string | null {
    return this.parsers.find((p) => p.basis === 'elapsed' || p.basis === 'day')?.name ?? null
  }

  /** Source time with the logger's clock offset added; NaN where no format reads the text. Blanks around it are allowed. */
  read(bytes: Uint8Array, from: number, to: number): number {
    while (from < to && bytes[from]! <= 32) from++
    while (to > from && bytes[to - 1]! <= 32) to--
    const { state, parsers } = this
    let used = state.format
    let ms = parsers[used]!.parse(bytes, from, to)
    if (Number.isNaN(ms)) {
      for (used = 0; used < parsers.length; used++) {
        ms = parsers[used]!.parse(bytes, from, to)
        if (!Number.isNaN(ms)) break
      }
      if (used === parsers.length) return Number.NaN
      state.format = used
    }
    return this.settle(ms, parsers[used]!.basis)
  }

  private settle(ms: number, basis: TimeParser['basis']): number {
    const { state } = this
    const expected = state.lastMs === null ? Number.NaN : state.lastMs + state.stepMs
    let utcMs = ms
    if (basis === 'local') utcMs = this.zone.toUtc(ms, expected)
    else if (basis === 'elapsed') utcMs = ms + (this.startMs ?? 0)
    else if (basis === 'day') utcMs = this.zone.toUtc(this.dayOf(ms) + ms, expected)
    if (state.lastMs !== null && utcMs > state.lastMs) state.stepMs = utcMs - state.lastMs
    state.lastMs = utcMs
    return utcMs + this.offsetMs
  }

  private dayOf(ofDayMs: number): number {
    const { state } = this
    if (state.dayMs === null) {
      const start = this.startMs ?? 0
      const local = start + this.zone.offsetAt(start)
      state.dayMs = Math.floor(local / dayMs) * dayMs
      if (local - state.dayMs - ofDayMs > dayMs / 2) state.dayMs += dayMs
    } else if (state.ofDayMs - ofDayMs > dayMs / 2) state.dayMs += dayMs
    else if (ofDayMs - state.ofDayMs > dayMs / 2) state.dayMs -= dayMs
    state.ofDayMs = ofDayMs
    return state.dayMs
  }
}
