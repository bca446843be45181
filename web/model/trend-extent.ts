import type { Point } from './series.ts'
import type { TrendKind } from './trend-spec.ts'

/** Range of the value axis: the data with room, and the limits as far as they do not squeeze the data flat. */
export function extent(kind: TrendKind, points: readonly Point[], limits: readonly number[], fan: boolean): [number, number] {
  let low = Infinity
  let high = -Infinity
  for (const p of points) {
    if (p.y === null) continue
    low = Math.min(low, p.low ?? p.y)
    high = Math.max(high, p.high ?? p.y)
  }
  if (kind === 'ratio') {
    low = Math.min(low, 0.9)
    high = Math.max(high, 1.2)
  }
  if (kind === 'charts') {
    low = Math.min(low, 0)
    high = Math.max(high, 1.1)
  }
  if (low === Infinity) [low, high] = limits.length > 0 ? [Math.min(...limits), Math.max(...limits)] : [0, 1]
  const span = Math.max(high - low, kind === 'temperature' ? 4 : 0.05 * Math.abs(high), 1e-6)
  for (const l of limits) {
    const far = Math.max(l - high, low - l)
    if (kind === 'ratio' ? l - 1 < (fan ? 8 : 5) * Math.max(high - 1, 0.1) : far < 2.5 * span) {
      low = Math.min(low, l)
      high = Math.max(high, l)
    }
  }
  // A forecast towards a limit outside the range gets room to be seen in.
  if (kind === 'ratio' && fan && !limits.some((l) => l <= high)) high += 0.8 * (high - 1)
  const room = Math.max(high - low, span) * 0.1
  return [kind === 'dp' || kind === 'flow' || kind === 'charts' ? Math.max(0, low - room) : low - room, high + room]
}
