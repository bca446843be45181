import type { Layout } from '../derive/layout.ts'
import { fluidOf } from '../fluids/fluid.ts'
import type { FlushPlan } from '../report.ts'
import type { CourseStep, GuideState, LegState } from './course-state.ts'
import { type FlushInput, type FlushSettings, flushDefaults } from './input.ts'
import { type FlushPath, flushPath, type Leg } from './legs.ts'
import { flushLiquids } from './liquids.ts'
import { pointsOf } from './points.ts'

export interface Opening {
  readonly layout: Layout
  readonly input: FlushInput
  readonly plan: FlushPlan
  readonly tMs: number
  readonly person: string
}

function legState(leg: Leg, o: Opening): LegState {
  const segment = o.layout.segments.findIndex((g) => g.spec.id === leg.id)
  const total = leg.op.streams.reduce((a, s) => a + (s.massFlowKgS ?? 0), 0)
  return {
    id: leg.id,
    segment,
    asked: leg.asked,
    volumeMl: leg.op.volumeM3 === null ? null : leg.op.volumeM3 * 1e6,
    shares: leg.op.streams.map((s) => (total > 0 ? (s.massFlowKgS ?? 0) / total : 1)),
    feedFactor: null,
    solventFactor: null,
    before: o.input.ratios?.[leg.id] ?? null,
    raw: null,
  }
}

/** Flow meters of the path, with the density of what they meter in each step: the denser one counts, so a volume is never counted too large. */
function metersOf(path: FlushPath, o: Opening, settings: FlushSettings): GuideState['meters'] {
  const liquids = flushLiquids(path, settings)
  const coldest = Math.min(...path.legs.map((l) => l.op.coldestK))
  const warmK = settings.warmC + 273.15
  const solvent = liquids.displacement.at(coldest).rhoKgM3
  const drying = liquids.drying.at(warmK).rhoKgM3
  const water = liquids.water.at(warmK).rhoKgM3
  return path.operation.streams.flatMap((s) => {
    if (!path.legs.some((l) => l.op.spec.streams.includes(s.id))) return []
    const stream = o.layout.streams.find((x) => x.id === s.id)
    if (stream === undefined || stream.tag < 0) return []
    const own = s.spec.fluid === null ? solvent : fluidOf(s.spec.fluid).at(s.tempK).rhoKgM3
    const usualSi = stream.isMass ? s.massFlowKgS : s.volumeFlowM3S
    const rho = stream.isMass
      ? [own, solvent, solvent, water, drying, liquids.drying.at(coldest).rhoKgM3, own]
      : [1, 1, 1, 1, 1, 1, 1]
    return [{ tag: stream.tag, rho, usualSi }]
  })
}

/** A flush opens with F0: plan, points and what they are judged by are fixed from here on. Errors: FLUSH_REFUSED, FLUID_*. */
export function openCourse(s: GuideState, o: Opening): void {
  const settings = { ...flushDefaults, ...o.input.settings }
  const path = flushPath(o.input)
  const liquids = flushLiquids(path, settings)
  const built = o.plan.steps.map((step) =>
    pointsOf(step, { path, plan: o.plan, settings, layout: o.layout, given: o.input.given ?? {} }),
  )
  const volumes = path.legs.map((l) => l.op.volumeM3)
  s.count++
  s.plan = o.plan
  s.rules = built.map((b) => b.map((x) => x.rule))
  s.memory = built.map((b) => b.map(() => ({ low: null, beatS: 0, trail: [] })))
  s.legs = path.legs.map((l) => legState(l, o))
  s.meters = metersOf(path, o, settings)
  s.pathMl = volumes.some((v) => v === null) ? null : volumes.reduce<number>((a, v) => a + (v ?? 0) * 1e6, 0)
  s.displacement = liquids.displacement.name
  s.drying = liquids.drying.name
  s.course = {
    flush: s.count,
    segments: [...o.plan.segments],
    path: [...o.plan.path],
    openedMs: o.tMs,
    openedBy: o.person,
    state: 'running',
    endedMs: null,
    endedBy: null,
    reason: null,
    steps: o.plan.steps.map(
      (p, i): CourseStep => ({
        step: p.id,
        title: p.title,
        liquid: p.liquid,
        plannedMl: p.volumeMl,
        flowMlMin: p.flowMlMin,
        minutes: p.minutes,
        state: 'open',
        startedMs: null,
        startedBy: null,
        endedMs: null,
        endedBy: null,
        reason: null,
        passedMl: 0,
        withoutFlowS: 0,
        points: built[i]!.map((b) => b.point),
      }),
    ),
    refusals: [],
    calls: [],
    recovery: s.legs
      .filter((l) => l.asked)
      .map((l) => ({
        segment: l.id,
        before: l.before,
        water: null,
        solvent: null,
        feeds: null,
        baseline: null,
        provisional: false,
        verdict: 'open',
      })),
    exceptions: [],
  }
}
