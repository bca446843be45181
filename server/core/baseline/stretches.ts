import type { Step } from '../derive/step.ts'

/** Steps [from, to) of a log in which the liquid of a segment stands still, or flows steadily. */
export interface Stretch {
  readonly from: number
  readonly to: number
}

/**
 * What counts as a stretch, in detector steps (30 s on a 1-s grid): its least length once `settle` steps are left out, how far a flow may
 * lie from the mean of the stretch, how far a temperature, and below which share of its largest a flow counts as none. Starting values.
 */
export const stretchRules = { least: 10, settle: 3, flow: 0.015, tempK: 1, rest: 0.02 } as const

/** Stretches of standstill and of steady flow, each at least `least` steps after settling, and the longest steady one that was too short. */
export interface Found {
  readonly rest: readonly Stretch[]
  readonly steady: readonly Stretch[]
  readonly longestShort: number
}

/**
 * Finds the standstills and flow levels of a step test for one segment: `flows` and `temperatures` are its streams (indices into `Step.flow`) and
 * thermometers (into `Step.tempK`). A stretch ends where a flow or temperature leaves the band around its mean so far, at a gap, and where a flow is missing.
 */
export function stretchesOf(steps: readonly Step[], flows: readonly number[], temperatures: readonly number[]): Found {
  const largest = flows.map((i) => steps.reduce((m, s) => Math.max(m, s.flow[i] ?? 0), 0))
  const kindOf = (s: Step): 'rest' | 'flow' | null => {
    if (s.seen === 0 || flows.length === 0 || flows.some((i) => s.flow[i] == null)) return null
    const still = flows.map((i, j) => s.flow[i]! <= stretchRules.rest * largest[j]!)
    if (still.every((x) => x)) return 'rest'
    return still.some((x) => x) ? null : 'flow'
  }
  const rest: Stretch[] = []
  const steady: Stretch[] = []
  let longestShort = 0
  let from = 0
  let kind: 'rest' | 'flow' | null = null
  let flowSum: number[] = []
  let tempSum: number[] = []
  let tempN: number[] = []
  const close = (to: number): void => {
    const settled = from + stretchRules.settle
    if (kind !== null && to - settled >= stretchRules.least) (kind === 'rest' ? rest : steady).push({ from: settled, to })
    else if (kind === 'flow') longestShort = Math.max(longestShort, to - settled)
  }
  steps.forEach((s, k) => {
    const now = kindOf(s)
    const n = k - from
    const inBand =
      now === kind &&
      s.gapSteps === 0 &&
      (now !== 'flow' ||
        (flows.every((i, j) => Math.abs(s.flow[i]! / (flowSum[j]! / n) - 1) <= stretchRules.flow) &&
          temperatures.every(
            (t, j) => s.tempK[t] == null || tempN[j] === 0 || Math.abs(s.tempK[t]! - tempSum[j]! / tempN[j]!) <= stretchRules.tempK,
          )))
    if (!inBand) {
      close(k)
      from = k
      kind = now
      flowSum = flows.map(() => 0)
      tempSum = temperatures.map(() => 0)
      tempN = temperatures.map(() => 0)
    }
    flows.forEach((i, j) => {
      flowSum[j]! += s.flow[i] ?? 0
    })
    temperatures.forEach((t, j) => {
      if (s.tempK[t] == null) return
      tempSum[j]! += s.tempK[t]!
      tempN[j]!++
    })
  })
  close(steps.length)
  return { rest, steady, longestShort: Math.max(0, longestShort) }
}
