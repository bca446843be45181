import type { Course, CourseStep, Point } from '../../server/wire/index.ts'
import { duration, fixed } from './format.ts'

/** Short names of the steps, for gates and answers. */
export const stepWords: Readonly<Record<string, string>> = {
  F0: 'prepare',
  F1: 'displace',
  F2: 'warm up',
  F3: 'water',
  F4: 'dry',
  F5: 'cool again',
  F6: 'restart',
}
export const nameOf = (step: string): string => `${step} ${stepWords[step] ?? ''}`.trim()

export const pointStates: Readonly<Record<Point['state'], string>> = {
  met: 'met',
  'not-yet': 'not yet',
  unknown: 'not known',
  failed: 'failed',
  skipped: 'skipped',
}

const organolithium = 'Assume the line holds active organolithium until the effluent test says otherwise.'
const noWater = 'Do not admit water before displacement and warm-up are both confirmed.'
const cold = 'All channels above +5 °C before water; no cooling until the water test passes.'
const relief = 'Never close both ends of a cold liquid-full line; keep an open path to relief.'
const pressure = 'Do not raise pressure to clear a blockage.'
const peroxide = 'Peroxide test in date?'
const oxygen = 'Oxygen-deficient space: site entry procedure.'
const waste = 'Waste vessel: compatible, vented, not aqueous while F1 effluent is active.'

/** The standing cautions where they matter. */
export const cautionsOf: Readonly<Record<string, readonly string[]>> = {
  F0: [organolithium, pressure, oxygen, waste],
  F1: [organolithium, waste, peroxide, pressure, noWater],
  F2: [noWater, relief, cold, organolithium],
  F3: [noWater, cold, pressure],
  F4: [cold, peroxide, relief],
  F5: ['Any rise of ΔP near or below 0 °C means ice: advised is to stop cooling and to warm.', cold, relief],
  F6: [organolithium, 'A feed-ratio or hot-spot alarm: hold is advised, the outlet stays diverted.'],
}

/** Steps that the course never lets go by a reason alone. */
export const cannotSkip: ReadonlySet<string> = new Set(['F1', 'F2', 'F4'])

export const runningStep = (c: Course): CourseStep | null => c.steps.find((s) => s.state === 'running') ?? null
/** The first step that is neither accepted nor skipped and does not run. */
export const nextStep = (c: Course): CourseStep | null =>
  c.state === 'running' && runningStep(c) === null ? (c.steps.find((s) => s.state === 'open') ?? null) : null

export const counts = (s: CourseStep): Readonly<Record<Point['state'], number>> => {
  const n = { met: 0, 'not-yet': 0, unknown: 0, failed: 0, skipped: 0 }
  for (const p of s.points) n[p.state]++
  return n
}
export const isReady = (s: CourseStep): boolean => s.points.every((p) => p.state === 'met' || p.state === 'skipped')

/** How an act names a point. */
export const keyOf = (p: Point): string => (p.part === null ? p.criterion : `${p.criterion}:${p.part}`)
/** Points that a person may record now: those of people first, then readings that are not known although scans have come. */
export const recordable = (s: CourseStep): Point[] => [
  ...s.points.filter((p) => p.by === 'person' && p.state !== 'met' && p.state !== 'skipped'),
  ...s.points.filter(
    (p) =>
      p.by === 'readings' && ((p.state === 'unknown' && p.why !== noReadingYet) || (p.state === 'failed' && p.person !== null)),
  ),
]
/** As the course says it before the first scan of a step. */
const noReadingYet = 'no reading yet'

/** The refusal that stands: the last one, while the step it was about is still shut. */
export function standingRefusal(c: Course): Course['refusals'][number] | null {
  const last = c.refusals.at(-1)
  if (last === undefined || c.state !== 'running') return null
  const step = c.steps.find((s) => s.step === last.step)
  if (step === undefined) return last
  const isShut = c.steps.slice(0, c.steps.indexOf(step)).some((x) => x.state !== 'accepted' && x.state !== 'skipped')
  if (last.asked === 'started') return step.state === 'open' && isShut ? last : null
  const running = runningStep(c)
  return step.state === 'running' && running?.step === last.step && !isReady(step) ? last : null
}

/** Share of a chamber that is filled: by volume where one is planned, by time where not. */
export function filledShare(s: CourseStep, nowMs: number): number {
  if (s.state === 'accepted' || s.state === 'skipped') return 1
  if (s.startedMs === null) return 0
  const share =
    s.plannedMl !== null && s.plannedMl > 0
      ? s.passedMl / s.plannedMl
      : s.minutes !== null && s.minutes > 0
        ? (nowMs - s.startedMs) / 60_000 / s.minutes
        : 0
  return Math.max(0, Math.min(1, share))
}

/** What passed, below its chamber. */
export function amount(s: CourseStep): string {
  if (s.startedMs === null)
    return s.plannedMl !== null && s.plannedMl > 0
      ? `plan ${fixed(s.plannedMl, 0)} mL`
      : s.minutes === null
        ? ''
        : `plan ${fixed(s.minutes, 0)} min`
  const time = s.endedMs === null ? '' : duration(s.endedMs - s.startedMs)
  if (s.plannedMl === null || s.plannedMl <= 0) return time
  // Beyond the plan, and of a step that is over, only what passed: its chamber may be narrow.
  return s.endedMs === null && s.passedMl < s.plannedMl
    ? `${fixed(s.passedMl, 0)} of ${fixed(s.plannedMl, 0)} mL`
    : `${fixed(s.passedMl, 0)} mL`
}

/** A value as a point prints it. */
export function pointValue(p: Point): string {
  if (p.value === null) return p.state === 'unknown' ? 'no reading' : ''
  if (typeof p.value === 'string') return p.value
  const digits =
    p.unit === 'mL' || p.unit === 'ppm' || p.unit === '% of usual' ? 0 : p.unit === '× clean' || p.unit === 'bar' ? 2 : 1
  const sign = p.unit === '°C' && p.value > 0 ? '+' : ''
  return `${sign}${fixed(p.value, digits)}${p.unit === null ? '' : p.unit === '% of usual' ? ' % of usual' : ` ${p.unit}`}`
}

export interface WhatNow {
  /** At most some twenty characters: read from three metres. */
  readonly far: string
  readonly below: string
}

/** What is advised next, in the words of the course; never a command, never a permission. */
export function whatNow(c: Course): WhatNow {
  const call = c.calls.at(-1)
  if (c.state === 'aborted')
    return { far: 'Flush aborted', below: 'The guidance ended. What flows now flows on until it is changed at the panel.' }
  if (c.state === 'complete') {
    const lost = c.recovery.filter((r) => r.verdict === 'not-fully-restored')
    return lost.length > 0
      ? {
          far: 'Not restored',
          below: `${lost.map((r) => r.segment).join(', ')} stays above its clean baseline: recorded, not adopted. Escalation is advised.`,
        }
      : { far: 'Flush complete', below: 'Every step is on record. The next clean baseline is compared with the last one.' }
  }
  const running = runningStep(c)
  if (running?.step === 'F5' && call?.kind === 'ice') return { far: 'Ice: warm up', below: call.text }
  if (running?.step === 'F3' && call?.kind === 'not-water-soluble') return { far: 'Escalate', below: call.text }
  const refused = standingRefusal(c)
  if (refused?.step === 'F3' && refused.asked === 'started' && !(running !== null && isReady(running)))
    return { far: 'Wait, no water', below: 'F3 stays shut until F1 and F2 are both accepted' }
  if (running === null) {
    const next = nextStep(c)
    return next === null
      ? { far: 'Nothing open', below: '' }
      : {
          far: `${next.step} is next`,
          below: `${next.title} is advised next under the site procedure; record it once it has begun`,
        }
  }
  if (isReady(running)) return { far: `${running.step} is met`, below: 'Every hold point is met; a person accepts the step' }
  const n = counts(running)
  if (n.failed > 0) return { far: 'Hold', below: `${n.failed} hold point failed; hold is advised` }
  // The quench flows on until the effluent is inactive: not yet what is waited for.
  const active = running.points.some((p) => p.criterion === 'effluent-inactive' && p.state !== 'met')
  const open = running.points.filter(
    (p) => p.by === 'readings' && p.state !== 'met' && !(active && p.criterion === 'quench-isolated'),
  )
  if (open.length === 0) return { far: 'Look and record', below: 'Readings are met; what a person must see is open' }
  const first = open.find((p) => p.state === 'unknown') ?? open[0]!
  return { far: 'Wait', below: `${first.needs}: ${pointStates[first.state]}${first.why === '' ? '' : `, ${first.why}`}` }
}
