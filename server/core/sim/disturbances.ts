import type { Plant } from './plant-model.ts'
import { type Random, randomOf } from './random.ts'

/**
 * What moves a healthy plant, one step at a time. Sizes at noise 1 (project's choice, in forms unlike those a detector is likely to assume):
 *   meters      error piecewise straight between knots some 50 min apart, sd 0.12 %; the controller holds the reading, so the flow errs
 *   pumps       slow beat of two close frequencies, 0.15 %, and pulsation of 0.5 % at the shaft, aliased by whoever samples slowly
 *   regulator   sticks and slips: jumps some 30 min apart, sd 8 mbar, half given back; rises with flow
 *   coolant     compressor cycling, a sawtooth of ±0.12 K in 5 to 9 min
 *   ambient     day wave of ±2.5 K with a flat night, moves feed temperature and tap zeros
 *   segments    three switches of 2, 15 and 80 min that move ΔP by ±0.06 % each, and the bend of the mix: ±0.1 % in 4 h
 */
export interface Disturbances {
  /** Relative error of the true flow behind each meter, without pulsation. */
  readonly flow: Float64Array
  /** Pulsation of each stream now, relative. */
  readonly pulse: Float64Array
  readonly segment: Float64Array
  outletPa: number
  readonly coolantK: Float64Array
  ambientK: number
  step(dtS: number, tMs: number): void
}

interface Switch {
  high: boolean
  readonly meanS: number
}

const toggle = (s: Switch, dtS: number, random: Random): number => {
  if (random.chance(1 - Math.exp(-dtS / s.meanS))) s.high = !s.high
  return s.high ? 1 : -1
}

export function disturbancesOf(plant: Plant, seed: number, scale: number): Disturbances {
  const n = plant.streams.length
  const perStream = plant.streams.map((s) => {
    const random = randomOf(seed, `pump ${s.spec.id}`)
    return {
      random,
      from: 0,
      to: 0,
      leftS: 0,
      spanS: 1,
      shaft: random.next(),
      hz: random.between(0.7, 2.3),
      beat: random.next(),
      beatS: random.between(70, 400),
    }
  })
  const perSegment = plant.segments.map((s) => {
    const random = randomOf(seed, `wander ${s.spec.id}`)
    return {
      random,
      switches: [120, 900, 4800].map((meanS): Switch => ({ high: random.chance(0.5), meanS })),
      wave: random.next(),
      waveS: random.between(3, 6) * 3600,
    }
  })
  const outlet = randomOf(seed, 'regulator')
  const saw = plant.coolants.map((_, i) => {
    const random = randomOf(seed, `compressor ${i}`)
    return { at: random.next(), periodS: random.between(300, 540), rise: random.between(0.2, 0.5) }
  })
  let stuckPa = 0
  let slipS = outlet.exponential(1800)
  const d: Disturbances = {
    flow: new Float64Array(n),
    pulse: new Float64Array(n),
    segment: new Float64Array(plant.segments.length),
    outletPa: 0,
    coolantK: new Float64Array(plant.coolants.length),
    ambientK: 0,
    step(dtS, tMs) {
      perStream.forEach((p, i) => {
        p.leftS -= dtS
        if (p.leftS <= 0) {
          p.from = p.to
          p.to = 0.0012 * p.random.normal()
          p.spanS = p.leftS = p.random.between(1500, 4500)
        }
        p.shaft = (p.shaft + p.hz * dtS) % 1
        p.beat = (p.beat + dtS / p.beatS) % 1
        d.flow[i] = scale * (p.to + ((p.from - p.to) * p.leftS) / p.spanS)
        d.pulse[i] = scale * (0.005 * Math.sin(2 * Math.PI * p.shaft) + 0.0015 * Math.sin(2 * Math.PI * p.beat))
      })
      perSegment.forEach((w, i) => {
        let sum = 0
        for (const s of w.switches) sum += toggle(s, dtS, w.random)
        w.wave = (w.wave + dtS / w.waveS) % 1
        d.segment[i] = scale * (0.0006 * sum + 0.001 * Math.sin(2 * Math.PI * w.wave))
      })
      slipS -= dtS
      if (slipS <= 0) {
        stuckPa = 0.5 * stuckPa + 800 * outlet.normal()
        slipS = outlet.exponential(1800)
      }
      d.outletPa = scale * stuckPa
      saw.forEach((s, i) => {
        s.at = (s.at + dtS / s.periodS) % 1
        d.coolantK[i] = scale * 0.12 * (s.at < s.rise ? (2 * s.at) / s.rise - 1 : 1 - (2 * (s.at - s.rise)) / (1 - s.rise))
      })
      const hour = (tMs / 3_600_000) % 24
      d.ambientK = scale * 2.5 * Math.max(-0.6, Math.sin((2 * Math.PI * (hour - 9)) / 24))
    },
  }
  return d
}
