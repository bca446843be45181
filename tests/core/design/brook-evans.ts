import { solve } from '../../../server/core/design/solve.ts'
import { normalCdf } from '../../../server/core/stats/normal.ts'

/**
 * Run length of one arm as a Markov chain after D. Brook and D. A. Evans, Biometrika 59 (1972) 539: `states` cells of width
 * 2h/(2·states − 1), the first about 0. A second way beside the integral equation: mean, and median by stepping the chain.
 */
export function brookEvans(k: number, h: number, shift: number, start = 0, states = 100): { mean: number; median: number } {
  const width = (2 * h) / (2 * states - 1)
  const p = new Float64Array(states * states)
  for (let r = 0; r < states; r++) {
    let below = 0
    for (let c = 0; c < states; c++) {
      const upTo = normalCdf((c + 0.5 - r) * width + k - shift)
      p[r * states + c] = upTo - below
      below = upTo
    }
  }
  const a = p.map((x) => -x)
  for (let r = 0; r < states; r++) a[r * states + r]! += 1
  const from = Math.min(states - 1, Math.round(start / width))
  const mean = solve(a, new Float64Array(states).fill(1))[from]!
  let where = new Float64Array(states)
  where[from] = 1
  let alive = 1
  for (let n = 1; ; n++) {
    const next = new Float64Array(states)
    for (let r = 0; r < states; r++) for (let c = 0; c < states; c++) next[c]! += where[r]! * p[r * states + c]!
    where = next
    alive = where.reduce((sum, x) => sum + x, 0)
    if (alive <= 0.5) return { mean, median: n }
  }
}
