import type { Skid } from '../skid.ts'
import { checkScenario } from './check.ts'
import { excessAt } from './exotherm.ts'
import { faultsOf, isHard } from './faults.ts'
import { endOf, type Scenario, type SimEvent, timeOf } from './scenario.ts'
import type { Span } from './schedule.ts'
import { rowsOf } from './simulator.ts'
import { iso, trueCourse } from './true-course.ts'
import type { TrueConfounder, TrueDirty, TrueExotherm, Truth } from './truth.ts'

const EVERY_S = 600
const rounded = (x: number): number => Math.round(x * 1e4) / 1e4
const hoursOf = (spans: readonly { readonly fromMs: number; readonly toMs: number }[]) =>
  rounded(spans.reduce((h, s) => h + (s.toMs - s.fromMs) / 3_600_000, 0))

/** Production less the times when a deposit (not a filter) grows somewhere. */
function inControl(schedule: readonly Span[], growing: readonly { readonly fromMs: number; readonly toMs: number }[]) {
  let free = schedule.filter((s) => s.phase === 'production').map((s) => ({ fromMs: s.fromMs, toMs: s.toMs }))
  for (const g of growing) {
    free = free.flatMap((f) => [
      { fromMs: f.fromMs, toMs: Math.min(f.toMs, g.fromMs) },
      { fromMs: Math.max(f.fromMs, g.toMs), toMs: f.toMs },
    ])
    free = free.filter((f) => f.toMs > f.fromMs)
  }
  return free.sort((a, b) => a.fromMs - b.fromMs)
}

/** What else happened, in the words of the truth file; what has a list of its own there is left out. */
function confounderOf(scenario: Scenario, e: SimEvent): TrueConfounder | null {
  const tMs = timeOf(scenario, e)
  const at = iso(tMs)
  const until = (seconds: number) => iso(tMs + Math.round(seconds) * 1000)
  switch (e.kind) {
    case 'fouling':
    case 'exotherm':
    case 'sensor':
      return null
    case 'gasSlug':
      return { kind: e.kind, at, until: until(e.lastsS) }
    case 'flush':
      return { kind: e.kind, at, until: until(e.minutes * 60), recovery: e.recovery }
    case 'nanGap':
      return { kind: e.kind, at, until: until(e.minutes * 60), tags: e.tags }
    default: {
      const { kind, atHours: _, ...figures } = e
      return { kind, at, ...figures }
    }
  }
}

const noDirt = (rows: number): TrueDirty => ({
  nanCells: {},
  missingRows: 0,
  duplicateRows: 0,
  outOfOrderRows: 0,
  brokenRows: 0,
  notes: [],
  kinds: [],
  rows,
})

/**
 * What really happens in a scenario on a skid. limitAt and limitAtHeld come from the same plant stepped without noise (5 s grid, to the second);
 * where the growth never meets the limit within three times its hoursToLimit, limitAt is that time and limitReached false.
 * `dirty`: what the writer of the file counted. Errors: SIM_OPTION.
 */
export function truthOf(skid: Skid, scenario: Scenario, dirty: TrueDirty = noDirt(rowsOf(scenario))): Truth {
  checkScenario(skid, scenario)
  const { plant, process, fouling } = trueCourse(skid, scenario)
  const endMs = endOf(scenario)
  const production = process.schedule.filter((s) => s.phase === 'production')
  const free = inControl(
    process.schedule,
    process.growths.filter((g) => g.cause === 'fouling').map((g) => ({ fromMs: g.onsetMs, toMs: g.endMs })),
  )
  const exotherms = process.exotherms.map((x): TrueExotherm => {
    const tags = plant.segments[x.segment]!.spec.temperatures
    const place = (i: number) => (i + 0.5) / tags.length
    const nearest = tags.reduce((best, _, i) => (Math.abs(place(i) - x.hotSpot) < Math.abs(place(best) - x.hotSpot) ? i : best), 0)
    return {
      segment: plant.segments[x.segment]!.spec.id,
      kind: x.kind,
      start: iso(x.startMs),
      peakAt: iso(x.peakMs),
      end: iso(Math.min(x.endMs, endMs)),
      amplitudeC: rounded(excessAt([x], x.segment, place(nearest), x.peakMs)),
      riseS: rounded(x.riseS),
      hottest: tags[nearest]!,
    }
  })
  const confounders = [...scenario.events].sort((a, b) => a.atHours - b.atHours).flatMap((e) => confounderOf(scenario, e) ?? [])
  if (scenario.startupMinutes > 0)
    confounders.unshift({ kind: 'startup', at: iso(scenario.fromMs), minutes: scenario.startupMinutes })
  const samples = Math.floor((endMs - scenario.fromMs) / (1000 * EVERY_S)) + 1
  return {
    case: scenario.name,
    category: scenario.category,
    skid: skid.skid,
    logSeconds: `${scenario.logSeconds}s`,
    from: iso(scenario.fromMs),
    to: iso(endMs),
    phases: process.schedule.map((s) => ({ phase: s.phase, from: iso(s.fromMs), to: iso(s.toMs) })),
    productionHours: hoursOf(production),
    inControlHours: hoursOf(free),
    inControl: free.map((f) => ({ from: iso(f.fromMs), to: iso(f.toMs) })),
    fouling,
    exotherms,
    feedErrors: process.exotherms
      .filter((x) => x.feed >= 0)
      .map((x) => ({
        stream: plant.streams[x.feed]!.spec.id,
        start: iso(x.startMs),
        end: iso(Math.min(x.feedEndMs, endMs)),
        factor: x.factor,
      })),
    sensorFaults: faultsOf(scenario, null).map((f) => ({
      tag: f.tag,
      kind: f.fault,
      start: iso(f.fromMs),
      end: iso(Math.min(f.toMs, endMs)),
      size: isHard(f.fault) && f.fault !== 'spikes' ? null : f.size,
      overS: f.fault === 'zeroDrift' ? f.overS : null,
      hard: isHard(f.fault),
    })),
    confounders,
    dirty,
    ratio: {
      everySeconds: EVERY_S,
      start: iso(scenario.fromMs),
      segments: Object.fromEntries(
        plant.segments.map((s, n) => [
          s.spec.id,
          Array.from({ length: samples }, (_, i) => rounded(process.ratioOf(n, scenario.fromMs + i * EVERY_S * 1000))),
        ]),
      ),
    },
  }
}
