import type { FlushPlan, FlushStep } from '../report.ts'

/** A stored check of one criterion. A later one for the same criterion replaces the earlier; all of them stay in the record. */
export interface Acceptance {
  readonly step: string
  /** Criterion id of the plan's step. */
  readonly criterion: string
  readonly verdict: 'met' | 'failed' | 'skipped'
  /** What was read or seen; null is missing, and missing is not accepted. */
  readonly value: number | string | null
  readonly source: string
  readonly quality: 'good' | 'uncertain' | 'bad'
  readonly person: string
  readonly tMs: number
  /** Needed for failed and skipped. */
  readonly reason: string | null
}

/** Criterion that still stands in the way of a step. */
export interface OpenPoint {
  readonly step: string
  readonly criterion: string
  readonly text: string
  readonly why: string
}

export interface NextStep {
  /** The step advised next; null when all are accepted, or when a step is refused. */
  readonly step: FlushStep | null
  readonly done: boolean
  /** Steps not advised, each with its reason. F3 is always here until F1 and F2 are accepted. */
  readonly refused: readonly { readonly step: string; readonly reason: string }[]
  /** What stands open in the step advised. */
  readonly waitingFor: readonly OpenPoint[]
  /** Failed and skipped checks that stay visible in the report. */
  readonly exceptions: readonly Acceptance[]
}

/** Steps whose criteria cannot be skipped with a reason: water waits for F1 and F2, cold waits for F4. */
export const hardSteps: ReadonlySet<string> = new Set(['F1', 'F2', 'F4'])
/** A reason of useful length. */
export const reasonLength = 5

const usable = (a: Acceptance): boolean => a.person.trim() !== '' && a.source.trim() !== '' && Number.isFinite(a.tMs)

/** Why a criterion does not count as accepted, or null if it does. The latest record in time decides; of equal times, the later in the list. */
function open(step: string, criterion: string, accepted: readonly Acceptance[]): string | null {
  let latest: Acceptance | null = null
  for (const a of accepted) if (a.step === step && a.criterion === criterion && (latest === null || a.tMs >= latest.tMs)) latest = a
  if (latest === null) return 'no result'
  if (!usable(latest)) return 'record without person, source or time'
  if (latest.verdict === 'failed') return `failed: ${latest.reason ?? 'no reason given'}`
  if (latest.verdict === 'skipped') {
    if (hardSteps.has(step)) return 'cannot be skipped'
    return (latest.reason ?? '').trim().length >= reasonLength ? null : 'skipped without a reason'
  }
  if (latest.value === null) return 'value missing'
  return latest.quality === 'good' ? null : `value of ${latest.quality} quality`
}

/** What still stands in the way of counting a step as accepted; empty when it is. A step without criteria never is. */
export function openPoints(step: FlushStep, accepted: readonly Acceptance[]): OpenPoint[] {
  if (step.criteria.length === 0) return [{ step: step.id, criterion: '', text: step.title, why: 'no criterion to accept' }]
  return step.criteria.flatMap((c) => {
    const why = open(step.id, c.id, accepted)
    return why === null ? [] : [{ step: step.id, criterion: c.id, text: c.text, why }]
  })
}

/**
 * The step that may be advised next: the first of the plan that is not accepted. Order is strict, and nothing after it is ever shown as next; water
 * (F3) is refused with the open points named until every criterion of F1 and F2 is met, good and recorded by a person, which no reason can
 * stand in for. A step that the plan itself refuses is not advised. A criterion that fails later takes the advice back to its step.
 * Pure: the same plan and record give the same answer; plan and record are plain JSON.
 */
export function nextStep(plan: FlushPlan, accepted: readonly Acceptance[]): NextStep {
  const openBy = plan.steps.map((step) => ({ step, points: openPoints(step, accepted) }))
  const index = openBy.findIndex((o) => o.points.length > 0)
  const at = openBy[index] ?? null
  const refused: { step: string; reason: string }[] = []
  const before = openBy.filter((o) => hardSteps.has(o.step.id) && o.step.id !== 'F4' && o.points.length > 0)
  const hasBoth = ['F1', 'F2'].every((id) => plan.steps.some((s) => s.id === id))
  if (!hasBoth) refused.push({ step: 'F3', reason: 'the plan has no displacement or no warm-up: no water' })
  else if (before.length > 0) {
    refused.push({
      step: 'F3',
      reason: `water waits for ${before.map((o) => `${o.step.id} (${o.points.map((p) => `${p.criterion}: ${p.why}`).join('; ')})`).join(' and ')}`,
    })
  }
  const own = at === null ? null : (plan.refused.find((r) => r.step === at.step.id) ?? null)
  if (own !== null) refused.push(own)
  const blocked = at !== null && refused.some((r) => r.step === at.step.id)
  return {
    step: at === null || blocked ? null : at.step,
    done: at === null,
    refused,
    waitingFor: at === null ? [] : at.points,
    exceptions: accepted.filter((a) => a.verdict !== 'met' || a.value === null || a.quality !== 'good'),
  }
}
