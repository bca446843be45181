import { MonitorError } from '../../core/errors.ts'

const quarterMs = 900_000
const dayMs = 86_400_000

/** Offsets that a quarter of an hour of local time may have: one, two (the hour that autumn repeats), none (the hour spring skips). */
interface Quarter {
  readonly kind: 'plain' | 'repeated' | 'skipped'
  /** Offset before the change, ms ahead of UTC. */
  readonly before: number
  readonly after: number
}

/**
 * Wall-clock time of an IANA zone to UTC, by the zone tables of Intl alone: the machine's own zone plays no part. Offsets are kept
 * by the quarter hour, which every zone's changes have kept to since 1972.
 */
export class LocalClock {
  /** Times that fell in a skipped hour; read as if the clock had not been put forward. */
  skipped = 0
  private readonly format: Intl.DateTimeFormat
  private readonly quarters = new Map<number, Quarter>()
  private key = Number.NaN
  private quarter: Quarter = { kind: 'plain', before: 0, after: 0 }

  constructor(timeZone: string) {
    try {
      this.format = new Intl.DateTimeFormat('en-US', {
        timeZone, hourCycle: 'h23', year: 'numeric', month: 'numeric', day: 'numeric', hour: 'numeric', minute: 'numeric', second: 'numeric',
      }) // biome-ignore format: one line
    } catch (cause) {
      throw new MonitorError('SKID_FILE', `found time zone "${timeZone}", expected an IANA name such as Europe/Amsterdam`, {
        cause,
      })
    }
  }

  /** Ms that local time is ahead of UTC at an instant. */
  offsetAt(utcMs: number): number {
    const whole = Math.floor(utcMs / 1000) * 1000
    const part = { year: 0, month: 0, day: 0, hour: 0, minute: 0, second: 0 }
    for (const { type, value } of this.format.formatToParts(whole))
      if (type in part) part[type as keyof typeof part] = Number(value)
    return Date.UTC(part.year, part.month - 1, part.day, part.hour, part.minute, part.second) - whole
  }

  /**
   * UTC of a local time given as ms as if it were UTC. In a repeated hour the reading nearest `expectedMs` (the last row's time
   * plus its step) is taken, the first pass where nothing is expected; so going back an hour there is the second pass.
   */
  toUtc(localMs: number, expectedMs: number): number {
    const key = Math.floor(localMs / quarterMs)
    if (key !== this.key) {
      this.quarter = this.quarters.get(key) ?? this.look(key)
      this.key = key
    }
    const { kind, before, after } = this.quarter
    if (kind === 'plain') return localMs - before
    if (kind === 'skipped') this.skipped++
    const first = localMs - before
    if (kind === 'repeated' && !Number.isNaN(expectedMs)) {
      const second = localMs - after
      if (Math.abs(second - expectedMs) < Math.abs(first - expectedMs)) return second
    }
    return first
  }

  private look(key: number): Quarter {
    const local = key * quarterMs
    const before = this.offsetAt(local - dayMs)
    const after = this.offsetAt(local + dayMs)
    const isBefore = this.offsetAt(local - before) === before
    const isAfter = this.offsetAt(local - after) === after
    let quarter: Quarter = { kind: 'plain', before: isBefore ? before : after, after: isBefore ? before : after }
    if (before !== after && isBefore === isAfter) quarter = { kind: isBefore ? 'repeated' : 'skipped', before, after }
    if (this.quarters.size > 20_000) this.quarters.clear()
    this.quarters.set(key, quarter)
    return quarter
  }
}
