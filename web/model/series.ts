/** A drawn point: an instant or bucket with its mean and extremes; all null where nothing is known. */
export interface Point {
  readonly x: number
  readonly y: number | null
  readonly low?: number | null
  readonly high?: number | null
}

/**
 * A series that grows at its end. Two neighbours further apart than the gap get an empty point between them, so that no line crosses a gap.
 * What is older than the newest less `keepMs` is dropped: memory does not grow with the run.
 */
export function growingSeries(leastGapMs: number, keepMs = Infinity) {
  let points: Point[] = []
  let fetchedMs = 0
  let liveMs = 0
  return {
    points: (): readonly Point[] => points,
    /** An empty point is kept only as the gap it makes. A point not after the last one is dropped. */
    push(p: Point): void {
      if (p.y === null) return
      const last = points.at(-1)
      if (last !== undefined && p.x <= last.x) return
      if (last !== undefined && p.x - last.x > Math.max(leastGapMs, fetchedMs, liveMs))
        points.push({ x: (last.x + p.x) / 2, y: null })
      points.push(p)
      if (points.length > 64 && p.x - points[0]!.x > 1.25 * keepMs) points = points.filter((q) => q.x >= p.x - keepMs)
    },
    /** Merges history with what came live meanwhile; of two points at one time the live one stays. */
    fill(history: readonly Point[]): void {
      const all = new Map<number, Point>()
      for (const p of [...history, ...points]) if (p.y !== null) all.set(p.x, p)
      points = []
      for (const p of [...all.values()].sort((a, b) => a.x - b.x)) this.push(p)
    },
    /** Fetched points come this far apart. */
    spacing(ms: number): void {
      fetchedMs = 2.2 * ms
    },
    /** Live points come this far apart at most: never narrower than it was. */
    widen(ms: number): void {
      liveMs = Math.max(liveMs, 2.2 * ms)
    },
    clear(): void {
      points = []
    },
  }
}
export type GrowingSeries = ReturnType<typeof growingSeries>

/** Stretches without data: between the neighbours of every empty point. */
export function gapsOf(points: readonly Point[]): { fromMs: number; toMs: number }[] {
  return points.flatMap((p, i) => {
    const before = points[i - 1]
    const after = points[i + 1]
    return p.y === null && before !== undefined && after !== undefined ? [{ fromMs: before.x, toMs: after.x }] : []
  })
}

/**
 * At most `most` buckets over the points, each with its mean, least and greatest value: a spike of one sample stays visible at every zoom.
 * Gaps (empty points) stay between buckets. Points must rise in x.
 */
export function thin(points: readonly Point[], most: number): readonly Point[] {
  const first = points[0]
  const last = points.at(-1)
  if (points.length <= most || first === undefined || last === undefined) return points
  const width = (last.x - first.x) / most
  const out: Point[] = []
  let bucket = -1
  let n = 0
  let sum = 0
  let sumX = 0
  let low = Infinity
  let high = -Infinity
  const close = (): void => {
    if (n > 0) out.push({ x: sumX / n, y: sum / n, low, high })
    n = 0
    sum = 0
    sumX = 0
    low = Infinity
    high = -Infinity
  }
  for (const p of points) {
    const b = Math.min(most - 1, Math.floor((p.x - first.x) / width))
    if (b !== bucket || p.y === null) close()
    bucket = b
    if (p.y === null) {
      if (out.at(-1)?.y !== null) out.push({ x: p.x, y: null })
      continue
    }
    n++
    sum += p.y
    sumX += p.x
    low = Math.min(low, p.low ?? p.y)
    high = Math.max(high, p.high ?? p.y)
  }
  close()
  return out
}
