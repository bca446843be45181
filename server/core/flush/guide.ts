import type { Signal } from '../alarms/occurrence.ts'
import type { Layout } from '../derive/layout.ts'
import { segmentDp } from '../derive/step.ts'
import { MonitorError } from '../errors.ts'
import type { AlarmKind } from '../report.ts'
import type { Scan } from '../scan/grid.ts'
import { against, type FlushAct, record } from './course-acts.ts'
import { type Course, type CourseStep, freshGuide, type GuideState, type Liquid } from './course-state.ts'
import { iceSignals } from './ice-alarm.ts'
import type { FlushInput } from './input.ts'
import { judgePoint, type Readings } from './judge-point.ts'
import { openCourse } from './open-course.ts'
import { planFlush } from './plan.ts'
import { type BaselinePoint, createReference, type Reference } from './reference.ts'

/** What the guide asks of the stages beside it. */
export interface GuideNeeds {
  /** The input of a plan for these segments as things stand now. */
  readonly input: (segments: readonly string[]) => FlushInput
  readonly baseline: (segment: number) => BaselinePoint | null
  /** Alarms whose condition is there. */
  readonly alarms: () => readonly { readonly kind: AlarmKind; readonly segment: string | null; readonly active: boolean }[]
}

/** What fills the path in each step, once it has pushed out what was there. */
const liquidOf: Readonly<Record<string, Liquid>> = { F1: 'displacement', F3: 'water', F4: 'drying', F5: 'drying', F6: 'feeds' }
/** Steps that begin with another liquid in the path, and how many volumes of the path end the mixing (common practice). */
const changes = new Set(['F1', 'F3', 'F4', 'F6'])
const mixedVolumes = 3
const againstControl: ReadonlySet<AlarmKind> = new Set<AlarmKind>([
  'exotherm',
  'temperature-limit',
  'feed-ratio',
  'dp-limit',
  'pressure-limit',
])
/** Feeds run in F6 once every one of them is above this share of its usual flow. */
const feedRuns = 0.4
/** Share of the rise that water must take away before a deposit counts as dissolving (common practice). */
const dissolves = 0.25
const restoredRatio = 1.1
/** Refusals kept; a change of points is told as an event at most once a minute. */
const kept = { refusals: 12, tellMs: 60_000 } as const

/**
 * The guided flush as a stage of the pipeline: acts of people and closed scans in, the course out. Each step is open, running, accepted, skipped or
 * aborted; its points are judged by each scan; nothing is moved from here. State is plain JSON, and what comes out depends on it and on what is
 * put in alone.
 */
export function createGuide(layout: Layout, needs: GuideNeeds, saved?: GuideState) {
  const s: GuideState = saved ?? freshGuide()
  const scanS = layout.skid.scanSeconds
  let reference: Reference | null = s.course === null ? null : createReference(layout, s)
  let news: Course[] = []

  const tell = (tMs: number): void => {
    if (s.course === null) return
    s.toldMs = tMs
    s.told = keyOf(s.course)
    news.push(structuredClone(s.course))
  }
  const running = (): CourseStep | null => s.course?.steps.find((x) => x.state === 'running') ?? null

  function open(act: FlushAct): string[] {
    const input = needs.input([act.segment])
    try {
      const plan = planFlush(input)
      openCourse(s, { layout, input, plan, tMs: act.tMs, person: act.person })
    } catch (error) {
      if (!(error instanceof MonitorError)) throw error
      return [`no plan can be computed: ${error.message}`]
    }
    reference = createReference(layout, s)
    for (const leg of s.legs) leg.feedFactor = reference.factorAt(leg.segment, needs.baseline(leg.segment))
    return []
  }

  function start(c: Course, act: FlushAct): void {
    const step = c.steps.find((x) => x.step === act.step)!
    step.state = 'running'
    step.startedMs = act.tMs
    step.startedBy = act.person
  }

  function end(c: Course, step: CourseStep, state: 'accepted' | 'skipped', act: FlushAct): void {
    step.state = state
    step.startedMs ??= act.tMs
    step.endedMs = act.tMs
    step.endedBy = act.person
    if (state === 'skipped') {
      step.reason = act.reason
      c.exceptions.push({ tMs: act.tMs, person: act.person, step: step.step, text: `skipped: ${act.reason}` })
    }
    if (state === 'accepted' && step.step === 'F1') reference?.calibrate()
    score(c, step)
    if (c.steps.every((x) => x.state === 'accepted' || x.state === 'skipped')) {
      c.state = 'complete'
      c.endedMs = act.tMs
      c.endedBy = act.person
      verdict(c, act.tMs)
    }
  }

  /** What is known of each flushed segment at the end of a step, against the reference of the liquid that fills it. */
  function score(c: Course, step: CourseStep): void {
    for (const r of c.recovery) {
      const segment = layout.segments.findIndex((g) => g.spec.id === r.segment)
      const now = (liquid: Liquid): number | null => reference?.ratio(segment, liquid) ?? null
      if (step.step === 'F3') r.water = now('water')
      else if (step.step === 'F5') r.solvent = now('drying')
      else if (step.step === 'F6') r.feeds = now('feeds')
    }
  }

  function verdict(c: Course, tMs: number): void {
    for (const r of c.recovery) {
      const last = r.baseline ?? r.feeds ?? r.solvent
      if (last === null) continue
      r.verdict = last <= restoredRatio ? 'restored' : 'not-fully-restored'
      if (r.verdict === 'not-fully-restored')
        call(
          c,
          tMs,
          'not-fully-restored',
          r.segment,
          `${r.segment} is not fully restored: ratio ${last.toFixed(2)} against the clean baseline before the flush`,
        )
    }
  }

  function call(c: Course, tMs: number, kind: Course['calls'][number]['kind'], segment: string, text: string): boolean {
    if (c.calls.some((x) => x.kind === kind && x.segment === segment)) return false
    c.calls.push({ tMs, kind, segment, text })
    return true
  }

  function readings(scan: Scan, endMs: number, mixed: boolean): Readings {
    const tag = (t: number): number | null => (scan.used[t]! > 0 && scan.flaw[t] === 0 ? scan.si[t]! : null)
    const g = (i: number) => layout.segments[i]!
    return {
      endMs,
      seconds: scanS,
      tag,
      dp(i) {
        const { dpTag, inTag, tapOut } = g(i)
        const of = [dpTag ?? inTag, tapOut === null ? null : layout.taps[tapOut]!.tag]
        return of.some((t) => t !== null && tag(t) === null) ? null : segmentDp(layout, i, scan)
      },
      ratio: (i, liquid) => reference?.ratio(i, liquid as Liquid) ?? null,
      flowKnown: s.meters.every((m) => tag(m.tag) !== null),
      mixed,
      alarms: (ids) =>
        needs
          .alarms()
          .filter((a) => a.active && againstControl.has(a.kind) && (a.segment === null || ids.includes(a.segment)))
          .map((a) => `${a.kind}${a.segment === null ? '' : ` ${a.segment}`}`),
      name: (t) => layout.skid.tags[t]?.tag ?? '',
    }
  }

  /** ∫Q dt over one scan, into the step whose time it is; a scan without every flow adds nothing and is counted as such. */
  function count(c: Course, scan: Scan, r: Readings): void {
    const step = c.steps.findLast((x) => x.startedMs !== null && x.startedMs <= scan.tMs)
    if (step === undefined || (step.endedMs !== null && scan.tMs >= step.endedMs && step.state !== 'running')) return
    step.withoutFlowS += scan.skipped * scanS
    const i = c.steps.indexOf(step)
    let flow = 0
    for (const m of s.meters) {
      const q = r.tag(m.tag)
      if (q === null) {
        step.withoutFlowS += scanS
        return
      }
      if (step.step === 'F6' && m.usualSi !== null && q < feedRuns * m.usualSi) return
      flow += Math.max(0, q) / m.rho[i]!
    }
    step.passedMl += flow * 1e6 * scanS
  }

  return {
    state: s,
    course: (): Course | null => s.course,
    /** Takes an act, or notes why not. True when water is admitted by it. */
    act(act: FlushAct): boolean {
      let reasons = against(s, act)
      const opens = act.kind === 'flush-step' && act.state === 'started' && act.step === 'F0'
      if (reasons.length === 0 && opens) reasons = open(act)
      const c = s.course
      if (reasons.length > 0) {
        if (c === null) return false
        const asked = act.kind === 'flush-check' ? `check ${act.criterion}` : act.state
        c.refusals.push({ tMs: act.tMs, person: act.person, step: act.step, asked, reasons })
        if (c.refusals.length > kept.refusals) c.refusals.shift()
      } else if (c === null) return false
      else if (act.kind === 'flush-check') record(c, s.rules, act)
      else if (act.state === 'started') start(c, act)
      else if (act.state === 'accepted' || act.state === 'skipped')
        end(c, c.steps.find((x) => x.step === act.step)!, act.state, act)
      else if (act.state === 'aborted') {
        const now = running()
        if (now !== null) {
          now.state = 'aborted'
          now.endedMs = act.tMs
          now.endedBy = act.person
          now.reason = act.reason === '' ? null : act.reason
        }
        c.state = 'aborted'
        c.endedMs = act.tMs
        c.endedBy = act.person
        c.reason = act.reason === '' ? null : act.reason
      } else return false
      tell(act.tMs)
      return reasons.length === 0 && act.kind === 'flush-step' && act.state === 'started' && act.step === 'F3'
    },

    scan(scan: Scan, endMs: number): void {
      const c = s.course
      if (c === null || c.state !== 'running' || reference === null) return
      const step = running()
      const mixed =
        step !== null &&
        changes.has(step.step) &&
        (s.pathMl === null || step.passedMl < Math.min(mixedVolumes * s.pathMl, step.plannedMl ?? Infinity))
      const r = readings(scan, endMs, mixed)
      count(c, scan, r)
      if (step === null || step.startedMs === null || scan.tMs < step.startedMs) return
      reference.follow(liquidOf[step.step] ?? null, mixed, r.tag, r.dp, scanS)
      const i = c.steps.indexOf(step)
      let urgent = false
      step.points.forEach((p, k) => {
        if (judgePoint(p, s.rules[i]![k]!, s.memory[i]![k]!, step, r))
          urgent =
            call(
              c,
              endMs,
              'ice',
              p.part ?? '',
              `${p.part ?? ''}: ΔP rises near or below 0 °C: ice. Advised is to stop cooling and to warm`,
            ) || urgent
      })
      if (step.step === 'F3' && step.plannedMl !== null && step.passedMl >= step.plannedMl) urgent = insoluble(c, endMs) || urgent
      if (urgent || (endMs - s.toldMs >= kept.tellMs && keyOf(c) !== s.told)) tell(endMs)
    },

    /** A segment has a clean baseline again: the last flush of it is scored against the one before, until a final one has been. */
    baselined(segment: number, at: BaselinePoint | null, provisional: boolean, tMs: number): void {
      const c = s.course
      const leg = s.legs.find((l) => l.segment === segment)
      const r = c?.recovery.find((x) => x.segment === leg?.id)
      if (
        c === null ||
        c.state !== 'complete' ||
        leg === undefined ||
        r === undefined ||
        (r.baseline !== null && !r.provisional) ||
        leg.feedFactor === null
      )
        return
      const factor = reference?.factorAt(segment, at) ?? null
      if (factor === null) return
      r.baseline = factor / leg.feedFactor
      r.provisional = provisional
      verdict(c, tMs)
      tell(tMs)
    },

    /** What the alarm of ice says anew. */
    signals: (tMs: number): Signal[] => iceSignals(s, tMs),

    /** Courses as they stood when something of them was new, since the last call. */
    drain(): readonly Course[] {
      if (news.length === 0) return nothing
      const out = news
      news = []
      return out
    },
  }

  function insoluble(c: Course, tMs: number): boolean {
    let any = false
    for (const r of c.recovery) {
      const leg = s.legs.find((l) => l.id === r.segment)
      const ratio = leg === undefined ? null : (reference?.ratio(leg.segment, 'water') ?? null)
      if (ratio === null || r.before === null || r.before <= restoredRatio) continue
      if (r.before - ratio < dissolves * (r.before - 1))
        any =
          call(
            c,
            tMs,
            'not-water-soluble',
            r.segment,
            `${r.segment}: deposit not water-soluble, escalate: ratio ${ratio.toFixed(2)} after the water, ${r.before.toFixed(2)} before (fluoride, carbonate, polymer?)`,
          ) || any
    }
    return any
  }
}

const nothing: readonly Course[] = []
const keyOf = (c: Course): string => c.steps.map((x) => x.points.map((p) => p.state[0]).join('')).join('/')
