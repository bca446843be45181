import { resolve } from 'node:path'
import cookie from '@fastify/cookie'
import helmet from '@fastify/helmet'
import rateLimit from '@fastify/rate-limit'
import fastifyStatic from '@fastify/static'
import swagger from '@fastify/swagger'
import type { TypeBoxTypeProvider } from '@fastify/type-provider-typebox'
import { Ajv } from 'ajv'
import Fastify, { type FastifyInstance } from 'fastify'
import { MonitorError } from './core/errors.ts'
import { createAccess, guardRoutes } from './http/access.ts'
import { comparisonRoutes } from './http/comparison.ts'
import { problemReplies } from './http/error-reply.ts'
import { exportRoutes } from './http/exports.ts'
import { flushRoutes } from './http/flush.ts'
import { createGuard, guardRequests } from './http/guard.ts'
import { peopleRoutes } from './http/people.ts'
import { performanceRoutes } from './http/performance.ts'
import { runRoutes } from './http/runs.ts'
import { serviceRoutes } from './http/service.ts'
import type { Services } from './http/services.ts'
import { sessionRoutes } from './http/session.ts'
import { settingsRoutes } from './http/settings.ts'
import { trailRoutes } from './http/trail.ts'
import { uploadRoutes } from './http/uploads.ts'
import { createHub, type HubSource } from './live/hub.ts'
import { missedSince } from './monitor/trends.ts'
import type { Publisher } from './monitor.ts'
import type { People } from './people/people.ts'

export interface AppOptions extends Omit<Services, 'access'> {
  readonly people: People
  /** Folder of the built pages; null serves the API alone. */
  readonly webRoot: string | null
  /** Names beside the loopback ones that requests may come under. */
  readonly hosts: readonly string[]
  /** Whoever sits at this machine may look without signing in. */
  readonly openReading: boolean
  /** PEM texts; null speaks plain HTTP. */
  readonly tls?: { readonly cert: string; readonly key: string } | null
  /** Addresses of proxies whose word on the caller's address is taken. */
  readonly trustProxy?: readonly string[]
  /** The address that a proxy in front is known by. */
  readonly publicUrl?: string | null
  /** Requests a minute from one address outside this machine. */
  readonly mostPerMinute?: number
  readonly log: (line: string) => void
  readonly heartbeatMs?: number
}

const bodyLimit = 2 ** 21
const isThisMachine = (ip: string): boolean => ip === '::1' || /^(::ffff:)?127\./.test(ip)

/** The server, not yet listening, and where the monitor publishes to. */
export async function buildApp(o: AppOptions) {
  const { tls = null, publicUrl = null, trustProxy = [] } = o
  const isSecure = tls !== null || publicUrl?.startsWith('https:') === true
  const app = (
    Fastify({
      // The same but for the type of its server.
      ...(tls === null ? {} : ({ https: { ...tls, minVersion: 'TLSv1.2' } } as object)),
      trustProxy: trustProxy.length === 0 ? false : [...trustProxy],
      bodyLimit,
      requestTimeout: 120_000,
      connectionTimeout: 0,
      routerOptions: { maxParamLength: 200 },
      return503OnClosing: true,
    }) as FastifyInstance
  ).withTypeProvider<TypeBoxTypeProvider>()
  const guard = createGuard(o.hosts, { isTls: tls !== null, publicUrl })

  // Bodies are taken as they are; a query is text, so its numbers are read from it.
  const base = { allErrors: false, useDefaults: true, discriminator: true, strict: false } as const
  const strict = new Ajv(base)
  const loose = new Ajv({ ...base, coerceTypes: 'array' })
  app.setValidatorCompiler(({ schema, httpPart }) => (httpPart === 'body' ? strict : loose).compile(schema as object))
  // Replies are plain JSON of ours; their schemas describe them and are held to them by tests.
  app.setSerializerCompiler(() => (data) => JSON.stringify(data))

  problemReplies(app, o.log)
  guardRequests(app, guard)
  await app.register(cookie)
  const cookieName = isSecure ? '__Host-clearbore' : 'clearbore'
  const access = createAccess({
    people: o.people,
    isDemo: o.isDemo,
    openReading: o.openReading,
    cookie: cookieName,
    parseCookie: app.parseCookie,
    guard,
  })
  await app.register(rateLimit, {
    max: o.mostPerMinute ?? 1200,
    timeWindow: 60_000,
    allowList: ({ ip }) => isThisMachine(ip),
    errorResponseBuilder: (_, { ttl }) =>
      new MonitorError('TOO_MANY', 'too many requests from this address', { hint: `try again in ${Math.ceil(ttl / 1000)} s` }),
  })
  guardRoutes(app, access)
  await app.register(helmet, {
    contentSecurityPolicy: {
      directives: {
        defaultSrc: ["'self'"], scriptSrc: ["'self'"], styleSrc: ["'self'"], connectSrc: ["'self'"], imgSrc: ["'self'", 'data:'], fontSrc: ["'self'"],
        objectSrc: ["'none'"], baseUri: ["'none'"], formAction: ["'self'"], frameAncestors: ["'none'"], upgradeInsecureRequests: null,
      },
    },
    // On this machine's own name it would bind every other server there too.
    strictTransportSecurity: isSecure && o.hosts.length > 0 ? { maxAge: 31_536_000, includeSubDomains: false } : false,
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

  const api: Services = { ...o, access }
  await app.register(
    async (scope) => {
      scope.addHook('onSend', async (_request, reply) => {
        if (!reply.hasHeader('cache-control')) reply.header('cache-control', 'no-store')
      })
      await scope.register(serviceRoutes, api)
      await scope.register(runRoutes, api)
      await scope.register(flushRoutes, api)
      await scope.register(comparisonRoutes, api)
      await scope.register(exportRoutes, api)
      await scope.register(performanceRoutes, api)
      await scope.register(settingsRoutes, api)
      await scope.register(trailRoutes, api)
      await scope.register(uploadRoutes, api)
      await scope.register(sessionRoutes, { people: o.people, access, cookie: cookieName, isSecure, openReading: o.openReading })
      await scope.register(peopleRoutes, { people: o.people })
      scope.get('/openapi.json', { config: { needs: 'public' }, schema: { hide: true } }, async () => app.swagger())
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
    admit: access.admit,
    ...(o.heartbeatMs === undefined ? {} : { heartbeatMs: o.heartbeatMs }),
  })
  hub.attach(app.server)
  o.people.onChange(hub.review)
  app.addHook('preClose', async () => hub.close())

  const publisher: Publisher = {
    news: (run, state, { steps, readings, alarms, acts }) => hub.news(run, { state, steps, readings, alarms, acts }),
    runs: () => hub.runs(),
  }
  return { app, hub, publisher }
}
