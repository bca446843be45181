import { createServer } from 'node:net'
import { join } from 'node:path'
import { afterAll, expect, it } from 'vitest'
import { isSteps } from '../../server/monitor/step-log.ts'
import { openStore } from '../../server/store/open.ts'
import { bundled, dropBundles, start } from '../e2e-server/children.ts'
import { storm } from '../helpers/hostile.ts'
import { heronFile, tempDir } from '../monitor/bench.ts'

afterAll(dropBundles)
const count = 12_000
const password = 'a kettle under the blue staircase'

const freePort = (): Promise<number> =>
  new Promise((done) => {
    const server = createServer().listen(0, '127.0.0.1', () => {
      const { port } = server.address() as { port: number }
      server.close(() => done(port))
    })
  })

it(`of ${count} hostile requests to a running server none gets a 5xx or stays unanswered, nothing is written but refusals and what an engineer may, and it serves on`, async () => {
  const main = bundled('server/main.ts')
  const dir = tempDir()
  const data = join(dir, 'data')
  const port = await freePort()
  const base = `http://127.0.0.1:${port}`
  const options = ['--skid', heronFile, '--data', data, '--keys', join(dir, 'keys'), '--port', String(port), '--speed', '1']
  const post = async (path: string, body: object, cookie = '') => {
    const reply = await fetch(`${base}${path}`, {
      method: 'POST',
      headers: { origin: base, 'content-type': 'application/json', cookie },
      body: JSON.stringify(body),
    })
    expect(reply.status, path).toBe(200)
    return { cookie: (reply.headers.get('set-cookie') ?? '').split(';')[0]!, json: (await reply.json()) as { path: string } }
  }

  // People first, at this machine alone; then as behind a proxy, whose word gives each request an address of its own.
  const first = start(main, ['serve', ...options])
  const [, token] = await first.line(/#\/link\/([\w-]{43})$/)
  const { cookie: administrator } = await post('/api/links/use', { token, name: 'Odo Fenn', password })
  const member = async (name: string, role: string): Promise<string> => {
    const { json } = await post('/api/people', { name, role, reason: 'for the storm' }, administrator)
    return (await post('/api/links/use', { token: json.path.split('/').at(-1), name: null, password })).cookie
  }
  const [reader, engineer, writer] = [
    await member('Ida Moor', 'viewer'),
    await member('Ruth Alder', 'engineer'),
    await member('Tom Vale', 'engineer'),
  ]
  first.process.kill('SIGTERM')
  expect(await first.ended).toBe(0)
  const server = start(main, ['serve', ...options, '--trust-proxy', '127.0.0.1', '--public-url', base])
  await server.line(/Advisory only/)

  const written = () => {
    const store = openStore(data, { readonly: true })
    try {
      const runs = store.runs.list().filter((r) => !isSteps(r.source))
      return {
        runs: runs.map((r) => r.id),
        acts: runs.map((r) => store.sequence.acts(r.id).length),
        people: store.people.list().map(({ signedInMs: _, ...p }) => p),
        settings: store.settings.list('heron').length,
        trail: store.audit
          .list()
          .filter((a) => !/\.refused$|^sign-out$/.test(a.act) && a.person !== 'Tom Vale')
          .map((a) => `${a.person}: ${a.act}`),
      }
    } finally {
      store.close()
    }
  }
  const { acts: actsBefore, ...before } = written()
  const { paths } = (await (await fetch(`${base}/api/openapi.json`)).json()) as { paths: Record<string, unknown> }
  const began = performance.now()
  const answers = await storm(7, count, { port, paths: Object.keys(paths), reader, writer, stolen: [engineer, administrator] })
  console.log(
    `${count} hostile requests in ${Math.round((performance.now() - began) / 1000)} s: ${JSON.stringify(answers.statuses)}`,
  )
  expect(server.err).toEqual([])
  expect(Object.keys(answers.statuses).filter((a) => a.startsWith('5') || a === 'silent')).toEqual([])
  const { acts, ...after } = written()
  expect(after).toEqual(before)
  const acted = answers.taken.filter((t) => t === 'POST /api/runs/1/acts').length
  expect(acts[0]! - actsBefore[0]!).toBe(acted)
  expect(acted).toBeGreaterThan(20)
  expect((await fetch(`${base}/api/runs/1/state`, { headers: { cookie: reader } })).status).toBe(200)
  server.process.kill('SIGTERM')
  expect(await server.ended).toBe(0)
  expect(server.err).toEqual([])
  const store = openStore(data)
  expect(store.check()).toEqual([])
  store.close()
}, 3_600_000)
