import { type Layout, layoutOf } from '../../../server/core/derive/layout.ts'
import type { Step } from '../../../server/core/derive/step.ts'
import { randomOf } from '../../../server/core/sim/random.ts'
import { loadSkid } from '../../../server/skid/check.ts'
import { twoSegments } from '../../helpers/skids.ts'

export const duo: Layout = layoutOf(twoSegments())
export const stepMs = 30_000
export const startMs = Date.UTC(2031, 0, 6)

/** A filter and a reactor one behind the other. */
export const withFilter: Layout = layoutOf(
  loadSkid(
    `
skid: sieve
title: Sieve
timeZone: UTC
scanSeconds: 1
phaseColumn: phase
tags:
  - { tag: FT-1, quantity: massFlow, unit: kg/h, range: [0, 20] }
  - { tag: PT-1, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: PT-2, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: PT-3, quantity: pressure, unit: bar, range: [0, 25] }
streams:
  - { id: A, title: feed, flowTag: FT-1, fluid: { solvent: THF } }
segments:
  - { id: F1, title: filter, kind: filter, streams: [A], pressureIn: PT-1, pressureOut: PT-2, limits: { dpHighBar: 4 } }
  - { id: R1, title: reactor, kind: reactor, streams: [A], pressureIn: PT-2, pressureOut: PT-3, limits: { dpHighBar: 4 } }
`,
    'sieve.yaml',
  ),
)

export interface StepOver {
  /** ΔP of either segment over its clean 2.0 and 1.5 bar. */
  readonly ratio?: readonly [number, number]
  readonly flowKgH?: number
  readonly tempC?: number
  /** Share of the step in production by the log's word; null where it names none. */
  readonly production?: number | null
  readonly seen?: number
  readonly gapSteps?: number
}

const clean = [2e5, 1.5e5] as const
/** Steps of the two-segment skid, each tap with white noise of `noisePa` a step and each ΔP with the wander the model expects. */
export function stepper(options: { layout?: Layout; noisePa?: number; wander?: number; seed?: number } = {}) {
  const layout = options.layout ?? duo
  const { noisePa = 0, wander = 0, seed = 1 } = options
  const r = randomOf(seed, 'watch steps')
  const phi = Math.exp(-30 / 2400)
  const w = [0, 0]
  return (k: number, over: StepOver = {}): Step => {
    const { ratio = [1, 1], flowKgH = 6, tempC = 20, production = 1, seen = 1, gapSteps = 0 } = over
    const none = seen === 0
    const dp = clean.map((c, i) => {
      w[i] = phi * w[i]! + wander * Math.sqrt(1 - phi * phi) * r.normal()
      return flowKgH < 0.1 ? 0 : c * ratio[i]! * Math.exp(w[i]!)
    })
    const tap = [3e5 + dp[1]! + dp[0]!, 3e5 + dp[1]!, 3e5].map((p) => p + noisePa * r.normal())
    return {
      tMs: startMs + (k + 0.5) * stepMs,
      stepMs,
      seen,
      gapSteps,
      dpPa: [0, 1].map((i) => (none ? null : tap[i]! - tap[i + 1]!)),
      dpVarPa2: [0, 1].map(() => (none ? null : 2 * noisePa ** 2)),
      tapPa: tap.map((p) => (none ? null : p)),
      flow: [none ? null : flowKgH / 3600],
      tempK: layout.skid.tags.map((t) => (none || t.quantity !== 'temperature' ? null : tempC + 273.15)),
      production: none ? null : production,
      flush: production === null || none ? null : 1 - production,
    }
  }
}
