import type { IncomingHttpHeaders, IncomingMessage } from 'node:http'
import type { FastifyInstance } from 'fastify'
import { MonitorError } from '../core/errors.ts'
import type { People } from '../people/people.ts'
import { may, type Need, type Role, rolesWith } from '../people/roles.ts'
import type { Guard } from './guard.ts'

/** Who calls. `id` null: the person of the demo, who signs in with nothing. */
export interface Caller {
  readonly id: number | null
  readonly name: string
  readonly role: Role
  /** Nobody was there for a while: reads on, acts only after signing in again. */
  readonly resting: boolean
}

declare module 'fastify' {
  interface FastifyRequest {
    /** The signed-in person; null where nobody is. */
    person: Caller | null
  }
  interface FastifyContextConfig {
    /** What the route asks of its caller; a route that does not say is refused at the start. */
    needs?: Need
  }
}

export const demoPerson: Caller = { id: null, name: 'demo operator', role: 'engineer', resting: false }

export interface AccessOptions {
  readonly people: Pick<People, 'sessions' | 'any'>
  /** The demo's person is everybody, until the first administrator is made. */
  readonly isDemo: () => boolean
  /** Whoever sits at this machine may look without signing in. */
  readonly openReading: boolean
  readonly cookie: string
  readonly parseCookie: (header: string) => Record<string, string | undefined>
  readonly guard: Guard
}

/** What a socket of a page is told when it asks to be let in. */
export type Admission = { readonly refused: '401 Unauthorized' | '403 Forbidden' } | { readonly holds: () => boolean }

const isSafe = new Set(['GET', 'HEAD', 'OPTIONS'])

/** The person of an act. Errors: SIGN_IN_NEEDED, which a route that needs more than reading has seen before. */
export function signedIn(caller: Caller | null): Caller {
  if (caller === null) throw new MonitorError('SIGN_IN_NEEDED', 'nobody is signed in', { hint: 'sign in first' })
  return caller
}

/** Who calls, and what may be done. */
export function createAccess(o: AccessOptions) {
  const tokenOf = (headers: IncomingHttpHeaders): string | null =>
    headers.cookie === undefined ? null : (o.parseCookie(headers.cookie)[o.cookie] ?? null)
  const callerOf = (token: string | null): Caller | null =>
    (token === null ? null : o.people.sessions.of(token)) ?? (o.isDemo() && !o.people.any() ? demoPerson : null)

  /** Errors: SIGN_IN_NEEDED, NOT_ALLOWED. */
  function demand(caller: Caller | null, need: Need): void {
    if (need === 'public' || (need === 'read' && caller === null && o.openReading)) return
    if (caller === null || (need === 'own' && caller.id === null))
      throw new MonitorError('SIGN_IN_NEEDED', 'this needs a person who is signed in', {
        hint: o.people.any()
          ? 'sign in, then try again'
          : 'make the first administrator by the link that the server wrote on its console (serve --new-administrator-link writes one)',
      })
    if (caller.resting && need !== 'read')
      throw new MonitorError('SIGN_IN_NEEDED', 'nobody has used this session for a while, so it only reads', {
        hint: 'sign in again',
      })
    if (!may(caller.role, need))
      throw new MonitorError('NOT_ALLOWED', `${caller.name}, ${caller.role}, may not do this`, {
        hint: `it needs ${rolesWith(need).join(' or ')}`,
      })
  }
  /** Where a browser's session is used, the page must be ours: a foreign one can send requests with it, but not this header. */
  const isFromOurPage = (headers: IncomingHttpHeaders): boolean =>
    headers.origin !== undefined || headers['sec-fetch-site'] === 'same-origin'

  return {
    tokenOf,
    callerOf,
    demand,
    isFromOurPage,
    /** For the upgrade to a websocket. */
    admit({ headers }: IncomingMessage): Admission {
      if (o.guard.fault(headers.host, headers.origin) !== null) return { refused: '403 Forbidden' }
      const token = tokenOf(headers)
      if (token !== null && !isFromOurPage(headers)) return { refused: '403 Forbidden' }
      const holds = () => callerOf(token) !== null || o.openReading
      if (!holds()) return { refused: '401 Unauthorized' }
      // A page that has a session lives and dies with it, also where reading is open.
      const isSession = token !== null && o.people.sessions.of(token) !== null
      return { holds: isSession ? () => o.people.sessions.of(token) !== null : holds }
    },
  }
}
export type Access = ReturnType<typeof createAccess>

/** Finds out who calls before anything is read of a body, and turns away who may not. Pages themselves are public. */
export function guardRoutes(app: FastifyInstance, access: Access): void {
  app.addHook('onRoute', (route) => {
    const isPage = route.url === '/*' || route.url === '/'
    if (isPage) route.config = { ...route.config, needs: 'public' }
    if (route.config?.needs === undefined)
      throw new Error(`the route ${String(route.method)} ${route.url} does not say what it needs (config.needs)`)
  })
  app.decorateRequest('person', null)
  app.addHook('preParsing', async (request) => {
    const token = access.tokenOf(request.headers)
    if (token !== null && !isSafe.has(request.method) && !access.isFromOurPage(request.headers))
      throw new MonitorError('NOT_ALLOWED', 'a session was used by what is not a page of this server', {
        hint: 'open the page that this server serves',
      })
    request.person = access.callerOf(token)
    // A path that leads nowhere has no need; it is answered with 404.
    access.demand(request.person, request.routeOptions.config.needs ?? 'public')
  })
}
