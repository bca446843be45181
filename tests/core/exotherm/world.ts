import type { ReactorScan } from '../../../server/core/exotherm/types.ts'

/** Uniform in −0.5 … 0.5, seeded (linear congruential, Numerical Recipes). */
export function random(seed: number): () => number {
  let s = seed >>> 0
  return () => {
    s = (s * 1664525 + 1013904223) >>> 0
    return s / 2 ** 32 - 0.5
  }
}
/** Nearly normal, sd 1: four uniforms. */
export const gauss = (u: () => number) => Math.sqrt(3) * (u() + u() + u() + u())

export interface WorldOptions {
  readonly scanS: number
  readonly hours: number
  readonly seed: number
  /** Steps of all feeds by a factor, and of the coolant set-point by K over 3 min, at seconds. */
  readonly flowSteps?: readonly [tS: number, factor: number][]
  readonly coolantSteps?: readonly [tS: number, byK: number][]
  /** Extra heat: K at the hot spot as a function of time; the neighbours feel a share. */
  readonly extraK?: (tS: number) => number
  /** How soon the heat follows the feed, s; 25 by default. */
  readonly quickS?: number
  /** Factor on feed B alone. */
  readonly feedB?: (tS: number) => number
}

/**
 * Two cooled reactors, three and two thermocouples, two feeds: first-order wall lag of 95 s and flow lag of 30 s behind a cryostat that wobbles by
 * 0.2 K, thermocouples with offsets and 0.1 K noise rounded to 0.1 K, pumps with 0.4 % ripple that take 6 s. Not the model of the detector:
 * second order, unequal gains, slow feed wander of 1 %.
 */
export function world(o: WorldOptions): { tMs: number; scans: [ReactorScan, ReactorScan] }[] {
  const u = random(o.seed)
  const heat = [
    [4.6, 7.2, 4.9],
    [1.9, 0.8],
  ] as const
  const share = [
    [0.6, 1, 0.85],
    [0.3, 0.15],
  ] as const
  const offset = heat.map((h) => h.map(() => 0.5 * gauss(u)))
  const round = (x: number, to: number) => Math.round(x / to) * to
  let wall = -30
  let wall2 = -30
  let h = 1
  let h2 = 1
  let feed = 1
  let wander = 0
  const phase = 6 * u()
  const out = []
  for (let k = 0; k < (o.hours * 3600) / o.scanS; k++) {
    const tS = k * o.scanS
    const steps = o.scanS > 1 ? Math.ceil(o.scanS) : 1
    let coolant = 0
    for (let i = 0; i < steps; i++) {
      const dt = o.scanS / steps
      coolant = -30 + 0.2 * Math.sin(tS / 130 + phase) + 0.3 * Math.sin(tS / 2500)
      for (const [at, by] of o.coolantSteps ?? []) coolant += by * Math.min(1, Math.max(0, (tS - at) / 180))
      wall += ((coolant - wall) * dt) / 85
      wall2 += ((wall - wall2) * dt) / 10
      let target = 1
      for (const [at, factor] of o.flowSteps ?? []) if (tS >= at) target *= factor
      wander += -wander * (dt / 1800) + 0.01 * Math.sqrt((2 * dt) / 1800) * gauss(u)
      feed += ((target * (1 + wander) - feed) * dt) / 6
      h += ((feed - h) * dt) / (o.quickS ?? 25)
      h2 += ((h - h2) * dt) / 6
    }
    const extra = o.extraK?.(tS) ?? 0
    const smooth = Math.min(1, Math.sqrt(1 / o.scanS))
    const temps = heat.map((gains, r) =>
      gains.map((g, j) =>
        round(wall2 + g * h2 + offset[r]![j]! + share[r]![j]! * extra + 0.1 * smooth * gauss(u), o.scanS < 1 ? 0.01 : 0.05),
      ),
    )
    const flows = [0.0019 * feed * (1 + 0.004 * gauss(u)), 0.0008 * feed * (o.feedB?.(tS) ?? 1) * (1 + 0.004 * gauss(u))]
    const coolantC = round(coolant + 0.05 * smooth * gauss(u), 0.05)
    const one = (tempsC: number[]): ReactorScan => ({ tempsC, coolantC, flowsKgS: flows, production: true, armed: tS >= 300 })
    out.push({
      tMs: 1_900_000_000_000 + Math.round(tS * 1000),
      scans: [one(temps[0]!), one(temps[1]!)] as [ReactorScan, ReactorScan],
    })
  }
  return out
}

export const twoReactors = (scanS: number) => ({
  scanS,
  reactors: [
    { segment: 'R1', thermocouples: 3, coolant: 'TT-190', streams: 2 },
    { segment: 'R2', thermocouples: 2, coolant: 'TT-190', streams: 2 },
  ],
})
