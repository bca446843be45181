import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import { Type } from 'typebox'
import { MonitorError } from '../core/errors.ts'
import { comparedRun } from '../monitor/comparison.ts'
import { comparedBy } from '../wire/comparison.ts'
import { comparisonSchema, replies } from './schemas.ts'
import type { Services } from './services.ts'

const mostRuns = 6

/** A segment of several runs on one axis. */
export const comparisonRoutes: FastifyPluginAsyncTypebox<Services> = async (app, s) => {
  app.get(
    '/comparison',
    {
      config: { needs: 'read' },
      schema: {
        summary:
          'ratio and ΔP of one segment in several runs on one axis: time since feed-on, volume processed, or time since its latest baseline',
        querystring: Type.Object(
          {
            runs: Type.String({ pattern: '^[1-9]\\d{0,8}(,[1-9]\\d{0,8})*$', maxLength: 100 }),
            segment: Type.String({ maxLength: 100 }),
            by: Type.Unsafe<(typeof comparedBy)[number]>({ type: 'string', enum: [...comparedBy], default: 'feed-on' }),
            buckets: Type.Integer({ minimum: 2, maximum: 2000, default: 600 }),
          },
          { additionalProperties: false },
        ),
        response: replies(comparisonSchema),
      },
    },
    async ({ query: { runs, segment, by, buckets } }) => {
      const asked = [...new Set(runs.split(',').map(Number))]
      if (asked.length > mostRuns)
        throw new MonitorError('USAGE', `at most ${mostRuns} runs on one axis, got ${asked.length}`, { hint: 'leave some out' })
      return {
        segment,
        by,
        unit: by === 'volume' ? ('L' as const) : ('h' as const),
        runs: asked.map((run) => comparedRun(s.catalogue.parts(run), s.catalogue.summary(run), segment, by, buckets)),
      }
    },
  )
}
