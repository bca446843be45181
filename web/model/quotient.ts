import type { SegmentFacts, SkidFacts } from '../../server/wire/index.ts'
import type { Point } from './series.ts'

/** One series over another, point by point where both are known; a bucket's extremes are the widest that its readings allow. */
export function quotient(over: readonly Point[], under: readonly Point[], factor = 1): Point[] {
  const at = new Map(under.map((p) => [p.x, p]))
  return over.map(({ x, y, low, high }) => {
    const q = at.get(x)
    if (y === null || q?.y == null || !(q.y > 0)) return { x, y: null }
    const bounds =
      low == null || high == null || !((q.low ?? q.y) > 0)
        ? {}
        : { low: (factor * low) / (q.high ?? q.y), high: (factor * high) / (q.low ?? q.y) }
    return { x, y: (factor * y) / q.y, ...bounds }
  })
}

/** The two feeds whose ratio a segment shows: those of its limit, else its second over its first; `molMol` turns the quotient of their readings into mol/mol. */
export function feedPair(
  facts: SkidFacts,
  spec: SegmentFacts,
): { readonly of: readonly [string, string]; readonly tags: readonly [string, string]; readonly molMol: number | null } | null {
  const [a, b] = spec.feedRatio?.of ?? [spec.streams[1], spec.streams[0]]
  const [x, y] = [a, b].map((id) => facts.streams.find((s) => s.id === id))
  if (x === undefined || y === undefined) return null
  const molMol = x.molHPerFlowUnit === null || y.molHPerFlowUnit === null ? null : x.molHPerFlowUnit / y.molHPerFlowUnit
  return { of: [x.id, y.id], tags: [x.flowTag, y.flowTag], molMol }
}
