import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { expect, it } from 'vitest'
import { served } from './served.ts'

interface Operation {
  readonly summary?: string
  readonly responses: Record<string, unknown>
}

it('publishes one OpenAPI 3.1 text with every route of the list in wire/index.ts, each with a summary and a reply', async () => {
  const s = await served()
  const text = (await s.get('/api/openapi.json')).json() as {
    openapi: string
    info: { version: string; description: string }
    paths: Record<string, Record<string, Operation>>
  }
  expect([text.openapi, text.info.version]).toEqual(['3.1.0', '9.9.9'])
  expect(text.info.description).toContain('Advisory only')
  const published = Object.entries(text.paths).flatMap(([path, of]) =>
    Object.keys(of).map((method) => `${method.toUpperCase()} ${path.replace(/\{(\w+)\}/g, ':$1')}`),
  )
  const index = readFileSync(join(import.meta.dirname, '../../server/wire/index.ts'), 'utf8')
  const listed = [...index.matchAll(/^ \* {3}(GET|POST|PUT) {1,2}(\/api\/[^\s?|]+)/gm)]
    .map(([, method, path]) => `${method} ${path}`)
    .filter((r) => !r.includes('openapi'))
  expect(listed.length).toBeGreaterThan(12)
  for (const route of listed) expect(published).toContain(route)
  for (const of of Object.values(text.paths))
    for (const o of Object.values(of)) expect([o.summary === undefined, Object.keys(o.responses).length > 0]).toEqual([false, true])
  for (const file of ['alarms.csv', 'alarms.json', 'samples.csv', 'record.json'])
    expect(published).toContain(`GET /api/runs/:run/export/${file}`)
  expect(published).toContain('POST /api/runs/:run/acts')
})
