import { mkdirSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { expect, it } from 'vitest'
import { tempDir } from '../monitor/bench.ts'
import { served } from './served.ts'

it('serves the built pages and nothing beside them, under the same policy; what is not there is a Problem', async () => {
  const dir = tempDir()
  const web = join(dir, 'web')
  mkdirSync(join(web, 'assets'), { recursive: true })
  writeFileSync(join(web, 'index.html'), '<!doctype html><title>t</title>')
  writeFileSync(join(web, 'assets', 'a.js'), 'export {}')
  writeFileSync(join(dir, 'secret.txt'), 'secret')
  const s = await served({ webRoot: web })
  const page = await s.get('/')
  expect([page.status, page.headers['content-type']]).toEqual([200, 'text/html; charset=utf-8'])
  expect(page.headers['content-security-policy']).toContain("default-src 'self'")
  expect((await s.get('/assets/a.js')).headers['content-type']).toContain('javascript')
  for (const path of ['/../secret.txt', '/%2e%2e/secret.txt', '/..%2fsecret.txt', '/assets/../../secret.txt', '/.env']) {
    const reply = await s.get(path)
    expect([403, 404], path).toContain(reply.status)
    expect(reply.text).not.toBe('secret')
  }
  const missing = await s.get('/no-page')
  expect([missing.status, missing.json().code]).toEqual([404, 'HTTP_404'])
})
