import type { Signal } from '../alarms/occurrence.ts'
import type { Course, GuideState } from './course-state.ts'

/** Segments in which ΔP rose near or below 0 °C in the step that runs. */
const icy = (c: Course | null): string[] =>
  c === null || c.state !== 'running'
    ? []
    : c.steps
        .filter((s) => s.state === 'running')
        .flatMap((s) =>
          s.points.filter((p) => p.criterion === 'no-ice' && p.by === 'readings' && p.state === 'failed' && p.person === null),
        )
        .map((p) => p.part ?? '')

/** What the alarm of ice says since it was asked last: up where a leg has become icy, over where it is no more, or the flush has ended. */
export function iceSignals(s: GuideState, tMs: number): Signal[] {
  const now = icy(s.course)
  if (now.length === 0 && s.ice.length === 0) return none
  const changed = [
    ...now.filter((id) => !s.ice.includes(id)).map((id) => [id, true] as const),
    ...s.ice.filter((id) => !now.includes(id)).map((id) => [id, false] as const),
  ]
  s.ice = now
  return changed.map(([id, over]) => ({
    key: `fouling:${id}:ice`,
    tMs,
    over,
    kind: 'fouling',
    segment: id,
    tag: null,
    priority: 'high',
    value: null,
    limit: null,
    unit: null,
    message: `${id}: pressure drop rises near or below 0 °C while it is cooled after water: ice; advised is to stop cooling and to warm`,
    cause: 'ice',
    onset: null,
    detector: 'guided flush',
    evidence: {
      for: ['the ratio against dry solvent rose by more than 15 % over its lowest since cooling began, near or below 0 °C'],
      against: [],
      notExcluded: ['a pressure tap that drifts as it gets cold'],
    },
    onDelayS: 0,
    offDelayS: 0,
  }))
}
const none: Signal[] = []
