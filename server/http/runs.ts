import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import { Type } from 'typebox'
import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import { MonitorError } from '../core/errors.ts'
import { enterLate, isLate, lateActs } from '../monitor/after-end.ts'
import { transitionRow } from '../monitor/alarm-log.ts'
import { createEngine } from '../monitor/engine.ts'
import { skidAt } from '../monitor/skid-at.ts'
import { skidFacts } from '../monitor/skid-facts.ts'
import { alarmsAt, storedState } from '../monitor/stored-state.ts'
import { marksOf, trendsOf } from '../monitor/trends.ts'
import type { Need } from '../people/roles.ts'
import { cautions } from '../record/facts.ts'
import type { ActBody, ActSent } from '../wire/act.ts'
import { signedIn } from './access.ts'
import {
  actBodySchema,
  actReplySchema,
  actRowSchema,
  alarmRowSchema,
  liveStateSchema,
  marksSchema,
  replies,
  reportSchema,
  runDetailSchema,
  runRowSchema,
  transitionRowSchema,
  trendsSchema,
} from './schemas.ts'
import type { Services } from './services.ts'

const params = Type.Object({ run: Type.Integer({ minimum: 1 }) })
const time = Type.Number({ minimum: -8.64e15, maximum: 8.64e15 })
const config = { needs: 'read' } as const
/** Acts that change what the pipeline watches for. */
const needOf: { readonly [kind in ActSent['kind']]?: Need } = {
  limit: 'engineer',
  'out-of-service': 'engineer',
  'in-service': 'engineer',
}

/** Runs, live and stored: list, facts, state at a moment, report, trends, marks, alarms, journal, acts. */
export const runRoutes: FastifyPluginAsyncTypebox<Services> = async (app, s) => {
  app.get(
    '/runs',
    { config, schema: { summary: 'all runs, newest first', response: replies(Type.Array(runRowSchema)) } },
    async () => s.catalogue.rows(),
  )

  app.get(
    '/runs/:run',
    { config, schema: { summary: 'a run with the facts of its skid', params, response: replies(runDetailSchema) } },
    async ({ params: { run } }) => {
      const parts = s.catalogue.parts(run)
      const skid = s.monitor.engine(run)?.pipeline.skid() ?? skidAt(parts, Number.POSITIVE_INFINITY)
      return { ...s.catalogue.row(run), skidFacts: skidFacts(skid), toolVersion: s.catalogue.summary(run).toolVersion, cautions }
    },
  )

  app.get(
    '/runs/:run/state',
    {
      config,
      schema: {
        summary: 'the whole state: of a live run now, of any run as it was known at atMs (a stored run: its end by default)',
        params,
        querystring: Type.Object({ atMs: Type.Optional(time) }, { additionalProperties: false }),
        response: replies(liveStateSchema),
      },
    },
    async ({ params: { run }, query: { atMs } }) => {
      if (atMs === undefined && s.monitor.engine(run) !== null) return s.monitor.state(run)
      const parts = s.catalogue.parts(run)
      return storedState(parts, atMs ?? s.store.sequence.span(parts.run)?.toMs ?? 0)
    },
  )

  app.get(
    '/runs/:run/report',
    { config, schema: { summary: 'the report, as analyse writes it', params, response: replies(reportSchema) } },
    async ({ params: { run } }) => {
      const live = s.monitor.engine(run)
      if (live !== null) return live.report()
      const parts = s.catalogue.parts(run)
      return createEngine(parts).report()
    },
  )

  app.get(
    '/runs/:run/trends',
    {
      config,
      schema: {
        summary: 'ratios of every segment and readings of the tags asked for, as buckets with lowest, highest and mean',
        params,
        querystring: Type.Object(
          {
            fromMs: Type.Optional(time),
            toMs: Type.Optional(time),
            buckets: Type.Optional(Type.Integer({ minimum: 2, maximum: 2000, default: 600 })),
            tags: Type.Optional(Type.String({ maxLength: 4000 })),
          },
          { additionalProperties: false },
        ),
        response: replies(trendsSchema),
      },
    },
    async ({ params: { run }, query: q }) => {
      const parts = s.catalogue.parts(run)
      const span = s.store.sequence.span(parts.run)
      const fromMs = q.fromMs ?? span?.fromMs ?? 0
      const toMs = q.toMs ?? (span === null ? fromMs + 1 : span.toMs + 1)
      if (!(toMs > fromMs)) throw new MonitorError('USAGE', `fromMs must be before toMs, got ${fromMs} and ${toMs}`)
      const tags = q.tags === undefined || q.tags === '' ? [] : q.tags.split(',')
      const wrong = tags.find((t) => !parts.skid.tags.some((own) => own.tag === t))
      if (wrong !== undefined)
        throw new MonitorError('TAG_UNKNOWN', `the skid has no tag '${wrong}'`, {
          hint: `one of ${parts.skid.tags.map((t) => t.tag).join(', ')}`,
        })
      return trendsOf(parts, fromMs, toMs, q.buckets ?? 600, tags)
    },
  )

  app.get(
    '/runs/:run/marks',
    {
      config,
      schema: { summary: 'baselines, onsets, limits and their changes, forecasts, notes', params, response: replies(marksSchema) },
    },
    async ({ params: { run } }) => marksOf(s.catalogue.parts(run)),
  )

  app.get(
    '/runs/:run/alarms',
    { config, schema: { summary: 'every alarm, first raised first', params, response: replies(Type.Array(alarmRowSchema)) } },
    async ({ params: { run } }) => s.monitor.engine(run)?.alarms.all() ?? alarmsAt(s.catalogue.parts(run), Infinity).all(),
  )

  app.get(
    '/runs/:run/transitions',
    { config, schema: { summary: 'the alarm journal, oldest first', params, response: replies(Type.Array(transitionRowSchema)) } },
    async ({ params: { run } }) =>
      s.store.transitions.list(s.catalogue.parts(run).run).map((t) => transitionRow(t.more as unknown as AlarmRecord)),
  )

  app.get(
    '/runs/:run/acts',
    { config, schema: { summary: 'what people did, oldest first', params, response: replies(Type.Array(actRowSchema)) } },
    async ({ params: { run } }) => {
      const parts = s.catalogue.parts(run)
      return [...s.store.sequence.acts(parts.run), ...lateActs(s.store, run)]
    },
  )

  app.post(
    '/runs/:run/acts',
    {
      config: { needs: 'operate' },
      schema: {
        summary:
          'acknowledge, comment, shelve, change a limit …; the act is that of who is signed in, and on disk when this returns',
        params,
        body: actBodySchema,
        response: replies(actReplySchema),
      },
    },
    async ({ params: { run }, body, person }) => {
      s.access.demand(person, needOf[body.kind] ?? 'operate')
      const summary = s.catalogue.summary(run)
      const act: ActBody = { ...body, person: signedIn(person).name }
      const { skid } = s.catalogue.parts(run)
      if (summary.state === 'ended' && isLate(act))
        return { seq: null, act: enterLate(s.store, skid, run, act, s.wallMs()), transitions: [] }
      return s.monitor.act(run, act)
    },
  )
}
