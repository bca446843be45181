import type { FlushReport } from '../report.ts'
import type { Course } from './course-state.ts'

const iso = (ms: number): string => new Date(ms).toISOString()
const isoOrNull = (ms: number | null): string | null => (ms === null ? null : iso(ms))

/** A flush as the report has it. */
export const flushReport = (c: Course): FlushReport => ({
  flush: c.flush,
  segments: c.segments,
  path: c.path,
  state: c.state,
  opened: iso(c.openedMs),
  openedBy: c.openedBy,
  ended: isoOrNull(c.endedMs),
  endedBy: c.endedBy,
  reason: c.reason,
  steps: c.steps.map((s) => ({
    step: s.step,
    title: s.title,
    state: s.state,
    started: isoOrNull(s.startedMs),
    startedBy: s.startedBy,
    ended: isoOrNull(s.endedMs),
    endedBy: s.endedBy,
    reason: s.reason,
    plannedMl: s.plannedMl,
    passedMl: s.passedMl,
    withoutFlowSeconds: s.withoutFlowS,
    checks: s.points.map(({ sinceMs: _since, from: _from, limit: _limit, allowed: _side, tMs, ...p }) => ({
      ...p,
      at: isoOrNull(tMs),
    })),
  })),
  refusals: c.refusals.map(({ tMs, ...r }) => ({ at: iso(tMs), ...r })),
  calls: c.calls.map(({ tMs, ...x }) => ({ at: iso(tMs), ...x })),
  recovery: c.recovery.map((r) => ({ ...r })),
  exceptions: c.exceptions.map(({ tMs, ...x }) => ({ at: iso(tMs), ...x })),
})
