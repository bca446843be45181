import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import { Type } from 'typebox'
import type { FlushDetail } from '../wire/flush.ts'
import { flushPlanSchema, replies } from './schemas.ts'
import type { Services } from './services.ts'

const detail = Type.Object({
  course: Type.Union([Type.Object({ flush: Type.Number(), state: Type.String() }), Type.Null()]),
  plan: Type.Union([flushPlanSchema, Type.Null()]),
})

/** The guided flush of a live run with the plan it follows. */
export const flushRoutes: FastifyPluginAsyncTypebox<Services> = async (app, s) => {
  app.get(
    '/runs/:run/flush',
    {
      config: { needs: 'read' },
      schema: {
        summary: 'the flush under way or the last one of a live run, and its plan; advisory, under the site procedure',
        params: Type.Object({ run: Type.Integer({ minimum: 1 }) }),
        response: replies(detail),
      },
    },
    async ({ params: { run } }): Promise<FlushDetail> => {
      s.catalogue.parts(run)
      return s.monitor.engine(run)?.pipeline.view().flush ?? { course: null, plan: null }
    },
  )
}
