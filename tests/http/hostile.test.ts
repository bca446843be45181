import { expect, it } from 'vitest'
import { storm } from '../helpers/hostile.ts'
import { served } from './served.ts'

it('of 500 hostile requests none gets a 5xx or stays unanswered, nothing is written but refusals and what an engineer may, and the server serves on', async () => {
  const s = await served({ demo: false, trustProxy: ['127.0.0.1'] })
  await s.live(2)
  await s.app.listen({ host: '127.0.0.1', port: 0 })
  const { port } = s.app.server.address() as { port: number }
  const { paths } = (await s.get('/api/openapi.json')).json() as { paths: Record<string, unknown> }
  const [reader, engineer, administrator, writer] = [
    await s.as('viewer'),
    await s.as('engineer'),
    await s.as('administrator'),
    await s.as('engineer'),
  ]
  const written = () => ({
    runs: s.store.runs.list().map((r) => [r.id, r.state]),
    people: s.store.people.list().map(({ signedInMs: _, ...p }) => p),
    trail: s.store.audit.list().filter((a) => !/\.refused$|^sign-out$/.test(a.act) && a.person !== 'Person e'),
  })
  const before = written()
  const acts = s.store.sequence.acts(s.run).length
  const answers = await storm(20_310_505, 500, {
    port,
    paths: Object.keys(paths),
    reader: reader.cookie,
    writer: writer.cookie,
    stolen: [engineer.cookie, administrator.cookie],
  })
  const statuses = Object.keys(answers.statuses)
  expect(statuses.filter((a) => a.startsWith('5') || a === 'silent')).toEqual([])
  for (const expected of ['200', '400', '401', '403', '404']) expect(statuses).toContain(expected)
  expect(s.log).toEqual([])
  expect(written()).toEqual(before)
  const acted = answers.taken.filter((t) => /^POST \/api\/runs\/1\/acts$/.test(t)).length
  expect(s.store.sequence.acts(s.run).length - acts).toBe(acted)
  expect(acted).toBeGreaterThan(0)
  await s.live(1)
  expect((await s.get(`/api/runs/${s.run}/state`)).status).toBe(200)
}, 60_000)
