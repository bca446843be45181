/** A flood begins with more than so many alarms in 10 min and ends with fewer than so many (ISA-18.2 cl. 16, from memory; some texts say ≥ 10). */
const floodDefaults = { startOver: 10, endUnder: 5, windowMs: 600_000 } as const

export interface Flood {
  readonly fromMs: number
  readonly toMs: number
  /** Alarms from begin to end, the ones that began it included. */
  readonly count: number
}

/**
 * Floods among annunciation times in rising order, by a sliding window of 10 min. A flood begins at the alarm that makes more than ten and ends at
 * the moment the window holds fewer than five; one still under way at `toMs` ends there.
 */
export function flood(timesMs: readonly number[], toMs: number, { startOver, endUnder, windowMs } = floodDefaults): Flood[] {
  const floods: Flood[] = []
  let first = 0
  let begun: { fromMs: number; count: number } | null = null
  for (let i = 0; i < timesMs.length; i++) {
    const now = timesMs[i] as number
    // Alarms leave the window one by one: the flood ends when the one leaves that takes the count below.
    while (first < i && (timesMs[first] as number) + windowMs <= now) {
      const leaves = (timesMs[first] as number) + windowMs
      first++
      // One that comes at the very moment another leaves is in the window.
      if (begun !== null && i - first + (leaves === now ? 1 : 0) < endUnder) {
        floods.push({ ...begun, toMs: leaves })
        begun = null
      }
    }
    const inWindow = i - first + 1
    if (begun !== null) begun.count++
    else if (inWindow > startOver) begun = { fromMs: now, count: inWindow }
  }
  if (begun !== null) {
    const n = timesMs.length - endUnder
    const end = n >= 0 ? (timesMs[n] as number) + windowMs : toMs
    floods.push({ ...begun, toMs: Math.min(toMs, end) })
  }
  return floods
}

/** A flood under way: since when, and the annunciation that it began with. */
export interface FloodNow {
  readonly sinceMs: number
  /** Annunciations from its beginning to now, the ones that began it included. */
  readonly count: number
  readonly firstAlarm: number
}

/**
 * The same rule as `flood`, one annunciation after the other in rising order, for a screen. The first alarm is the oldest one of the window that
 * made the flood, and it stays that until the flood ends, also when it has left the window or is over.
 */
export function createFloodWatch({ startOver, endUnder, windowMs } = floodDefaults) {
  let recent: { readonly tMs: number; readonly alarm: number }[] = []
  let on: FloodNow | null = null
  function pass(tMs: number): void {
    if (on !== null) {
      // Below the end by the moment before this one: one that comes as another leaves is in the window.
      const left = recent.filter((r) => r.tMs + windowMs > tMs).length + (recent.some((r) => r.tMs + windowMs === tMs) ? 1 : 0)
      if (left < endUnder) on = null
    }
    recent = recent.filter((r) => r.tMs + windowMs > tMs)
  }
  return {
    /** An annunciation of an alarm. */
    take(tMs: number, alarm: number): void {
      pass(tMs)
      recent.push({ tMs, alarm })
      if (on !== null) on = { ...on, count: on.count + 1 }
      else if (recent.length > startOver) on = { sinceMs: tMs, count: recent.length, firstAlarm: recent[0]!.alarm }
    },
    /** The flood at a moment, null where there is none. */
    now(tMs: number): FloodNow | null {
      return on !== null && recent.filter((r) => r.tMs + windowMs > tMs).length < endUnder ? null : on
    },
  }
}
