import type { Action, AlarmKind, Priority } from '../../server/core/report.ts'
import type { AdviceState, AlarmRow, LiveState } from '../../server/wire/index.ts'

export const weight: Record<Priority, number> = { high: 3, medium: 2, low: 1 }
/** Among alarms of one priority the faster hazard comes first, and the cause before what follows from it. */
const urgency: readonly AlarmKind[] = [
  'exotherm',
  'temperature-limit',
  'dp-limit',
  'pressure-limit',
  'fouling',
  'feed-ratio',
  'flow',
  'no-data',
  'monitor',
  'sensor',
]
export const urgencyOf = (kind: AlarmKind): number => urgency.indexOf(kind)
const putAside = (a: AlarmRow): boolean => a.state === 'SHELVED' || a.state === 'SBD' || a.state === 'OOS'

/** The alarm whose mark a segment carries: the most urgent whose condition is there, else one that is gone but not acknowledged. */
export function standingOn(state: LiveState, segment: string): AlarmRow | null {
  const mine = state.alarms.filter((a) => a.segment === segment && !putAside(a) && (a.active || a.needsAck))
  return (
    mine.sort(
      (a, b) => Number(b.active) - Number(a.active) || weight[b.priority] - weight[a.priority] || b.raisedMs - a.raisedMs,
    )[0] ?? null
  )
}

/** Alarms that an action is an answer to. */
const answersTo: Readonly<Record<Action, readonly AlarmKind[]>> = {
  flush: ['fouling', 'dp-limit'],
  watch: ['fouling'],
  'stop-feed': ['exotherm', 'temperature-limit', 'dp-limit', 'fouling'],
  escalate: ['monitor', 'no-data', 'fouling', 'dp-limit', 'exotherm'],
  'change-filter': ['fouling', 'dp-limit'],
  'check-sensor': ['sensor', 'no-data'],
  'check-flow': ['feed-ratio', 'flow', 'fouling'],
  'check-outlet': ['pressure-limit', 'fouling'],
  'check-cooling': ['temperature-limit', 'exotherm'],
  'stop-cooling': ['temperature-limit', 'fouling'],
}

/**
 * The advice whose cause still stands, most urgent cause first, then latest; a later advice for the same segments takes the place of an
 * earlier one of the same cause. What was advised against a condition that is gone is no longer what now.
 */
export function adviceInForce(
  state: Pick<LiveState, 'alarms' | 'advice'>,
): { readonly advice: AdviceState; readonly cause: AlarmRow }[] {
  const rated = state.advice.flatMap((advice) => {
    const causes = state.alarms.filter(
      (a) =>
        a.active &&
        !putAside(a) &&
        answersTo[advice.action].includes(a.kind) &&
        // A feed stop answers heat, or a blockage and a high-high ΔP; not a slow deposit.
        (advice.action !== 'stop-feed' || a.priority === 'high' || a.kind === 'exotherm') &&
        (advice.segments.length === 0 || a.segment === null || advice.segments.includes(a.segment)) &&
        a.raisedMs <= advice.atMs + 1000,
    )
    const cause = causes.sort(
      (a, b) => weight[b.priority] - weight[a.priority] || Number(b.raisedMs <= advice.atMs) - Number(a.raisedMs <= advice.atMs),
    )[0]
    return cause === undefined ? [] : [{ advice, cause }]
  })
  rated.sort(
    (a, b) =>
      weight[b.cause.priority] - weight[a.cause.priority] ||
      urgencyOf(a.cause.kind) - urgencyOf(b.cause.kind) ||
      b.advice.atMs - a.advice.atMs,
  )
  return rated.filter((r, i) => !rated.slice(0, i).some((e) => e.cause.id === r.cause.id))
}
