import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import { Type } from 'typebox'
import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import { alarmMetrics } from '../core/alarms/metrics.ts'
import { performanceTable } from '../core/alarms/performance.ts'
import { MonitorError } from '../core/errors.ts'
import { alarmName, alarmStory, isOpening } from '../monitor/alarm-story.ts'
import { handOverOf } from '../monitor/hand-over.ts'
import { alarmsAt } from '../monitor/stored-state.ts'
import type { RunParts } from '../monitor/trends.ts'
import { handOverSchema, performanceSchema, storySchema } from './alarm-schemas.ts'
import { replies } from './schemas.ts'
import type { Services } from './services.ts'

const params = Type.Object({ run: Type.Integer({ minimum: 1 }) })
const time = Type.Number({ minimum: -8.64e15, maximum: 8.64e15 })
const period = Type.Object({ fromMs: Type.Optional(time), toMs: Type.Optional(time) }, { additionalProperties: false })
const reasonMin = 5

/** How the alarm system did, what led to an alarm, and the note at a change of shift. */
export const performanceRoutes: FastifyPluginAsyncTypebox<Services> = async (app, s) => {
  /** The period asked for within the run; the whole run by default. */
  function periodOf(p: RunParts, q: { fromMs?: number; toMs?: number }): [number, number] {
    const span = s.store.sequence.span(p.run)
    const clockMs = s.monitor.engine(p.run) === null ? 0 : s.monitor.state(p.run).clock.nowMs
    // The end is not part of a period: what was done a moment ago is.
    const now = Math.max(clockMs, span?.toMs ?? 0) + 1
    const [fromMs, toMs] = [q.fromMs ?? span?.fromMs ?? 0, Math.min(q.toMs ?? now, now)]
    if (toMs < fromMs)
      throw new MonitorError('USAGE', `the period ends before it begins: ${fromMs} to ${toMs}`, {
        hint: `the run goes from ${span?.fromMs ?? 0} to ${now}`,
      })
    return [fromMs, toMs]
  }

  app.get(
    '/runs/:run/alarm-performance',
    {
      config: { needs: 'read' },
      schema: {
        summary: 'every performance figure of the alarm system over a period, with its target and what it rests on',
        params,
        querystring: period,
        response: replies(performanceSchema),
      },
    },
    async ({ params: { run }, query }) => {
      const p = s.catalogue.parts(run)
      const [fromMs, toMs] = periodOf(p, query)
      const records = s.store.transitions.list(p.run).map((t) => t.more as unknown as AlarmRecord)
      const metrics = alarmMetrics(records, fromMs, toMs)
      const beginMs = s.store.sequence.span(p.run)?.fromMs ?? fromMs
      const changes = s.store.sequence
        .acts(p.run)
        .flatMap(({ act }) =>
          (act.kind === 'limit' || act.kind === 'settings') && !isOpening(act, beginMs) && act.tMs >= fromMs && act.tMs < toMs
            ? [act]
            : [],
        )
      const outside = changes.filter((a) => a.person.trim() === '' || a.reason.trim().length < reasonMin).length
      const names = Object.fromEntries(
        alarmsAt(p, Infinity)
          .all()
          .map((r) => [r.key, alarmName(r)]),
      )
      return { run, ...metrics, table: performanceTable(metrics, { all: changes.length, outside }), names }
    },
  )

  app.get(
    '/runs/:run/alarms/:alarm/before',
    {
      config: { needs: 'read' },
      schema: {
        summary: 'what led to an alarm: the first of its group, its onset, and all that happened in the 30 min before',
        params: Type.Object({ run: Type.Integer({ minimum: 1 }), alarm: Type.Integer({ minimum: 1 }) }),
        response: replies(storySchema),
      },
    },
    async ({ params: { run, alarm } }) => {
      const story = alarmStory(s.catalogue.parts(run), alarm)
      if (story === null) throw new MonitorError('ALARM_UNKNOWN', `run ${run} has no alarm ${alarm}`, { hint: 'list its alarms' })
      return story
    },
  )

  app.get(
    '/runs/:run/hand-over',
    {
      config: { needs: 'read' },
      schema: {
        summary: 'the note at a change of shift: what stands at toMs and what happened since fromMs',
        params,
        querystring: period,
        response: replies(handOverSchema),
      },
    },
    async ({ params: { run }, query }) => {
      const p = s.catalogue.parts(run)
      const [fromMs, toMs] = periodOf(p, query)
      // A simulated clock leaps ahead of its readings at each beat: that is no gap. By the wall, what has not come is one.
      const isAhead = s.monitor.engine(run) !== null && s.monitor.state(run).clock.kind === 'simulated'
      return handOverOf(p, fromMs, toMs, isAhead ? (s.store.sequence.span(p.run)?.toMs ?? toMs) : toMs)
    },
  )
}
