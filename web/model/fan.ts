import { depositShare } from './bore.ts'
import type { Point } from './series.ts'

/**
 * One edge of the forecast on the ratio scale: the deposit grows evenly (share of the radius linear in time) from the ratio now to the ratio
 * at which the limit is met at `atMs`; r = (1 − share)^−4. Empty when there is nothing to grow to. n points, both ends included.
 */
export function fanEdge(nowMs: number, ratio: number, limitRatio: number, atMs: number, n = 24): Point[] {
  const from = depositShare(ratio)
  const to = depositShare(limitRatio)
  if (from === null || to === null || !(to > from) || !(atMs > nowMs)) return []
  return Array.from({ length: n }, (_, i) => {
    const share = from + ((to - from) * i) / (n - 1)
    return { x: nowMs + ((atMs - nowMs) * i) / (n - 1), y: (1 - share) ** -4 }
  })
}
