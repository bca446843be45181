import type { Bin } from './points.ts'
import type { WanderStep } from './wander.ts'

/** State of the filter: wander z, growth clock ahead of time W [life times], clean level c, with covariance. */
export interface Belief {
  z: number
  w: number
  c: number
  zz: number
  zw: number
  zc: number
  ww: number
  wc: number
  cc: number
}

/** What the clean means teach of level and wander; the level starts at 0 ± 0.05, as the ratio is over clean. */
export function cleanBelief(clean: readonly Bin[], steps: readonly WanderStep[]): Belief {
  const b: Belief = { z: 0, w: 0, c: 0, zz: 1, zw: 0, zc: 0, ww: 0, wc: 0, cc: 0.0025 }
  for (let i = 0; i < clean.length; i++) observe(b, steps[i]!, 0, 0, clean[i]!.lnRatio)
  return b
}

/** One filter step: y = size·z + m + slope·(w − its mean) + c + white. Returns the log likelihood; an innovation beyond 5 sd is widened to it. */
function observe(b: Belief, step: WanderStep, m: number, slope: number, y: number): number {
  const rho = step.rho
  b.z *= rho
  b.zz = rho * rho * b.zz + 1 - rho * rho
  b.zw *= rho
  b.zc *= rho
  const h = step.size
  const hz = h * b.zz + slope * b.zw + b.zc
  const hw = h * b.zw + slope * b.ww + b.wc
  const hc = h * b.zc + slope * b.wc + b.cc
  let s = h * hz + slope * hw + hc + step.white
  const e = y - h * b.z - m - b.c
  if (e * e > 25 * s) s = (e * e) / 25
  const kz = hz / s
  const kw = hw / s
  const kc = hc / s
  b.z += kz * e
  b.w += kw * e
  b.c += kc * e
  b.zz -= kz * hz
  b.zw -= kz * hw
  b.zc -= kz * hc
  b.ww -= kw * hw
  b.wc -= kw * hc
  b.cc -= kc * hc
  return -0.5 * (Math.log(s) + (e * e) / s)
}
