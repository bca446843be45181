import { randomOf } from './random.ts'
import { endOf, eventsOf, type GrowthLaw, type Scenario, timeOf } from './scenario.ts'
import { scheduleOf } from './schedule.ts'

/** One growth as the plant knows it. The path is fixed before the run starts, so it can be asked at any time, also past its end. */
export interface Growth {
  readonly segment: string
  readonly cause: 'fouling' | 'filter'
  readonly law: GrowthLaw
  readonly localFraction: number | null
  readonly onsetMs: number
  readonly endMs: number
  readonly endedBy: string
  readonly ratioAtOnset: number
  /** Null where no flush ended it. */
  readonly ratioAfterFlush: number | null
  readonly sloughsMs: readonly number[]
  /** As if nothing ended it. */
  pathAt(tMs: number): number
}

/** Thickness rate over τ = time/(time to limit), so that it integrates to 1 at τ = 1. Shapes with their constant K drawn once a growth. */
function lawRate(law: GrowthLaw, k: number): (tau: number) => number {
  if (law === 'linear') return () => 1
  if (law === 'autocatalytic') return (tau) => (k * Math.exp(k * Math.min(tau, 1.5))) / (Math.exp(k) - 1)
  return (tau) => (k * Math.exp(-k * tau)) / (1 - Math.exp(-k))
}

const STEPS = 400
/** The path is known to so many times the time to the limit; then it stands still. */
const REACH = 3
/** The bore never closes more than this share of its radius. */
const THICKEST = 0.92

/**
 * Shear holds a deposit down once it is far past the limit: r itself up to 1.3 times the limit ratio, then bending towards twice that ratio
 * (project's choice; no run goes on there, but a log must not show what no pump could deliver).
 */
export function sheared(ratio: number, limit: number): number {
  const from = 1.3 * limit
  return ratio <= from ? ratio : from + 0.7 * limit * (1 - Math.exp(-(ratio - from) / (0.7 * limit)))
}

/**
 * Ratio of a bore narrowed by a film: over the whole length r = (1 − δ)^−4, over a share f of it r = 1 + f ((1 − δ)^−4 − 1).
 * δ  thickness over radius [-]. Laminar (Hagen-Poiseuille with the radius to the fourth); velocity change at the ends left out.
 */
export const ratioOfThickness = (delta: number, fraction: number): number =>
  1 + fraction * ((1 - Math.min(delta, THICKEST)) ** -4 - 1)
export const thicknessOfRatio = (ratio: number, fraction: number): number => 1 - (1 + (ratio - 1) / fraction) ** -0.25

/**
 * Thickness over that at the limit, on a grid of τ: ∫ rate(τ) e^{σz − σ²/2} dτ, z an AR(1) with memory of 1/25 of the time to the limit and
 * σ = 0.35 (project's choice: a growth that halts and runs), less what breaks off (15 to 45 % of the thickness at each slough).
 */
function thicknessPath(law: GrowthLaw, sloughs: number, seed: number, name: string, noise: number) {
  const random = randomOf(seed, name)
  const rate = lawRate(law, random.between(0.9, 2.2))
  const sloughSteps = Array.from({ length: sloughs }, () => Math.round(STEPS * random.between(0.2, 0.8))).sort((a, b) => a - b)
  const memory = Math.exp(-25 / STEPS)
  const sigma = 0.35 * Math.min(1, noise)
  const path = new Float64Array(REACH * STEPS + 1)
  let z = random.normal()
  for (let i = 1; i < path.length; i++) {
    z = memory * z + Math.sqrt(1 - memory * memory) * random.normal()
    const grown = path[i - 1]! + (rate((i - 0.5) / STEPS) * Math.exp(sigma * z - (sigma * sigma) / 2)) / STEPS
    path[i] = grown * sloughSteps.filter((s) => s === i).reduce((left) => left * (1 - random.between(0.15, 0.45)), 1)
  }
  return { path, sloughSteps }
}

/** Every growth of a scenario. limitRatio: the ratio at which a segment meets its dP limit when clean flow and temperature are nominal. */
export function growthsOf(
  scenario: Scenario,
  limitRatio: (segment: string) => number,
  isFilter: (segment: string) => boolean,
): readonly Growth[] {
  const endMs = endOf(scenario)
  const spans = scheduleOf(scenario)
  const growths: Growth[] = []
  for (const [n, event] of eventsOf(scenario, 'fouling').entries()) {
    const onsetMs = timeOf(scenario, event)
    const filter = isFilter(event.segment)
    const flush = filter ? undefined : spans.find((s) => s.phase === 'flush' && s.fromMs > onsetMs)
    const change = eventsOf(scenario, 'filterChange').find((c) => c.segment === event.segment && timeOf(scenario, c) > onsetMs)
    const changeMs = change === undefined ? Number.POSITIVE_INFINITY : timeOf(scenario, change)
    const shutdown = spans.find((s) => s.phase === 'shutdown')
    const ends: readonly (readonly [number, string])[] = [
      [endMs, 'log end'],
      [shutdown?.fromMs ?? Number.POSITIVE_INFINITY, 'shutdown'],
      [flush?.fromMs ?? Number.POSITIVE_INFINITY, 'flush'],
      [changeMs, 'filter change'],
    ]
    const [stopMs, endedBy] = ends.reduce((a, b) => (b[0] < a[0] ? b : a))
    const before = growths.filter((g) => g.segment === event.segment).at(-1)
    const base = before?.ratioAfterFlush ?? 1
    const fraction = event.localFraction ?? 1
    const limit = limitRatio(event.segment)
    const atLimit = thicknessOfRatio(Math.max(1.05, limit / base), fraction)
    const { path, sloughSteps } = thicknessPath(
      event.law,
      event.sloughs,
      scenario.seed,
      `growth ${event.segment} ${n}`,
      scenario.noise,
    )
    const stepMs = (event.hoursToLimit * 3_600_000) / STEPS
    const pathAt = (tMs: number): number => {
      const x = Math.min(path.length - 1, Math.max(0, (tMs - onsetMs) / stepMs))
      const i = Math.min(path.length - 2, Math.floor(x))
      return sheared(base * ratioOfThickness(atLimit * (path[i]! + (x - i) * (path[i + 1]! - path[i]!)), fraction), limit)
    }
    const recovery = eventsOf(scenario, 'flush').find((f) => timeOf(scenario, f) === flush?.fromMs)?.recovery ?? 1
    growths.push({
      segment: event.segment,
      cause: filter ? 'filter' : 'fouling',
      law: event.law,
      localFraction: event.localFraction,
      onsetMs,
      endMs: stopMs,
      endedBy,
      ratioAtOnset: base,
      ratioAfterFlush: endedBy === 'flush' ? 1 + (pathAt(stopMs) - 1) * (1 - recovery) : null,
      sloughsMs: sloughSteps.map((s) => Math.round((onsetMs + s * stepMs) / 1000) * 1000).filter((t) => t < stopMs),
      pathAt,
    })
  }
  return growths
}

/** The true ratio of a segment at an instant: growth, then what a flush dissolves (evenly over its first 60 %), then what is left. */
export function ratioAt(growths: readonly Growth[], segment: string, tMs: number, flushMs: (g: Growth) => number): number {
  let ratio = 1
  for (const g of growths) {
    if (g.segment !== segment || tMs < g.onsetMs) continue
    if (tMs <= g.endMs) ratio = g.pathAt(tMs)
    else if (g.endedBy === 'filter change') ratio = 1
    else if (g.ratioAfterFlush === null) ratio = g.pathAt(g.endMs)
    else {
      const gone = Math.min(1, (tMs - g.endMs) / Math.max(1, 0.6 * flushMs(g)))
      const top = g.pathAt(g.endMs)
      ratio = top + (g.ratioAfterFlush - top) * gone
    }
  }
  return ratio
}
