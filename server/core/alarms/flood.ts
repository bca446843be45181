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
