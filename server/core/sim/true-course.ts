import type { Skid } from '../skid.ts'
import { paFromBar } from '../units.ts'
import type { Growth } from './deposit.ts'
import { limitBar, limitRatio } from './nominal.ts'
import { plantOf } from './plant.ts'
import type { Plant } from './plant-model.ts'
import { processOf } from './process.ts'
import type { Scenario } from './scenario.ts'
import { endOf } from './scenario.ts'
import type { TrueCheckpoint, TrueFouling } from './truth.ts'

export const iso = (tMs: number): string => new Date(tMs).toISOString()
const rounded = (x: number): number => Math.round(x * 1e4) / 1e4

/** Clean ΔP and static head of one segment over the run, without noise, on a grid. */
interface CleanCourse {
  readonly stepMs: number
  readonly cleanPa: Float64Array
  readonly staticPa: number
}

/** The plant run once without noise: where the truth comes from. */
export function trueCourse(skid: Skid, scenario: Scenario) {
  const plant = plantOf(skid, scenario)
  const process = processOf(plant, scenario, null)
  const endMs = endOf(scenario)
  const stepMs = 1000 * Math.max(5, Math.ceil((endMs - scenario.fromMs) / 1000 / 200_000))
  const steps = Math.floor((endMs - scenario.fromMs) / stepMs) + 1
  const watched = [...new Set(process.growths.map((g) => g.segment))].map((id) => plant.segments.findIndex((s) => s.spec.id === id))
  const courses = new Map(watched.map((n) => [n, { stepMs, cleanPa: new Float64Array(steps), staticPa: 0 }]))
  if (watched.length > 0) {
    for (let k = 0; k < steps; k++) {
      if (k > 0) process.step(scenario.fromMs + k * stepMs, stepMs / 1000)
      for (const n of watched) {
        const course = courses.get(n)!
        course.cleanPa[k] = process.cleanPa[n]!
        course.staticPa = process.dpPa[n]! - process.cleanPa[n]! * process.ratio[n]!
      }
    }
  }
  const fouling = process.growths.map((g) =>
    foulingTruth(plant, scenario, g, courses.get(plant.segments.findIndex((s) => s.spec.id === g.segment))!),
  )
  return { plant, process, fouling }
}

/** The first whole second from fromMs on at which path · clean + head meets the limit, clean read at cleanAt; null within reach of the path. */
function firstMet(
  g: Growth,
  limitPa: number,
  staticPa: number,
  cleanAt: (tMs: number) => number,
  fromMs: number,
  untilMs: number,
): number | null {
  const met = (tMs: number) => g.pathAt(tMs) * cleanAt(tMs) + staticPa >= limitPa
  const stride = 10_000
  for (let t = fromMs; t <= untilMs; t += stride) {
    if (!met(t)) continue
    let first = t
    for (let s = Math.max(fromMs, t - stride + 1000); s < t; s += 1000) {
      if (met(s)) {
        first = s
        break
      }
    }
    return first
  }
  return null
}

function foulingTruth(plant: Plant, scenario: Scenario, g: Growth, course: CleanCourse): TrueFouling {
  const limit = limitBar(plant, g.segment)
  const limitPa = paFromBar(limit)
  const cleanAt = (tMs: number): number => {
    const x = Math.max(0, (Math.min(tMs, g.endMs - course.stepMs) - scenario.fromMs) / course.stepMs)
    const i = Math.min(course.cleanPa.length - 1, Math.floor(x))
    const next = course.cleanPa[Math.min(course.cleanPa.length - 1, i + 1)]!
    return course.cleanPa[i]! + (x - i) * (next - course.cleanPa[i]!)
  }
  const event = scenario.events.find(
    (e) => e.kind === 'fouling' && e.segment === g.segment && scenario.fromMs + Math.round(e.atHours * 3600) * 1000 === g.onsetMs,
  )
  const reachMs = g.onsetMs + 3 * (event?.kind === 'fouling' ? event.hoursToLimit : 0) * 3_600_000
  const limitMs = firstMet(g, limitPa, course.staticPa, cleanAt, g.onsetMs, reachMs) ?? reachMs
  const reached = limitMs <= g.endMs
  const points = Math.min(100, Math.max(2, Math.floor((g.endMs - g.onsetMs) / 1000)))
  const trajectory = Array.from({ length: points + 1 }, (_, i): readonly [number, number] => {
    const s = Math.round((i * (g.endMs - g.onsetMs)) / 1000 / points)
    return [s, rounded(g.pathAt(g.onsetMs + 1000 * s))]
  })
  const checkpoints = [0.25, 0.5, 0.75].flatMap((fraction): TrueCheckpoint[] => {
    const atMs = g.onsetMs + Math.round((fraction * (limitMs - g.onsetMs)) / 1000) * 1000
    if (atMs > g.endMs) return []
    const held = cleanAt(atMs)
    const heldMs = firstMet(g, limitPa, course.staticPa, () => held, atMs, reachMs)
    return [
      {
        fraction,
        at: iso(atMs),
        ratio: rounded(g.pathAt(atMs)),
        limitAtHeld: heldMs === null ? null : iso(heldMs),
        sloughAhead: g.sloughsMs.some((s) => s > atMs && s <= limitMs),
      },
    ]
  })
  return {
    segment: g.segment,
    cause: g.cause,
    model: g.law,
    localFraction: g.localFraction,
    onset: iso(g.onsetMs),
    end: iso(g.endMs),
    endedBy: g.endedBy,
    limitAt: iso(limitMs),
    limitReached: reached,
    limitRatioNominal: rounded(limitRatio(plant, g.segment)),
    dpHighBar: rounded(limit),
    ratioAtOnset: rounded(g.ratioAtOnset),
    ratioMax: Math.max(...trajectory.map((p) => p[1])),
    ratioAfterFlush: g.ratioAfterFlush === null ? null : rounded(g.ratioAfterFlush),
    sloughs: g.sloughsMs.map(iso),
    trajectory,
    checkpoints,
  }
}
