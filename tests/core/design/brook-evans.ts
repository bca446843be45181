import { normalCdf } from '../stats/normal.ts'
import { solve } from './solve.ts'

/**
 * The run length of one arm as a Markov chain, after Brook and Evans: `states` cells of width 2h/(2·states − 1), the first about 0.
 * mean [samples], and the decay λ and amplitude C of its long tail, P(N > n) → C λⁿ: percentage points need no simulation.
 * Within 0.5 % of the integral equation at 100 states. Source: D. Brook and D. A. Evans, Biometrika 59 (1972) 539.
 */
export function cusumChain(
  k: number,
  h: number,
  shift: number,
  start = 0,
  states = 100,
): { mean: number; decay: number; amplitude: number } {
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
  const mean = solve(a.slice(), new Float64Array(states).fill(1))[from]!
  // power iteration from both sides: right vector (where one starts), left vector (where one is)
  let right = new Float64Array(states).fill(1)
  let left = new Float64Array(states).fill(1 / states)
  let decay = 1
  for (let turn = 0; turn < 2000; turn++) {
    const nextRight = new Float64Array(states)
    const nextLeft = new Float64Array(states)
    for (let r = 0; r < states; r++) {
      for (let c = 0; c < states; c++) {
        const x = p[r * states + c]!
        nextRight[r]! += x * right[c]!
        nextLeft[c]! += left[r]! * x
      }
    }
    let total = 0
    for (let c = 0; c < states; c++) total += nextLeft[c]!
    let top = 0
    for (let r = 0; r < states; r++) top = Math.max(top, nextRight[r]!)
    for (let c = 0; c < states; c++) {
      nextLeft[c]! /= total
      nextRight[c]! /= top
    }
    right = nextRight
    left = nextLeft
    const done = Math.abs(total - decay) < 1e-15
    decay = total
    if (done && turn > 20) break
  }
  let overlap = 0
  for (let c = 0; c < states; c++) overlap += left[c]! * right[c]!
  return { mean, decay, amplitude: right[from]! / overlap }
}
