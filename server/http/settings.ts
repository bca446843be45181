import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import { Type } from 'typebox'
import { MonitorError } from '../core/errors.ts'
import { isSteps } from '../monitor/step-log.ts'
import { comparison, settingsPage } from '../settings/page.ts'
import { createVersions } from '../settings/versions.ts'
import { signedIn } from './access.ts'
import { actReplySchema, replies } from './schemas.ts'
import type { Services } from './services.ts'
import { settingsBodySchema, settingsComparisonSchema, settingsPageSchema } from './settings-schemas.ts'

const params = Type.Object({ skid: Type.String({ minLength: 1, maxLength: 64 }) })
const number = Type.Integer({ minimum: 1 })
const config = { needs: 'read' } as const

/** Settings of a skid: their versions, two of them compared, a change. */
export const settingsRoutes: FastifyPluginAsyncTypebox<Services> = async (app, s) => {
  const versions = createVersions(s.store, s.skidOf)
  const liveOf = (skid: string) => s.monitor.lives().find((l) => l.skid.skid === skid) ?? null

  app.get(
    '/skids/:skid/settings',
    {
      config,
      schema: {
        summary: 'what may change within a run as it stands, and all versions',
        params,
        response: replies(settingsPageSchema),
      },
    },
    async ({ params: { skid } }) => {
      const live = liveOf(skid)
      const run = s.store.runs.list().findLast((r) => r.skidId === skid && !isSteps(r.source))
      if (run === undefined)
        throw new MonitorError('SETTINGS_UNKNOWN', `there is no skid '${skid}'`, { hint: 'it appears with its first run' })
      const { skidText, skidFile } = s.store.runs.get(run.id)
      const known = live?.skid ?? s.skidOf(skidText, skidFile)
      return settingsPage(versions, skid, live === null ? null : s.monitor.engine(live.run), known)
    },
  )

  app.get(
    '/skids/:skid/settings/compare',
    {
      config,
      schema: {
        summary: 'what must change in one version of the settings to give another',
        params,
        querystring: Type.Object({ from: number, to: number }, { additionalProperties: false }),
        response: replies(settingsComparisonSchema),
      },
    },
    async ({ params: { skid }, query: { from, to } }) => comparison(versions, skid, from, to),
  )

  app.post(
    '/skids/:skid/settings',
    {
      config: { needs: 'engineer' },
      schema: {
        summary: 'a change of settings with its reason, at once or from a later time of the live run on; it makes a version',
        params,
        body: settingsBodySchema,
        response: replies(actReplySchema),
      },
    },
    async ({ params: { skid }, body, person }) => {
      const live = liveOf(skid)
      if (live === null)
        throw new MonitorError('RUN_ENDED', `no run of skid '${skid}' is live`, {
          hint: 'settings change on a live run, or with the skid file',
        })
      return s.monitor.act(live.run, { kind: 'settings', ...body, person: signedIn(person).name })
    },
  )
}
