import type { Phase } from '../reading.ts'
import { endOf, eventsOf, type Scenario, timeOf } from './scenario.ts'

export interface Span {
  readonly phase: Phase
  readonly fromMs: number
  readonly toMs: number
}

const minutes = (n: number): number => Math.round(n * 60) * 1000

/** The phases of a run in order, without gaps: hold and start-up, production, flushes each with a start-up, shutdown. */
export function scheduleOf(scenario: Scenario): readonly Span[] {
  const spans: Span[] = []
  const endMs = endOf(scenario)
  let t = scenario.fromMs
  const add = (phase: Phase, until: number) => {
    const toMs = Math.min(until, endMs)
    if (toMs > t) spans.push({ phase, fromMs: t, toMs })
    t = Math.max(t, toMs)
  }
  if (scenario.startupMinutes > 0) {
    add('hold', t + minutes(Math.min(2, scenario.startupMinutes / 4)))
    add('startup', scenario.fromMs + minutes(scenario.startupMinutes))
  }
  for (const flush of eventsOf(scenario, 'flush')) {
    add('production', timeOf(scenario, flush))
    add('flush', timeOf(scenario, flush) + minutes(flush.minutes))
    add('startup', timeOf(scenario, flush) + minutes(flush.minutes + flush.startupMinutes))
  }
  add('production', endMs - minutes(scenario.shutdownMinutes))
  add('shutdown', endMs)
  return spans
}

/** The span at an instant; after the end of the run its last phase goes on (a simulator may run for ever). */
export function spanAt(schedule: readonly Span[], tMs: number): Span {
  for (let i = schedule.length - 1; i > 0; i--) if (tMs >= schedule[i]!.fromMs) return schedule[i]!
  return schedule[0]!
}

/** Share of the nominal flow that the pumps are asked for in a phase; start-up ramps over its first third. */
export function flowShare(span: Span, tMs: number): number {
  const done = (tMs - span.fromMs) / (span.toMs - span.fromMs)
  if (span.phase === 'production') return 1
  if (span.phase === 'startup') return Math.min(1, 0.3 + 2.1 * done)
  if (span.phase === 'flush') return 0.5
  return span.phase === 'hold' ? 0 : Math.max(0, 1 - 1.5 * done)
}

/** How much warmer the coolant is than in production, K: a flush is done warm, a start-up begins a little warm. */
export function coolantShiftK(span: Span, tMs: number): number {
  if (span.phase === 'flush') return 25
  return span.phase === 'startup' ? 2 * Math.exp(-(tMs - span.fromMs) / 180_000) : 0
}
