import { normalQuantile } from '../stats/normal.ts'
import { type Explained, explainedWidth } from './explanations.ts'

/** Equal shares of a standard normal distribution: the middles of eleven. */
const shares = Float64Array.from({ length: 11 }, (_, i) => normalQuantile((i + 0.5) / 11))

/** Quantiles of the time left: each node lognormal about its own time, so that no part lies before now; summed on a log grid. */
export function mixtureQuantiles(nodes: Explained, probabilities: readonly number[]): number[] {
  const count = nodes.length / explainedWidth
  const spread = new Float64Array(count)
  const middle = new Float64Array(count)
  let low = Infinity
  let high = -Infinity
  for (let i = 0; i < count; i++) {
    const leftMs = nodes[i * explainedWidth + 1]!
    const sdMs = nodes[i * explainedWidth + 2]!
    const centre = Math.max(leftMs, 0.3 * sdMs, 1)
    const own = Math.sqrt(Math.log1p(Math.min(1.5, sdMs / centre) ** 2))
    spread[i] = own
    middle[i] = Math.log(centre) - own ** 2 / 2
    low = Math.min(low, middle[i]! + own * shares[0]!)
    high = Math.max(high, middle[i]! + own * shares[shares.length - 1]!)
  }
  const cells = new Float64Array(512)
  const width = Math.max((high - low) / (cells.length - 1), 1e-9)
  for (let i = 0; i < count; i++) {
    const part = nodes[i * explainedWidth]! / shares.length
    for (let k = 0; k < shares.length; k++) cells[Math.floor((middle[i]! + spread[i]! * shares[k]! - low) / width + 1e-9)]! += part
  }
  let total = 0
  for (const cell of cells) total += cell
  return probabilities.map((probability) => {
    let left = probability * total
    for (let i = 0; i < cells.length; i++) {
      if (left <= cells[i]! && cells[i]! > 0) return Math.exp(low + width * (i + left / cells[i]!))
      left -= cells[i]!
    }
    return Math.exp(high)
  })
}
