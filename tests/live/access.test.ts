import { connect } from 'node:net'
import { describe, expect, it } from 'vitest'
import { WebSocket } from 'ws'
import { type Served, served } from '../http/served.ts'
import { openPage } from './page.ts'

async function listening(more: Parameters<typeof served>[0] = {}) {
  const s = await served({ demo: false, heartbeatMs: 20, ...more })
  await s.app.listen({ host: '127.0.0.1', port: 0 })
  const { port } = s.app.server.address() as { port: number }
  return { ...s, port, origin: `http://127.0.0.1:${port}` }
}
/** The status with which an upgrade is refused. */
const refused = (port: number, headers: Record<string, string>) =>
  new Promise<number | string>((done) => {
    const socket = new WebSocket(`ws://127.0.0.1:${port}/ws`, { headers })
    socket.once('unexpected-response', (_, reply) => done(reply.statusCode ?? 0))
    socket.once('open', () => {
      socket.close()
      done('open')
    })
    socket.once('error', () => undefined)
  })
const cookieOf = async (s: Served, role: Parameters<Served['as']>[0]) => (await s.as(role)).cookie

describe('who may listen on the websocket', () => {
  it('an upgrade to an address that is none is answered with 404, and the server lives', async () => {
    const s = await listening()
    for (const path of ['//[', '/ws/../ws', 'http://[', '*', '/wsx']) {
      const head = `GET ${path} HTTP/1.1\r\nHost: 127.0.0.1:${s.port}\r\nUpgrade: websocket\r\nConnection: Upgrade\r\n\r\n`
      const got = await new Promise<string>((done) => {
        const socket = connect(s.port, '127.0.0.1', () => socket.write(head))
        socket.once('data', (d) => done(String(d)))
        socket.once('error', () => done('cut'))
      })
      expect(got).toMatch(/^HTTP\/1\.1 40[04]/)
    }
    expect(await refused(s.port, {})).toBe('open')
  })
  it('nobody without a session where reading is not open; with one only a page of ours', async () => {
    const s = await listening({ openReading: false })
    const cookie = await cookieOf(s, 'viewer')
    expect(await refused(s.port, {})).toBe(401)
    expect(await refused(s.port, { cookie: `clearbore=${'A'.repeat(43)}`, origin: s.origin })).toBe(401)
    expect(await refused(s.port, { cookie })).toBe(403)
    for (const origin of ['http://rebound.example', 'null', `http://127.0.0.1:${s.port + 1}`, `https://127.0.0.1:${s.port}`])
      expect(await refused(s.port, { cookie, origin })).toBe(403)
    expect(await refused(s.port, { cookie, origin: s.origin, host: 'rebound.example' })).toBe(403)
    expect(await refused(s.port, { cookie, origin: s.origin })).toBe('open')
  })
  it('where reading is open anybody at this machine, and no page of another origin', async () => {
    const s = await listening()
    expect([await refused(s.port, {}), await refused(s.port, { origin: 'http://rebound.example' })]).toEqual(['open', 403])
  })

  it.each([
    ['by signing out', (s: Served, _: number, token: string) => s.people.sessions.end(token)],
    ['when the person is disabled', (s: Served, id: number) => s.people.accounts.setDisabled(id, true, by)],
    ['when the role changes', (s: Served, id: number) => s.people.accounts.setRole(id, 'reviewer', by)],
    ['when the password is reset', (s: Served, id: number) => s.people.accounts.reset(id, by)],
    ['after twelve hours', (s: Served) => s.wall.pass(12 * 3_600_000)],
  ] as const)('is let go with 4401 %s, at once, and another person’s stays', async (_, ends) => {
    const s = await listening()
    const [mine, other] = [await cookieOf(s, 'operator'), await cookieOf(s, 'operator')]
    const [page, second] = [
      await openPage(s.port, { cookie: mine, origin: s.origin }),
      await openPage(s.port, { cookie: other, origin: s.origin }),
    ]
    const closed = page.closed()
    ends(s, 2, mine.slice('clearbore='.length))
    expect(await closed).toBe(4401)
    // Time ends all of them; the rest is about one person.
    if (s.people.sessions.of(other.slice('clearbore='.length)) !== null) await second.next('heartbeat')
    second.socket.terminate()
  })

  it('rests with its session and goes on being told: a screen on the wall does not go dark', async () => {
    const s = await listening({ openReading: false })
    const page = await openPage(s.port, { cookie: await cookieOf(s, 'operator'), origin: s.origin })
    s.wall.pass(5 * 3_600_000)
    await page.next('heartbeat')
    expect((await page.next('heartbeat')).type).toBe('heartbeat')
  })
})
const by = { id: 1, name: 'Odo Fenn', reason: 'a test' }
