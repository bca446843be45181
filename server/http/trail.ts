import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import { Type } from 'typebox'
import { type LimitName, limitNames } from '../core/sequence.ts'
import type { Skid } from '../core/skid.ts'
import { enterReview, type TrailFilter, type TrailOf, trailPage } from '../trail/review.ts'
import type { TrailGroup } from '../wire/trail.ts'
import { signedIn } from './access.ts'
import { replies } from './schemas.ts'
import type { Services } from './services.ts'
import { trailReviewSchema, trailSchema } from './trail-schemas.ts'

const time = Type.Optional(Type.Number({ minimum: -8.64e15, maximum: 8.64e15 }))
const querystring = Type.Object(
  {
    from: Type.Optional(Type.Integer({ minimum: 0, default: 0 })),
    limit: Type.Optional(Type.Integer({ minimum: 1, maximum: 500, default: 100 })),
    person: Type.Optional(Type.String({ maxLength: 200 })),
    groups: Type.Optional(Type.String({ maxLength: 200 })),
    fromMs: time,
    toMs: time,
    onlyNew: Type.Optional(Type.Boolean({ default: false })),
  },
  { additionalProperties: false },
)
interface Query {
  readonly from?: number
  readonly limit?: number
  readonly person?: string
  readonly groups?: string
  readonly fromMs?: number
  readonly toMs?: number
  readonly onlyNew?: boolean
}

const filterOf = (q: Query): TrailFilter => ({
  from: q.from ?? 0,
  most: q.limit ?? 100,
  person: q.person ?? null,
  groups: q.groups === undefined || q.groups === '' ? null : (q.groups.split(',') as TrailGroup[]),
  fromMs: q.fromMs ?? null,
  toMs: q.toMs ?? null,
  onlyNew: q.onlyNew ?? false,
})

const trailOf = (run: number, skid: Skid): TrailOf => ({
  run,
  scope: `skid:${skid.skid}`,
  limit: (segment, name) =>
    (limitNames as readonly string[]).includes(name)
      ? skid.segments.find((g) => g.id === segment)?.limits[name as LimitName]
      : undefined,
})

/** The audit trail, of a run and of the site, and its review. */
export const trailRoutes: FastifyPluginAsyncTypebox<Services> = async (app, s) => {
  app.get(
    '/runs/:run/trail',
    {
      config: { needs: 'read' },
      schema: {
        summary:
          'who did what on a run: acts, changes with old and new, shelving, refused requests, sign-ins while it went on; oldest first',
        params: Type.Object({ run: Type.Integer({ minimum: 1 }) }),
        querystring,
        response: replies(trailSchema),
      },
    },
    async ({ params: { run }, query }) => {
      const { skid } = s.catalogue.parts(run)
      return trailPage(s.store, trailOf(run, skid), filterOf(query))
    },
  )

  app.get(
    '/trail',
    {
      config: { needs: 'read' },
      schema: {
        summary: 'who did what beside runs: people, settings, deletions, keys; oldest first',
        querystring,
        response: replies(trailSchema),
      },
    },
    async ({ query }) => trailPage(s.store, null, filterOf(query)),
  )

  app.post(
    '/trail/reviews',
    {
      config: { needs: 'review' },
      schema: {
        summary: 'the trail of a run, or of the site, was reviewed up to these counts of records; itself a record',
        body: trailReviewSchema,
        response: replies(trailSchema),
      },
    },
    async ({ body, person }) => {
      if (body.run !== null) s.catalogue.summary(body.run)
      enterReview(s.store, body, signedIn(person).name, s.wallMs())
      const filter = filterOf({})
      if (body.run === null) return trailPage(s.store, null, filter)
      const { skid } = s.catalogue.parts(body.run)
      return trailPage(s.store, trailOf(body.run, skid), filter)
    },
  )
}
