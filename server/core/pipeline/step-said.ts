import type { Signal } from '../alarms/occurrence.ts'
import type { SegmentNow } from '../fouling/watch-state.ts'
import { barFromPa, cFromK, mlMinFromM3s } from '../units.ts'
import type { PipelineEvent } from './events.ts'

/** A detector step, for trends. */
export const stepSaid = (now: readonly SegmentNow[], tMs: number, production: boolean, inferred: boolean): PipelineEvent => ({
  kind: 'step',
  tMs,
  production,
  inferred,
  segments: now.map(({ ratio, step }) => ({
    ratio,
    dpBar: step.dpPa === null ? null : barFromPa(step.dpPa),
    flowMlMin: step.volFlowM3S === null ? null : mlMinFromM3s(step.volFlowM3S),
    tempC: step.tempK === null ? null : cFromK(step.tempK),
  })),
})

/** The condition of an alarm that has no value of its own is over. */
export const overSignal = (key: string, tMs: number): Signal => ({
  key,
  tMs,
  over: false,
  kind: 'fouling',
  segment: null,
  tag: null,
  priority: 'low',
  value: null,
  limit: null,
  unit: null,
  message: '',
  cause: null,
  onset: null,
  detector: '',
  evidence: { for: [], against: [], notExcluded: [] },
  onDelayS: 0,
  offDelayS: 0,
})
