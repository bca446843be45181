import { normalQuantile } from '../stats/normal.ts'
import type { Explained } from './explanations.ts'

/** Equal shares of a standard normal distribution: the middles of eleven. */
const shares = Array.from({ length: 11 }, (_, i) => normalQuantile((i + 0.5) / 11))

/** Quantiles of the time left: each node lognormal about its own time, so that no part lies before now; summed on a log grid. */
export function mixtureQuantiles(nodes: readonly Explained[], probabilities: readonly number[]): number[] {
  const centre = (node: Explained) => Math.max(node.leftMs, 0.3 * node.sdMs, 1)
  const spread = nodes.map((node) => Math.sqrt(Math.log1p(Math.min(1.5, node.sdMs / centre(node)) ** 2)))
  const middle = nodes.map((node, i) => Math.log(centre(node)) - spread[i]! ** 2 / 2)
  let low = Infinity
  let high = -Infinity
  for (let i = 0; i < nodes.length; i++) {
    low = Math.min(low, middle[i]! + spread[i]! * shares[0]!)
    high = Math.max(high, middle[i]! + spread[i]! * shares[shares.length - 1]!)
  }
  const cells = new Float64Array(512)
  const width = Math.max((high - low) / (cells.length - 1), 1e-9)
  for (let i = 0; i < nodes.length; i++) {
    const part = nodes[i]!.weight / shares.length
    for (const share of shares) cells[Math.floor((middle[i]! + spread[i]! * share - low) / width + 1e-9)]! += part
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
