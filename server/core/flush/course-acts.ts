import type { Act } from '../sequence.ts'
import { hardSteps, reasonLength } from './course.ts'
import type { Course, CourseStep, GuideState, Point, Rule } from './course-state.ts'
import { noReadingYet, notSeenYet } from './points.ts'

export type FlushAct = Extract<Act, { readonly kind: 'flush-step' | 'flush-check' }>

const done = (s: CourseStep): boolean => s.state === 'accepted' || s.state === 'skipped'
const stepOf = (c: Course, id: string): CourseStep | undefined => c.steps.find((s) => s.step === id)
const isUseful = (reason: string): boolean => reason.trim().length >= reasonLength

/** What stands open in a step, one sentence a point. */
const openIn = (s: CourseStep): string[] =>
  s.points
    .filter((p) => p.state !== 'met' && p.state !== 'skipped')
    .map(
      (p) =>
        `${p.needs}: ${p.state === 'unknown' ? 'not known' : p.state === 'failed' ? 'failed' : 'not yet'}${p.why === '' ? '' : ` (${p.why})`}`,
    )

/** Why a step may not begin now; empty when it may. Water waits for F1 and F2, both accepted and not skipped. */
function againstStart(s: GuideState, id: string): string[] {
  const c = s.course
  if (c === null || c.state !== 'running') return id === 'F0' ? [] : ['no flush is open; it begins with F0']
  const step = stepOf(c, id)
  if (step === undefined) return [`the plan has no step ${id}`]
  if (step.state === 'running') return [`${id} is running already`]
  if (done(step)) return [`${id} is ${step.state} already`]
  const reasons: string[] = []
  if (id === 'F3')
    for (const before of ['F1', 'F2']) {
      const b = stepOf(c, before)
      if (b === undefined) reasons.push(`the plan has no ${before}: no water`)
      else if (b.state !== 'accepted')
        reasons.push(
          `no water before ${before} is accepted`,
          ...(b.state === 'running' ? openIn(b).map((t) => `${before} ${t}`) : []),
        )
    }
  for (const earlier of c.steps.slice(0, c.steps.indexOf(step)))
    if (!done(earlier) && !(id === 'F3' && hardSteps.has(earlier.step)))
      reasons.push(`${earlier.step} is ${earlier.state === 'running' ? 'running and not accepted' : 'not accepted'}`)
  const refused = s.plan?.refused.find((r) => r.step === id)
  if (refused !== undefined) reasons.push(refused.reason)
  return reasons
}

/** The point that a check names, as `criterion` or `criterion:part`. */
function pointNamed(step: CourseStep, name: string): number {
  return step.points.findIndex((p) => (p.part === null ? p.criterion : `${p.criterion}:${p.part}`) === name)
}

function againstCheck(s: GuideState, act: Extract<FlushAct, { kind: 'flush-check' }>): string[] {
  const c = s.course
  const step = c === null || c.state !== 'running' ? undefined : stepOf(c, act.step)
  if (c === null || step === undefined) return ['no flush with this step is open']
  const i = pointNamed(step, act.criterion)
  const point = step.points[i]
  if (point === undefined) return [`${act.step} has no point '${act.criterion}'`]
  if (act.verdict === 'failed')
    return isUseful(act.reason) ? [] : [`a failed check needs a reason of at least ${reasonLength} characters`]
  if (step.state !== 'running') return [`${act.step} is ${step.state === 'open' ? 'not begun' : step.state}`]
  if (act.verdict === 'skipped') {
    if (hardSteps.has(act.step)) return [`no point of ${act.step} can be skipped`]
    return isUseful(act.reason) ? [] : [`a skip needs a reason of at least ${reasonLength} characters`]
  }
  if (act.source.trim() === '') return ['say where it was read or seen']
  if (act.value === null || act.value === '') return ['a value or what was seen is missing']
  if (point.by === 'readings') {
    if (point.why === noReadingYet) return ['no scan of this step has come yet']
    // What a person called failed, a person takes back; readings decide from then on.
    if (point.state !== 'unknown' && !(point.state === 'failed' && point.person !== null))
      return ['good readings decide this point; a hand reading counts only while they are missing']
    return isUseful(act.reason) ? [] : [`a hand reading needs a reason of at least ${reasonLength} characters`]
  }
  const rule = s.rules[c.steps.indexOf(step)]?.[i] ?? null
  if (rule?.kind === 'at-most') {
    if (typeof act.value !== 'number' || !Number.isFinite(act.value) || act.value < 0) return ['the result must be a number']
    const volume = step.points.find((p) => p.criterion === 'volume')
    if (volume !== undefined && volume.state !== 'met') return ['a result counts once the volume has passed']
    const first = step.points.findIndex((_, k) => s.rules[c.steps.indexOf(step)]?.[k]?.kind === 'at-most')
    if (i > first && step.points[first]!.state !== 'met' && act.value <= rule.limit)
      return ['two consecutive results: the first comes first']
  }
  return []
}

/** Why the course does not take an act, as things stand; empty when it does. Nothing is changed. An abort is never refused while a flush is open. */
export function against(s: GuideState, act: FlushAct): string[] {
  if (act.kind === 'flush-check') return againstCheck(s, act)
  const c = s.course
  const open = c !== null && c.state === 'running'
  if (act.state === 'started') return againstStart(s, act.step)
  if (act.state === 'refused' || act.state === 'ended') return []
  if (!open) return ['no flush is open']
  if (act.state === 'aborted') return []
  const step = stepOf(c, act.step)
  if (step === undefined) return [`the plan has no step ${act.step}`]
  if (act.state === 'accepted') return step.state === 'running' ? openIn(step) : [`${act.step} is not running`]
  if (hardSteps.has(act.step)) return [`${act.step} cannot be skipped`]
  if (done(step)) return [`${act.step} is ${step.state} already`]
  if (c.steps.slice(0, c.steps.indexOf(step)).some((e) => !done(e))) return [`an earlier step than ${act.step} is open`]
  return isUseful(act.reason) ? [] : [`a skip needs a reason of at least ${reasonLength} characters`]
}

/** Puts a check into its point. A failed one of an accepted step takes the course back to that step. */
export function record(c: Course, rules: readonly (readonly Rule[])[], act: Extract<FlushAct, { kind: 'flush-check' }>): void {
  const index = c.steps.findIndex((s) => s.step === act.step)
  const step = c.steps[index]!
  const at = pointNamed(step, act.criterion)
  const rule = rules[index]?.[at] ?? null
  const over = rule?.kind === 'at-most' && typeof act.value === 'number' && act.value > rule.limit
  const verdict = over ? 'failed' : act.verdict
  const put = (p: Point): void => {
    p.state = verdict
    p.value = act.value
    p.source = act.source
    p.person = act.person
    p.tMs = act.tMs
    p.reason = act.reason === '' ? null : act.reason
    p.sinceMs = null
    p.why =
      over && rule?.kind === 'at-most'
        ? `above ${rule.limit} ppm`
        : verdict === 'met'
          ? p.by === 'readings'
            ? 'hand reading'
            : 'recorded'
          : (p.reason ?? verdict)
  }
  const lifted = step.points[at]!.by === 'readings' && step.points[at]!.state === 'failed' && verdict === 'met'
  put(step.points[at]!)
  if (lifted) Object.assign(step.points[at]!, { state: 'unknown', value: null, person: null, tMs: null, why: 'to be read again' })
  if (verdict !== 'met' || step.points[at]!.by === 'readings') {
    const what = lifted ? 'no longer failed' : verdict === 'met' ? 'hand reading' : verdict
    c.exceptions.push({
      tMs: act.tMs,
      person: act.person,
      step: act.step,
      text: `${act.criterion}: ${what}, ${String(act.value ?? 'no value')}${act.reason === '' ? '' : `, ${act.reason}`}`,
    })
  }
  // Two consecutive results: one above the limit takes those before it away.
  if (over)
    step.points.forEach((p, k) => {
      if (k !== at && rules[index]?.[k]?.kind === 'at-most' && p.state === 'met') {
        p.state = 'not-yet'
        p.why = 'a later result was above the limit'
      }
    })
  if (verdict === 'failed' && step.state !== 'running' && step.state !== 'open') takeBack(c, index, act)
}

/** A check of an accepted step failed later: that step runs again and what came after is open. */
function takeBack(c: Course, index: number, act: FlushAct): void {
  c.exceptions.push({ tMs: act.tMs, person: act.person, step: act.step, text: `taken back to ${act.step}` })
  c.steps.forEach((s, k) => {
    if (k < index) return
    s.state = k === index ? 'running' : 'open'
    s.endedMs = null
    s.endedBy = null
    if (k > index) {
      s.startedMs = null
      s.startedBy = null
      s.passedMl = 0
      s.withoutFlowS = 0
      for (const p of s.points) {
        p.state = p.by === 'person' ? 'not-yet' : 'unknown'
        p.value = null
        p.from = null
        p.sinceMs = null
        p.person = null
        p.tMs = null
        p.why = p.by === 'person' ? notSeenYet : noReadingYet
      }
    }
  })
}
