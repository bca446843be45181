import { describe, expect, it } from 'vitest'
import { may, type Need, type Role, roles } from '../../server/people/roles.ts'
import { acts, needs } from './needs.ts'
import { local, type Served, secret, served } from './served.ts'

type Who = Role | 'nobody' | 'demo'
interface OpenApi {
  readonly paths: Record<string, Record<string, { readonly requestBody?: unknown }>>
}

const allowed = (who: Who, need: Need, open: boolean): boolean =>
  need === 'public' ||
  (who === 'nobody' ? need === 'read' && open : who === 'demo' ? need !== 'own' && may('engineer', need) : may(who, need))

/** Every operation of the OpenAPI text with what it must ask, by the table; nothing may be missing on either side. */
async function operations(s: Served) {
  const { paths } = (await s.get('/api/openapi.json')).json() as OpenApi
  const all = Object.entries(paths).flatMap(([path, of]) =>
    Object.keys(of).map((method) => ({ method: method.toUpperCase(), path })),
  )
  expect(all.map(({ method, path }) => `${method} ${path}`).sort()).toEqual(Object.keys(needs).sort())
  return all.map((o) => ({ ...o, need: needs[`${o.method} ${o.path}`]! }))
}
const filled = (path: string, s: Served): string =>
  path
    .replace('{run}', String(s.run))
    .replace('{person}', '99')
    .replace(
      /\{(upload|name|alarm|skid)\}/g,
      (_, what: string) => ({ upload: 'none', name: 'a.csv', alarm: '1', skid: 'heron' })[what]!,
    )

describe('the role matrix, from the OpenAPI text', () => {
  // REC-07
  it.each([['nobody', true], ['nobody', false], ['demo', true], ...roles.map((r) => [r, false] as const)] as const)(
    '%s (reading open: %s) gets what the table gives and 401 or 403 for the rest',
    async (who, openReading) => {
      const s = await served({ demo: who === 'demo', openReading })
      await s.live(1)
      const wrong: string[] = []
      let headers: { cookie: string; origin: string } | null = null
      for (const { method, path, need } of await operations(s)) {
        if (who !== 'nobody' && who !== 'demo') headers ??= await s.as(who)
        const url = filled(path, s)
        const body = method === 'PUT' ? { payload: 'x', type: 'text/csv' } : { payload: '{}', type: 'application/json' }
        const reply = await s.app.inject({
          method: method as 'GET',
          url,
          headers: {
            ...local,
            ...(headers ?? {}),
            ...(method === 'GET' || method === 'DELETE' ? {} : { 'content-type': body.type }),
          },
          ...(method === 'GET' || method === 'DELETE' ? {} : { payload: body.payload }),
        })
        // Signed out: in again for the next.
        if (method === 'DELETE') headers = null
        const refused = reply.statusCode === 401 || reply.statusCode === 403
        const shall = !allowed(who, need, openReading)
        if (refused !== shall) wrong.push(`${method} ${path}: ${reply.statusCode}`)
        if (refused) {
          const problem = reply.json() as { code: string; hint: string | null }
          expect([problem.code, reply.statusCode]).toEqual(
            who === 'nobody' || problem.code === 'SIGN_IN_NEEDED' ? ['SIGN_IN_NEEDED', 401] : ['NOT_ALLOWED', 403],
          )
          expect(problem.hint).toBeTruthy()
        }
        expect(reply.statusCode, `${method} ${path}`).toBeLessThan(500)
      }
      expect(wrong).toEqual([])
    },
    60_000,
  )

  // ALM-07
  it('holds for every kind of act of the OpenAPI text, by role; the act is that of who is signed in', async () => {
    const s = await served({ demo: false })
    await s.live(30)
    const { paths } = (await s.get('/api/openapi.json')).json() as OpenApi
    const text = JSON.stringify(paths['/api/runs/{run}/acts']!['post']!.requestBody)
    const kinds = [...text.matchAll(/"kind":\{[^}]*?(?:"const":"([^"]+)"|"enum":(\[[^\]]+\]))/g)].flatMap(([, one, many]) =>
      one === undefined ? (JSON.parse(many!) as string[]) : [one],
    )
    expect([...new Set(kinds)].sort()).toEqual(Object.keys(acts).sort())
    const wrong: string[] = []
    for (const role of roles) {
      const headers = await s.as(role)
      for (const [kind, { need, body }] of Object.entries(acts)) {
        const before = s.store.sequence.acts(s.run).length
        const reply = await s.post(`/api/runs/${s.run}/acts`, { kind, ...body }, headers)
        const shall = may(role, need) ? [200] : [403]
        if (!shall.includes(reply.status)) wrong.push(`${role} ${kind}: ${reply.status} ${JSON.stringify(reply.json())}`)
        expect(s.store.sequence.acts(s.run).length - before).toBe(reply.status === 200 ? 1 : 0)
      }
    }
    expect(wrong).toEqual([])
    const people = new Set(s.store.sequence.acts(s.run).map((a) => a.act.person))
    expect(people).toEqual(new Set(s.people.accounts.list().flatMap((p) => (may(p.role, 'operate') ? [p.name] : []))))
  }, 60_000)

  it('a route that does not say what it needs keeps the server from starting', async () => {
    const { default: Fastify } = await import('fastify')
    const { guardRoutes } = await import('../../server/http/access.ts')
    const app = Fastify()
    guardRoutes(app, {} as never)
    expect(() => app.get('/api/anything', async () => 1)).toThrow('GET /api/anything does not say what it needs')
  })
})

describe('sessions over HTTP', () => {
  const cookieOf = (headers: Record<string, unknown>): string => String(headers['set-cookie'] ?? '')
  const signIn = async (s: Served, name: string, headers: Record<string, string> = {}, password = secret) =>
    s.app.inject({ method: 'POST', url: '/api/session', headers: { ...local, ...headers }, payload: { name, password } })
  const person = async (s: Served, headers: Record<string, string>) => (await s.get('/api/session', headers)).json().person

  it('begin with a cookie that no script reads and no other site sends; a token brought along is not taken over', async () => {
    const s = await served({ demo: false })
    await s.as('operator')
    const planted = 'A'.repeat(43)
    const reply = await signIn(s, 'person b', { cookie: `clearbore=${planted}`, origin: `http://${local.host}` })
    expect(reply.statusCode).toBe(200)
    expect(cookieOf(reply.headers)).toMatch(/^clearbore=[\w-]{43}; Path=\/; HttpOnly; SameSite=Strict$/)
    expect(cookieOf(reply.headers)).not.toContain(planted)
    expect(await person(s, { cookie: `clearbore=${planted}` })).toBeNull()
    expect(await person(s, { cookie: cookieOf(reply.headers).split(';')[0]! })).toEqual({ name: 'Person b', role: 'operator' })
    expect(reply.body).not.toContain(cookieOf(reply.headers).slice(10, 53))
  })

  it('of a browser end when somebody else signs in there, and by signing out, for good', async () => {
    const s = await served({ demo: false })
    const [first, second] = [await s.as('operator'), await s.as('engineer')]
    const next = await signIn(s, 'Person c', first)
    expect(next.json().person.name).toBe('Person c')
    expect(await person(s, first)).toBeNull()
    const out = await s.app.inject({ method: 'DELETE', url: '/api/session', headers: { ...local, ...second } })
    expect(cookieOf(out.headers)).toMatch(/^clearbore=; /)
    expect(await person(s, second)).toBeNull()
    expect(s.store.audit.list().slice(-1)).toMatchObject([{ person: 'Person c', act: 'sign-out' }])
  })

  it('under https have the __Host- prefix, are Secure, and go by that name alone; the page is bound to https', async () => {
    const s = await served({
      demo: false,
      publicUrl: 'https://skids.example',
      trustProxy: ['127.0.0.1'],
      hosts: ['10.0.0.5'],
      openReading: false,
    })
    await s.as('operator')
    const proxied = { host: 'skids.example', origin: 'https://skids.example', 'x-forwarded-proto': 'https' }
    const reply = await signIn(s, 'Person b', proxied)
    expect(cookieOf(reply.headers)).toMatch(/^__Host-clearbore=[\w-]{43}; Path=\/; HttpOnly; Secure; SameSite=Strict$/)
    expect(reply.headers['strict-transport-security']).toBe('max-age=31536000')
    const token = cookieOf(reply.headers).split(';')[0]!
    expect(await person(s, { cookie: token })).not.toBeNull()
    expect(await person(s, { cookie: token.replace('__Host-', '') })).toBeNull()
    expect((await signIn(s, 'Person b', { ...proxied, origin: 'http://skids.example' })).statusCode).toBe(403)
  })

  it('only read after half an hour without a touch; reading does not count as one, and signing in mends it', async () => {
    const s = await served({ demo: false, openReading: false })
    await s.live(1)
    const headers = await s.as('operator')
    const act = () => s.post(`/api/runs/${s.run}/acts`, { kind: 'comment', alarm: null, text: 'seen' }, headers)
    s.wall.pass(29 * 60_000)
    expect((await s.get('/api/runs', headers)).status).toBe(200)
    expect((await act()).status).toBe(200)
    expect((await s.post('/api/session/seen', undefined, headers)).json().resting).toBe(false)
    s.wall.pass(30 * 60_000)
    expect((await s.get('/api/runs', headers)).status).toBe(200)
    const refused = await act()
    expect([refused.status, refused.json().hint]).toEqual([401, 'sign in again'])
    const again = await signIn(s, 'Person b', headers)
    const fresh = { cookie: cookieOf(again.headers).split(';')[0]!, origin: headers.origin }
    expect((await s.post(`/api/runs/${s.run}/acts`, { kind: 'comment', alarm: null, text: 'seen' }, fresh)).status).toBe(200)
    s.wall.pass(12 * 3_600_000)
    expect((await s.get('/api/runs', fresh)).status).toBe(401)
  })

  it('are not the demo’s: it has no password, and ends with the first administrator', async () => {
    const s = await served()
    expect((await s.get('/api/session')).json()).toMatchObject({ person: { name: 'demo operator', role: 'engineer' }, how: 'demo' })
    expect((await s.post('/api/session/password', { old: secret, password: secret })).status).toBe(401)
    await s.as('viewer')
    expect((await s.get('/api/session')).json()).toMatchObject({ person: null, how: 'none', mayRead: true })
    expect((await s.post(`/api/runs/${s.run}/acts`, { kind: 'comment', alarm: null, text: 'seen' })).status).toBe(401)
  })

  it('an upload belongs to who began it', async () => {
    const s = await served({ demo: false })
    const [mine, other] = [await s.as('operator'), await s.as('operator')]
    const { heronText } = await import('../monitor/bench.ts')
    const begin = { title: 'night', skid: { name: 'heron.yaml', text: heronText }, events: null, start: null }
    const { upload } = (await s.post('/api/uploads', begin, mine)).json()
    const put = (headers: Record<string, string>) =>
      s.app.inject({
        method: 'PUT',
        url: `/api/uploads/${upload}/logs/a.csv`,
        headers: { ...local, ...headers, 'content-type': 'text/csv' },
        payload: 'x',
      })
    expect((await put(other)).statusCode).toBe(400)
    expect((await put(mine)).statusCode).toBe(200)
    expect((await s.post(`/api/uploads/${upload}/import`, undefined, other)).status).toBe(400)
  })
})

describe('requests that other sites forge', () => {
  it.each([
    ['another origin', { origin: 'http://rebound.example' }],
    ['no origin', {}],
    ['an opaque origin', { origin: 'null' }],
    ['another port of this machine', { origin: 'http://127.0.0.1:3000' }],
    ['https where this is http', { origin: 'https://127.0.0.1:8460' }],
    ['a page of the same site', { 'sec-fetch-site': 'same-site' }],
  ])('with a session and %s change nothing, whatever the method', async (_, forged) => {
    const s = await served({ demo: false })
    await s.live(1)
    const { cookie } = await s.as('engineer')
    const counts = () => [s.store.sequence.acts(s.run).length, s.store.audit.list().length, s.people.accounts.list().length]
    const before = counts()
    for (const [method, url, payload] of [
      ['POST', `/api/runs/${s.run}/acts`, { kind: 'comment', alarm: null, text: 'forged' }],
      ['POST', '/api/session/password', { old: secret, password: 'four otters in a yellow boat' }],
      ['POST', '/api/uploads', {}],
      ['DELETE', '/api/session', undefined],
      ['PUT', '/api/uploads/x/logs/a.csv', undefined],
    ] as const) {
      const reply = await s.app.inject({
        method,
        url,
        headers: { ...local, cookie, ...forged },
        ...(payload === undefined ? {} : { payload }),
      })
      expect([reply.statusCode, url]).toEqual([403, url])
    }
    expect(counts()).toEqual(before)
  })
  it('of our own page pass by its origin, and where a browser leaves that out by sec-fetch-site', async () => {
    const s = await served({ demo: false })
    await s.live(1)
    const { cookie } = await s.as('engineer')
    const act = { kind: 'comment', alarm: null, text: 'ours' }
    for (const ours of [{ origin: `http://${local.host}` }, { 'sec-fetch-site': 'same-origin' }])
      expect((await s.post(`/api/runs/${s.run}/acts`, act, { cookie, ...(ours as Record<string, string>) })).status).toBe(200)
  })
})

describe('limits of a rate', () => {
  const times = async <T>(n: number, ask: () => Promise<T>): Promise<T[]> => {
    const out: T[] = []
    for (let i = 0; i < n; i++) out.push(await ask())
    return out
  }
  it('20 sign-ins a minute from one address, this machine too; then 429 with the wait, and another address goes on', async () => {
    const s = await served({ demo: false, trustProxy: ['127.0.0.1'], publicUrl: 'http://skids.example' })
    const ask = async (ip: string) => (await s.post('/api/links/look', { token: 'x' }, { 'x-forwarded-for': ip })).status
    const first = await times(25, () => ask('192.0.2.1'))
    expect(first.filter((c) => c === 429).length).toBe(5)
    expect(await ask('192.0.2.2')).toBe(410)
    const local429 = await times(21, () => s.post('/api/links/look', { token: 'x' }))
    const last = local429.find((r) => r.status === 429)!
    expect(last.json()).toMatchObject({ code: 'TOO_MANY', hint: expect.stringMatching(/try again in \d+ s/) })
  })
  it('so many requests a minute from an address outside, none for this machine; an untold proxy’s word is not taken', async () => {
    const s = await served({ mostPerMinute: 30, trustProxy: ['127.0.0.1'], publicUrl: 'http://skids.example' })
    const ask = async (headers: Record<string, string> = {}) => (await s.get('/api/service', headers)).status
    const outside = await times(40, () => ask({ 'x-forwarded-for': '192.0.2.1' }))
    expect(outside.filter((c) => c === 429).length).toBe(10)
    expect((await times(40, ask)).every((c) => c === 200)).toBe(true)
    const plain = await served({ mostPerMinute: 30 })
    const told = await times(40, () => plain.get('/api/service', { 'x-forwarded-for': '192.0.2.1' }))
    expect(told.every((r) => r.status === 200)).toBe(true)
  })
})
