import { describe, expect, it } from 'vitest'
import { createGuard } from '../../server/http/guard.ts'
import { served } from './served.ts'

describe('who is answered', () => {
  const guard = createGuard([])
  it.each([
    ['127.0.0.1:8460', undefined, null],
    ['localhost:8460', undefined, null],
    ['[::1]:8460', undefined, null],
    ['LOCALHOST', undefined, null],
    ['localhost:8460', 'http://localhost:8460', null],
    ['rebound.example:8460', undefined, 'host'],
    ['rebound.example', 'http://rebound.example', 'host'],
    ['localhost.rebound.example', undefined, 'host'],
    ['127.0.0.1.rebound.example', undefined, 'host'],
    ['192.0.2.7:8460', undefined, 'host'],
    ['localhost:8460', 'http://localhost:3000', 'origin'],
    ['localhost:8460', 'http://rebound.example', 'origin'],
    ['localhost:8460', 'null', 'origin'],
    ['localhost:8460 ', undefined, 'host'],
    ['a@localhost', undefined, 'host'],
    [undefined, undefined, 'host'],
  ])('bound to loopback: Host %s, Origin %s: %s', (host, origin, fault) => {
    expect(guard.fault(host, origin)).toBe(fault)
  })
  it('bound to every address: literal addresses and the given name, no other name', () => {
    const open = createGuard(['0.0.0.0'])
    expect(['192.0.2.7:1', '[2001:db8::7]:1', 'plant-pc:1'].map((h) => open.fault(h, undefined))).toEqual([null, null, 'host'])
    expect(createGuard(['plant-pc']).fault('plant-pc:8460', 'http://plant-pc:8460')).toBeNull()
  })
})

describe('every reply', () => {
  it('refuses a foreign Host with 421 and a foreign Origin with 403 before any route, unknown paths included', async () => {
    const s = await served()
    for (const path of ['/api/runs', '/nowhere', '/api/openapi.json']) {
      expect((await s.get(path, { host: 'rebound.example' })).status).toBe(421)
      expect((await s.get(path, { origin: 'http://rebound.example' })).status).toBe(403)
    }
    const act = { kind: 'comment', alarm: null, text: 'from elsewhere' }
    expect((await s.post(`/api/runs/${s.run}/acts`, act, { origin: 'http://rebound.example' })).status).toBe(403)
    expect(s.store.sequence.acts(s.run)).toEqual([])
  })
  it("carries a content security policy of 'self' alone, forbids framing and sniffing, tells no server name", async () => {
    const s = await served()
    const { headers } = await s.get('/api/service')
    const policy = String(headers['content-security-policy'])
    for (const part of [
      "default-src 'self'",
      "script-src 'self'",
      "style-src 'self'",
      "connect-src 'self'",
      "object-src 'none'",
      "frame-ancestors 'none'",
    ])
      expect(policy).toContain(part)
    expect(policy).not.toMatch(/unsafe|https?:|\*/)
    expect(headers['x-content-type-options']).toBe('nosniff')
    expect(headers['x-powered-by']).toBeUndefined()
    expect(headers['strict-transport-security']).toBeUndefined()
  })
  it('answers broken JSON, a body too large, a wrong type and a wrong path in one form, without a stack trace', async () => {
    const s = await served()
    const send = (payload: string, type: string, url = `/api/runs/${s.run}/acts`) =>
      s.app.inject({ method: 'POST', url, headers: { host: 'localhost', 'content-type': type }, payload })
    const replies = [
      await send('{"kind":', 'application/json'),
      await send(`{"kind":"comment","text":"${'x'.repeat(3 * 2 ** 20)}"}`, 'application/json'),
      await send('kind=comment', 'application/x-www-form-urlencoded'),
      await send('{}', 'application/json', '/api/nowhere'),
      await send('{"__proto__":{"kind":"comment"}}', 'application/json'),
    ]
    expect(replies.map((r) => r.statusCode)).toEqual([400, 413, 415, 404, 400])
    for (const r of replies) {
      expect(Object.keys(r.json()).sort()).toEqual(['code', 'hint', 'message', 'place'])
      expect(r.body).not.toMatch(/\bat .*\.(ts|js):\d+/)
    }
  })
  it('tells a fault of its own in one sentence, and the whole of it to the log', async () => {
    const s = await served()
    Object.assign(s.store.events, {
      list: () => {
        throw new TypeError('no such table in /secret/place.ts')
      },
    })
    const reply = await s.get(`/api/runs/${s.run}/marks`)
    expect(reply.status).toBe(500)
    expect(reply.text).not.toMatch(/table|secret|node_modules|\.ts/i)
    expect(s.log.join('\n')).toMatch(/GET \/api\/runs\/1\/marks: TypeError: no such table/)
  })
})
