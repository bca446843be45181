import { isIP } from 'node:net'
import type { FastifyInstance } from 'fastify'

const loopback: ReadonlySet<string> = new Set(['localhost', '127.0.0.1', '[::1]'])

/** The name of a Host header without its port; null for what is none. */
function nameOf(host: string): string | null {
  const m = /^(\[[0-9a-f:.]+\]|[a-z0-9.-]+)(?::\d{1,5})?$/i.exec(host)
  return m === null ? null : m[1]!.toLowerCase()
}

/**
 * Whether a request may be answered: its Host must be a name that this server goes by, and its Origin, if it has one, this very server.
 * A foreign page whose own name was pointed at this machine (DNS rebinding) has neither. `hosts` are further names, of --host; bound to
 * an address outside, every literal address is one too, since rebinding needs a name. `publicUrl` is the address that a proxy in front
 * is known by.
 */
export function createGuard(
  hosts: readonly string[],
  { isTls = false, publicUrl = null }: { readonly isTls?: boolean; readonly publicUrl?: string | null } = {},
) {
  const outside = publicUrl === null ? null : new URL(publicUrl)
  const names = new Set(hosts.map((h) => (isIP(h) === 6 ? `[${h}]` : h).toLowerCase()))
  const isOutside = hosts.some((h) => !loopback.has(h) && h !== '::1')
  const isOurs = (name: string): boolean =>
    loopback.has(name) || names.has(name) || name === outside?.hostname || (isOutside && isIP(name.replace(/^\[|\]$/g, '')) !== 0)
  return {
    /** The fault in words, null where there is none. */
    fault(host: string | undefined, origin: string | undefined): 'host' | 'origin' | null {
      const name = host === undefined ? null : nameOf(host)
      if (name === null || !isOurs(name)) return 'host'
      if (origin === undefined) return null
      const own = name === outside?.hostname ? outside.origin : `${isTls ? 'https' : 'http'}://${host}`
      return origin === own || origin === outside?.origin ? null : 'origin'
    },
  }
}
export type Guard = ReturnType<typeof createGuard>

/** Answers every request of a wrong Host with 421 and of a wrong Origin with 403, before anything else looks at it. */
export function guardRequests(app: FastifyInstance, guard: Guard): void {
  app.addHook('onRequest', async (request, reply) => {
    // Who has hung up already has no address, and hears nothing.
    if ((request.ip as string | undefined) === undefined) {
      reply.hijack()
      request.raw.destroy()
      return
    }
    const fault = guard.fault(request.headers.host, request.headers.origin)
    if (fault === null) return
    const problem =
      fault === 'host'
        ? {
            code: 'HTTP_421',
            message: 'this server does not go by that name',
            hint: 'use 127.0.0.1 or localhost, or start it with --host NAME or --public-url URL',
          }
        : {
            code: 'HTTP_403',
            message: 'requests from pages of another origin are refused',
            hint: 'open the page that this server serves',
          }
    await reply.code(fault === 'host' ? 421 : 403).send({ ...problem, place: null })
  })
}
