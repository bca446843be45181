import { createBank } from '../../../server/core/bank/bank.ts'
import type { BankEvent } from '../../../server/core/bank/bank-state.ts'
import type { Explanation } from '../../../server/core/bank/hypotheses.ts'
import type { SegmentObservation } from '../../../server/core/bank/model.ts'
import { type Layout, layoutOf } from '../../../server/core/derive/layout.ts'
import { randomOf } from '../../../server/core/sim/random.ts'
import { loadSkid } from '../../../server/skid/check.ts'
import { twoSegments } from '../../helpers/skids.ts'

/** S1 and S2 on one stream between PT-1, PT-2, PT-3; only PT-2 has two neighbours. */
export const duo: Layout = layoutOf(twoSegments())

/** S1, S2, S3 on stream A, S3 fed by B too, between four taps: S2 is interior, no end tap touches it. */
export const trio: Layout = layoutOf(
  loadSkid(
    `
skid: trio
title: Trio
timeZone: UTC
scanSeconds: 1
tags:
  - { tag: FT-1, quantity: massFlow, unit: kg/h, range: [0, 20] }
  - { tag: FT-2, quantity: massFlow, unit: kg/h, range: [0, 20] }
${[1, 2, 3, 4].map((n) => `  - { tag: PT-${n}, quantity: pressure, unit: bar, range: [0, 25] }`).join('\n')}
streams:
  - { id: A, title: feed, flowTag: FT-1, fluid: { solvent: THF } }
  - { id: B, title: other feed, flowTag: FT-2, fluid: { solvent: hexane } }
segments:
  - { id: S1, title: first, kind: tubing, streams: [A], pressureIn: PT-1, pressureOut: PT-2 }
  - { id: S2, title: second, kind: tubing, streams: [A], pressureIn: PT-2, pressureOut: PT-3 }
  - { id: S3, title: third, kind: tubing, streams: [A, B], pressureIn: PT-3, pressureOut: PT-4 }
`,
    'trio.yaml',
  ),
)

export const exponents = { n0: 1.2, k0: 0.8 }

/**
 * What a unit disturbance of age `age` steps adds to ln ΔP of a segment, written down anew: a deposit and a tap's ramp grow by 1 a step, a tap moves
 * its two segments apart by 1000 Pa, a level and a viscosity settle in two steps, a stream acts by its share on every segment it flows through.
 */
export function signature(
  layout: Layout,
  e: Explanation,
  segment: number,
  age: number,
  o: { readonly dpPa: number; readonly k0: number; readonly share: readonly number[] },
): number {
  const g = layout.segments[segment]!
  const settled = 1 - Math.exp(-age / 2)
  const apart = (1000 / o.dpPa) * ((g.tapIn === e.of ? 1 : 0) - (g.tapOut === e.of ? 1 : 0))
  const own = e.of === segment ? 1 : 0
  const of = { deposit: own * age, step: own, settling: own * settled, 'tap-ramp': apart * age, 'tap-step': apart }
  return e.kind === 'stream' ? o.k0 * o.share[e.of]! * settled : of[e.kind]
}

/** What happens at step `k`: ln of each segment's resistance over clean, zero error of each tap [Pa], ln viscosity factor of each stream, ln flow. */
export interface Happening {
  readonly lnR?: (segment: number, k: number) => number
  readonly tapPa?: (tap: number, k: number) => number
  readonly lnVisc?: (stream: number, k: number) => number
  readonly lnFlow?: (k: number) => number
  /** How far the true flow exponent lies from the assumed one. */
  readonly exponentError?: number
  /** Sd of each tap's white noise per step mean [Pa], and of the wander of ln ΔP. */
  readonly noisePa?: number
  readonly wander?: number
  readonly seed?: number
  readonly dpPa?: readonly number[]
}

/** Observations of step k, pressures first: clean ΔP times what happens, tap pressures summed up from the outlet, tap errors on top. */
export function observer(layout: Layout, h: Happening): (k: number) => SegmentObservation[] {
  const r = randomOf(h.seed ?? 1, 'bank world')
  const clean = h.dpPa ?? layout.segments.map((_, s) => [2e5, 1.5e5, 1.8e5][s]!)
  const wander = layout.segments.map(() => 0)
  const phi = Math.exp(-30 / 2400)
  return (k) => {
    const lnFlow = h.lnFlow?.(k) ?? 0
    const share = layout.segments.map((g) => layout.streams.map((_, i) => (g.streams.includes(i) ? 1 / g.streams.length : 0)))
    const trueDp = layout.segments.map((g, s) => {
      wander[s] = phi * wander[s]! + (h.wander ?? 0) * Math.sqrt(1 - phi * phi) * r.normal()
      const visc = g.streams.reduce((a, i) => a + exponents.k0 * share[s]![i]! * (h.lnVisc?.(i, k) ?? 0), 0)
      return clean[s]! * Math.exp((h.lnR?.(s, k) ?? 0) + wander[s]! + visc + (exponents.n0 + (h.exponentError ?? 0)) * lnFlow)
    })
    const tap = layout.taps.map(() => 3e5)
    for (let s = layout.segments.length - 1; s >= 0; s--)
      tap[layout.segments[s]!.tapIn!] = tap[layout.segments[s]!.tapOut!]! + trueDp[s]!
    const read = tap.map((p, t) => p + (h.tapPa?.(t, k) ?? 0) + (h.noisePa ?? 0) * r.normal())
    return layout.segments.map((g, s) => {
      const dpPa = read[g.tapIn!]! - read[g.tapOut!]!
      return {
        y: Math.log(dpPa) - Math.log(clean[s]!) - exponents.n0 * lnFlow,
        dpPa,
        lnFlow,
        lnVisc: 0,
        ...exponents,
        share: share[s]!,
        tapPa: read,
        profileSpreadK: 0,
        stepVar: (2 * (h.noisePa ?? 0) ** 2) / dpPa ** 2,
      }
    })
  }
}

export interface Happened {
  readonly k: number
  readonly event: BankEvent
}

/** Runs the bank over `steps` steps of 30 s, judging from step 12; gives its events. */
export function run(layout: Layout, h: Happening, steps: number) {
  const bank = createBank(layout, 30_000)
  const at = observer(layout, h)
  const happened: Happened[] = []
  let lnRatio: (number | null)[] = []
  for (let k = 0; k < steps; k++) {
    const out = bank.step(at(k), k >= 12, 0)
    if (k === 60) for (let s = 0; s < layout.segments.length; s++) bank.setBaseline(s)
    for (const event of out.events) happened.push({ k, event })
    lnRatio = out.segments.map((x) => x.lnRatio)
  }
  return { bank, happened, lnRatio, kinds: happened.map((x) => x.event.kind) }
}
