import type { GrowthPoint, Noise } from '../../../server/core/growth/points.ts'

/** mulberry32: a seeded uniform generator (common practice). */
export function uniform(seed: number): () => number {
  let a = seed >>> 0
  return () => {
    a = (a + 0x6d2b79f5) >>> 0
    let t = Math.imul(a ^ (a >>> 15), 1 | a)
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
}

export const normal = (u: () => number): number => Math.sqrt(-2 * Math.log(1 - u())) * Math.cos(2 * Math.PI * u())

/** Gamma(shape, 1) after Marsaglia and Tsang 2000. */
function gamma(u: () => number, shape: number): number {
  if (shape < 1) return gamma(u, shape + 1) * (1 - u()) ** (1 / shape)
  const d = shape - 1 / 3
  const c = 1 / Math.sqrt(9 * d)
  for (;;) {
    const x = normal(u)
    const v = (1 + c * x) ** 3
    if (v > 0 && Math.log(1 - u()) < 0.5 * x * x + d - d * v + d * Math.log(v)) return d * v
  }
}

export type Law = 'linear' | 'saturating' | 'accelerating' | 'sigmoid'

export interface Growth {
  readonly law: Law
  readonly fraction: number
  readonly onsetMs: number
  readonly limitMs: number
  readonly limitRatio: number
  readonly noise: Noise
  readonly points: GrowthPoint[]
  readonly truth: { tMs: number; ratio: number }[]
  readonly sloughMs: number[]
}

export interface GrowthOptions {
  readonly hours: number
  readonly cleanHours?: number
  readonly law: Law
  readonly fraction: number
  readonly limitRatio: number
  readonly wanderSd?: number
  readonly whiteSd?: number
  readonly clockCv?: number
  readonly stepS?: number
  readonly sloughs?: number
}

/**
 * A deposit on a round bore, simulated independently of the code under test: film δ over a gamma clock (mean = time), laws
 * linear s, saturating (1 − e^(−as))/(1 − e^−a) with a of 0.8 to 2.2, accelerating (e^(bs) − 1)/(e^b − 1) with b of 1.5 to 3, and a
 * sigmoid (logistic) that no law of the forecast matches; r = 1 − f + f(1 − δ)^−4; measured with
 * Ornstein–Uhlenbeck wander and white noise in ln r.
 */
export function simulateGrowth(seed: number, o: GrowthOptions): Growth {
  const u = uniform(seed)
  const stepS = o.stepS ?? 30
  const noise: Noise = { wanderSd: o.wanderSd ?? 0.0022, wanderTauS: 2400, whiteSd: o.whiteSd ?? 0.002, stepS }
  const cv = o.clockCv ?? 0.06
  const fade = 0.8 + 1.4 * u()
  const push = 1.5 + 1.5 * u()
  const shape: Record<Law, (s: number) => number> = {
    linear: (s) => s,
    saturating: (s) => Math.expm1(-fade * s) / Math.expm1(-fade),
    accelerating: (s) => Math.expm1(push * s) / Math.expm1(push),
    sigmoid: (s) => (1 / (1 + 9 * Math.exp(-3.2 * s)) - 0.1) / (1 / (1 + 9 * Math.exp(-3.2)) - 0.1),
  }
  const filmLimit = 1 - ((o.limitRatio - 1 + o.fraction) / o.fraction) ** -0.25
  const cleanS = (o.cleanHours ?? 1.5) * 3600 * (0.7 + 0.6 * u())
  const onsetS = cleanS + stepS * u()
  const lifeS = o.hours * 3600
  const points: GrowthPoint[] = []
  const truth: { tMs: number; ratio: number }[] = []
  const sloughMs: number[] = []
  let clock = 0
  let wander = noise.wanderSd * normal(u)
  const rho = Math.exp(-stepS / noise.wanderTauS)
  const sub = 3
  let limitMs = Number.NaN
  let lost = 0
  for (let t = stepS / 2; t < cleanS + 4 * lifeS; t += stepS) {
    let sum = 0
    for (let i = 0; i < sub; i++) {
      const at = t - stepS / 2 + ((i + 0.5) * stepS) / sub
      const dt = Math.min(stepS / sub, Math.max(0, at + stepS / sub / 2 - onsetS))
      if (dt > 0) clock += cv * cv * gamma(u, dt / lifeS / (cv * cv))
      const s = clock
      let film = filmLimit * shape[o.law](s) - lost
      if (o.sloughs !== undefined && dt > 0 && u() < (o.sloughs * dt) / lifeS && film > 0.25 * filmLimit) {
        lost += film * (0.15 + 0.25 * u())
        film = filmLimit * shape[o.law](s) - lost
        sloughMs.push(at * 1000)
      }
      const ratio = 1 - o.fraction + o.fraction * (1 - Math.min(0.9, Math.max(0, film))) ** -4
      sum += ratio / sub
      if (Number.isNaN(limitMs) && ratio >= o.limitRatio) limitMs = at * 1000
    }
    wander = rho * wander + noise.wanderSd * Math.sqrt(1 - rho * rho) * normal(u)
    points.push({ tMs: t * 1000, lnRatio: Math.log(sum) + wander + noise.whiteSd * normal(u) })
    truth.push({ tMs: t * 1000, ratio: sum })
    if (!Number.isNaN(limitMs)) break
  }
  return {
    law: o.law,
    fraction: o.fraction,
    onsetMs: onsetS * 1000,
    limitMs,
    limitRatio: o.limitRatio,
    noise,
    points,
    truth,
    sloughMs,
  }
}

/** A random mix: life 0.3 to 16 h, the three laws, a third on part of the length, limits of 1.5 to 3. */
export function randomGrowth(seed: number, more: Partial<GrowthOptions> = {}): Growth {
  const u = uniform(seed ^ 0x5bd1e995)
  const laws: Law[] = ['linear', 'saturating', 'accelerating']
  const pick = u()
  return simulateGrowth(seed, {
    hours: 0.3 * (16 / 0.3) ** u(),
    law: pick < 0.5 ? 'linear' : laws[pick < 0.75 ? 1 : 2]!,
    fraction: u() < 0.66 ? 1 : 0.12 + 0.28 * u(),
    limitRatio: 1.5 + 1.5 * u(),
    wanderSd: 0.0015 + 0.002 * u(),
    whiteSd: 0.001 + 0.003 * u(),
    ...more,
  })
}

/** When a plain ramp detector speaks: mean of four steps above 6 sd of the noise and above 2 %. */
export function alarmIndex(g: Growth): number {
  const limit = Math.max(0.02, 6 * Math.hypot(g.noise.wanderSd, g.noise.whiteSd / 2))
  for (let i = 3; i < g.points.length; i++) {
    const mean = (g.points[i]!.lnRatio + g.points[i - 1]!.lnRatio + g.points[i - 2]!.lnRatio + g.points[i - 3]!.lnRatio) / 4
    if (mean > limit && g.points[i]!.tMs > g.onsetMs) return i
  }
  return -1
}
