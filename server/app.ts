import { resolve } from 'node:path'
import helmet from '@fastify/helmet'
import fastifyStatic from '@fastify/static'
import swagger from '@fastify/swagger'
import type { TypeBoxTypeProvider } from '@fastify/type-provider-typebox'
import { Ajv } from 'ajv'
import Fastify from 'fastify'
import { problemReplies } from './http/error-reply.ts'
import { exportRoutes } from './http/exports.ts'
import { createGuard, guardRequests } from './http/guard.ts'
import { performanceRoutes } from './http/performance.ts'
import { runRoutes } from './http/runs.ts'
import { serviceRoutes } from './http/service.ts'
import type { Services } from './http/services.ts'
import { uploadRoutes } from './http/uploads.ts'
import { createHub, type HubSource } from './live/hub.ts'
import { missedSince } from './monitor/trends.ts'
import type { Publisher } from './monitor.ts'

export interface AppOptions extends Services {
  /** Folder of the built pages; null serves the API alone. */
  readonly webRoot: string | null
  /** Names beside the loopback ones that requests may come under. */
  readonly hosts: readonly string[]
  readonly log: (line: string) => void
  readonly heartbeatMs?: number
}

const bodyLimit = 2 ** 21

/** The server, not yet listening, and where the monitor publishes to. */
export async function buildApp(o: AppOptions) {
  const app = Fastify({
    bodyLimit,
    requestTimeout: 120_000,
    connectionTimeout: 0,
    routerOptions: { maxParamLength: 200 },
    return503OnClosing: true,
  }).withTypeProvider<TypeBoxTypeProvider>()
  const guard = createGuard(o.hosts)

  // Bodies are taken as they are; a query is text, so its numbers are read from it.
  const base = { allErrors: false, useDefaults: true, discriminator: true, strict: false } as const
  const strict = new Ajv(base)
  const loose = new Ajv({ ...base, coerceTypes: 'array' })
  app.setValidatorCompiler(({ schema, httpPart }) => (httpPart === 'body' ? strict : loose).compile(schema as object))
  // Replies are plain JSON of ours; their schemas describe them and are held to them by tests.
  app.setSerializerCompiler(() => (data) => JSON.stringify(data))

  problemReplies(app, o.log)
  guardRequests(app, guard)
  await app.register(helmet, {
    contentSecurityPolicy: {
      directives: {
        defaultSrc: ["'self'"], scriptSrc: ["'self'"], styleSrc: ["'self'"], connectSrc: ["'self'"], imgSrc: ["'self'", 'data:'], fontSrc: ["'self'"],
        objectSrc: ["'none'"], baseUri: ["'none'"], formAction: ["'self'"], frameAncestors: ["'none'"], upgradeInsecureRequests: null,
      },
    },
    strictTransportSecurity: false,
    referrerPolicy: { policy: 'no-referrer' },
  }) // biome-ignore format: a list
  await app.register(swagger, {
    openapi: {
      openapi: '3.1.0',
      info: {
        title: 'Clearbore',
        version: o.toolVersion,
        description:
          'Runs of continuous-flow skids, live and stored. Advisory only; no call moves anything on a skid. Live news come over the websocket at /ws.',
      },
    },
  })

  const api: Services = o
  await app.register(
    async (scope) => {
      scope.addHook('onSend', async (_request, reply) => {
        if (!reply.hasHeader('cache-control')) reply.header('cache-control', 'no-store')
      })
      await scope.register(serviceRoutes, api)
      await scope.register(runRoutes, api)
      await scope.register(exportRoutes, api)
      await scope.register(performanceRoutes, api)
      await scope.register(uploadRoutes, api)
      scope.get('/openapi.json', { schema: { hide: true } }, async () => app.swagger())
    },
    { prefix: '/api' },
  )
  if (o.webRoot !== null) await app.register(fastifyStatic, { root: resolve(o.webRoot), cacheControl: true, maxAge: 0, etag: true })

  const source: HubSource = {
    runs: () => o.catalogue.rows(),
    beats: () =>
      o.monitor.lives().map(({ run, source }) => {
        const last = o.monitor.engine(run)?.pipeline.view().grid.lastRowMs ?? -1
        return { run, clock: source.clock(), lastRowMs: last < 0 ? null : last }
      }),
    state: (run) => (o.monitor.engine(run) === null ? null : o.monitor.state(run)),
    missed: (run, sinceMs) => {
      const parts = o.catalogue.parts(run)
      return missedSince(parts, sinceMs, (o.store.sequence.span(parts.run)?.toMs ?? sinceMs) + 1)
    },
  }
  const hub = createHub({
    source,
    version: o.toolVersion,
    wallMs: o.wallMs,
    admits: (host, origin) => guard.fault(host, origin) === null,
    ...(o.heartbeatMs === undefined ? {} : { heartbeatMs: o.heartbeatMs }),
  })
  hub.attach(app.server)
  app.addHook('preClose', async () => hub.close())

  const publisher: Publisher = {
    news: (run, state, { steps, readings, alarms, acts }) => hub.news(run, { state, steps, readings, alarms, acts }),
    runs: () => hub.runs(),
  }
  return { app, hub, publisher }
}
