import type { Priority } from '../../server/core/report.ts'
import type { AlarmRow } from '../../server/wire/index.ts'

/** Something that calls the operator by sound. */
export interface Call {
  readonly key: string
  readonly priority: Priority
}

/** Whoever asked for silence had heard these; null while nobody has. */
export type Silence = ReadonlySet<string> | null

const rank: Record<Priority, number> = { high: 3, medium: 2, low: 1 }

/**
 * Who calls: alarms active and not acknowledged. Never one that is shelved, suppressed, out of service or returned (ALM-11): the state says so, as it stands
 * over what the condition does.
 */
export const callsOf = (run: number, alarms: readonly AlarmRow[]): Call[] =>
  alarms.filter((a) => a.state === 'UNACK').map((a) => ({ key: `${run}:${a.id}`, priority: a.priority }))

/**
 * What sounds now: the most urgent of all that call, or nothing. Silence holds for what called when it was asked for and ends with the next
 * new call; it acknowledges nothing. What called no more and calls again is new.
 */
export function soundNow(
  calls: readonly Call[],
  silence: Silence,
): { readonly sounds: Priority | null; readonly silence: Silence } {
  const isNew = silence !== null && calls.some((c) => !silence.has(c.key))
  const kept = silence === null || isNew ? null : new Set(calls.map((c) => c.key))
  if (kept !== null) return { sounds: null, silence: kept.size === 0 ? null : kept }
  const top = calls.reduce<Priority | null>((best, c) => (best === null || rank[c.priority] > rank[best] ? c.priority : best), null)
  return { sounds: top, silence: null }
}

export const silenced = (calls: readonly Call[]): Silence => (calls.length === 0 ? null : new Set(calls.map((c) => c.key)))

/** One signal: as many strokes as its mark has teeth, higher and faster the more urgent; from `strokes` alone they are told apart. */
export interface Signal {
  readonly strokes: number
  readonly hz: number
  readonly strokeS: number
  readonly pauseS: number
  /** From the beginning of one to the next while it sounds. */
  readonly everyS: number
}
export const signals: Readonly<Record<Priority, Signal>> = {
  high: { strokes: 3, hz: 1040, strokeS: 0.11, pauseS: 0.07, everyS: 1.6 },
  medium: { strokes: 2, hz: 660, strokeS: 0.2, pauseS: 0.14, everyS: 4 },
  low: { strokes: 1, hz: 392, strokeS: 0.4, pauseS: 0, everyS: 10 },
}
