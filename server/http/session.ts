import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import type { FastifyReply } from 'fastify'
import { Type } from 'typebox'
import { MonitorError } from '../core/errors.ts'
import type { People } from '../people/people.ts'
import type { Session } from '../wire/people.ts'
import { type Access, demoPerson } from './access.ts'
import { linkFactsSchema, linkSchema, passwordSchema, sessionSchema, signInSchema } from './people-schemas.ts'
import { replies } from './schemas.ts'

export interface SessionRoutes {
  readonly people: People
  readonly access: Access
  readonly cookie: string
  /** Pages come over TLS: the cookie goes over nothing else. */
  readonly isSecure: boolean
  readonly openReading: boolean
}

/** Guesses cost: so many of these a minute from one address. */
const fewAMinute = { max: 20, timeWindow: 60_000, allowList: () => false }

/** Signing in and out, one-time links, the own password. */
export const sessionRoutes: FastifyPluginAsyncTypebox<SessionRoutes> = async (app, { people, access, ...o }) => {
  const attributes = { path: '/', httpOnly: true, sameSite: 'strict', secure: o.isSecure } as const

  function view(token: string | null): Session {
    const caller = access.callerOf(token)
    const isDemo = caller === demoPerson
    return {
      person: caller === null ? null : { name: caller.name, role: caller.role },
      how: caller === null ? 'none' : isDemo ? 'demo' : 'signed-in',
      resting: caller?.resting ?? false,
      endsMs: token === null ? null : (people.sessions.of(token)?.endsMs ?? null),
      mayRead: caller !== null || o.openReading,
      hasPeople: people.any(),
      idleMs: people.idleMs,
    }
  }
  /** The earlier session of this browser ends, whoever's it was; the new one has a token of its own. */
  function begin(reply: FastifyReply, before: string | null, token: string): Session {
    if (before !== null) people.sessions.end(before)
    reply.setCookie(o.cookie, token, attributes)
    return view(token)
  }

  app.get(
    '/session',
    {
      config: { needs: 'public' },
      schema: { summary: 'who is signed in, and what may be done without', response: replies(sessionSchema) },
    },
    async ({ headers }) => view(access.tokenOf(headers)),
  )

  app.post(
    '/session',
    {
      config: { needs: 'public', rateLimit: fewAMinute },
      schema: { summary: 'sign in', body: signInSchema, response: replies(sessionSchema) },
    },
    async ({ body, ip, headers }, reply) =>
      begin(reply, access.tokenOf(headers), await people.signIn(body.name, body.password, ip)),
  )

  app.delete(
    '/session',
    { config: { needs: 'public' }, schema: { summary: 'sign out', response: replies(sessionSchema) } },
    async ({ headers }, reply) => {
      const token = access.tokenOf(headers)
      if (token !== null) people.sessions.end(token)
      reply.clearCookie(o.cookie, attributes)
      return view(null)
    },
  )

  app.post(
    '/session/seen',
    {
      config: { needs: 'read' },
      schema: {
        summary: 'somebody is at the page: the time after which a session only reads begins anew',
        response: replies(sessionSchema),
      },
    },
    async ({ headers }) => {
      const token = access.tokenOf(headers)
      if (token !== null) people.sessions.seen(token)
      return view(token)
    },
  )

  app.post(
    '/session/password',
    {
      config: { needs: 'own', rateLimit: fewAMinute },
      schema: { summary: 'change the own password; other sessions end', body: passwordSchema, response: replies(sessionSchema) },
    },
    async ({ body, person, ip, headers }, reply) => {
      const id = person?.id
      if (id === undefined || id === null)
        throw new MonitorError('SIGN_IN_NEEDED', 'nobody is signed in', { hint: 'sign in first' })
      return begin(reply, access.tokenOf(headers), await people.changePassword(id, body.old, body.password, ip))
    },
  )

  app.post(
    '/links/look',
    {
      config: { needs: 'public', rateLimit: fewAMinute },
      schema: {
        summary: 'what a one-time link is for',
        body: Type.Pick(linkSchema, ['token']),
        response: replies(linkFactsSchema),
      },
    },
    async ({ body }) => people.links.look(body.token),
  )

  app.post(
    '/links/use',
    {
      config: { needs: 'public', rateLimit: fewAMinute },
      schema: {
        summary: 'set the password that a one-time link allows to set, and be signed in',
        body: linkSchema,
        response: replies(sessionSchema),
      },
    },
    async ({ body, headers }, reply) => begin(reply, access.tokenOf(headers), await people.links.use(body.token, body)),
  )
}
