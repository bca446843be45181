/** A part of a run's time. */
export interface Look {
  readonly fromMs: number
  readonly toMs: number
}

/** Moved by a share of its own length; later is positive. */
export const panned = ({ fromMs, toMs }: Look, share: number): Look => {
  const by = (toMs - fromMs) * share
  return { fromMs: fromMs + by, toMs: toMs + by }
}

/** Longer or shorter by a factor, with what stands at `aboutMs` left where it is. */
export const zoomed = ({ fromMs, toMs }: Look, factor: number, aboutMs: number): Look => ({
  fromMs: aboutMs - (aboutMs - fromMs) * factor,
  toMs: aboutMs + (toMs - aboutMs) * factor,
})

/** Put inside `bounds`: never shorter than `leastMs`, never longer than the bounds; moved rather than cut. */
export function within({ fromMs, toMs }: Look, bounds: Look, leastMs: number): Look {
  const most = Math.max(bounds.toMs - bounds.fromMs, leastMs)
  const span = Math.min(Math.max(toMs - fromMs, leastMs), most)
  // What was too short or too long keeps its middle.
  const from = (fromMs + toMs - span) / 2
  const at = Math.max(bounds.fromMs, Math.min(from, bounds.toMs - span))
  return { fromMs: at, toMs: at + span }
}
