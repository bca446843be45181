import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import { Type } from 'typebox'
import { MonitorError } from '../core/errors.ts'
import { planFlush } from '../core/flush/plan.ts'
import { cautions } from '../record/facts.ts'
import { flushPlanSchema, replies, serviceSchema } from './schemas.ts'
import type { Services } from './services.ts'

/** What serves the pages, and the computed flush plan of a segment. */
export const serviceRoutes: FastifyPluginAsyncTypebox<Services> = async (app, s) => {
  app.get(
    '/service',
    { config: { needs: 'public' }, schema: { summary: 'this server, its cautions and limits', response: replies(serviceSchema) } },
    async () => ({
      api: 1 as const,
      tool: { name: 'clearbore' as const, version: s.toolVersion },
      cautions: [...cautions],
      demo: s.isDemo(),
      uploadMaxBytes: s.uploadMaxBytes,
      wallMs: s.wallMs(),
    }),
  )

  app.get(
    '/runs/:run/flush-plan',
    {
      config: { needs: 'read' },
      schema: {
        summary:
          'the flush plan of a segment at a resistance ratio (of the run now by default); advisory, under the site procedure',
        params: Type.Object({ run: Type.Integer({ minimum: 1 }) }),
        querystring: Type.Object(
          { segment: Type.String({ maxLength: 100 }), ratio: Type.Optional(Type.Number({ minimum: 1, maximum: 1000 })) },
          { additionalProperties: false },
        ),
        response: replies(flushPlanSchema),
      },
    },
    async ({ params: { run }, query: { segment, ratio } }) => {
      const { skid } = s.catalogue.parts(run)
      const i = skid.segments.findIndex((g) => g.id === segment)
      if (i < 0)
        throw new MonitorError('TAG_UNKNOWN', `the skid has no segment '${segment}'`, {
          hint: `one of ${skid.segments.map((g) => g.id).join(', ')}`,
        })
      const now = ratio ?? s.monitor.engine(run)?.lastStep()?.segments[i]?.ratio ?? null
      return planFlush({ skid, segments: [segment], ratios: now === null ? {} : { [segment]: Math.max(1, now) } })
    },
  )
}
