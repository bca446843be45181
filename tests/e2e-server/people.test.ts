import { readdirSync, readFileSync, writeFileSync } from 'node:fs'
import { request } from 'node:https'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { WebSocket } from 'ws'
import { openStore } from '../../server/store/open.ts'
import { selfSigned } from '../helpers/self-signed.ts'
import { heronFile, tempDir } from '../monitor/bench.ts'
import { bundled, type Child, dropBundles, start } from './children.ts'

let main = ''
beforeAll(() => {
  main = bundled('server/main.ts')
})
afterAll(dropBundles)

const first = 'a kettle under the blue staircase'
const second = 'four otters in a yellow boat'
const url = /^Clearbore \S+: (https?:\S+)\//
const link = /^ {2}(https?:\S+)\/#\/link\/([\w-]{43})$/

const serve = (data: string, ...args: string[]): Child =>
  start(main, ['serve', '--data', data, '--keys', join(data, '..', `keys-${data.split('/').at(-1)}`), '--port', '0', ...args])
async function stop(child: Child): Promise<void> {
  child.process.kill('SIGTERM')
  expect(await child.ended).toBe(0)
}

/** A browser without a screen: keeps its cookie, says its origin. */
function browser(base: string) {
  let cookie = ''
  return {
    cookie: () => cookie,
    async send(method: string, path: string, body?: unknown) {
      const reply = await fetch(`${base}${path}`, {
        method,
        headers: {
          origin: base,
          ...(cookie === '' ? {} : { cookie }),
          ...(body === undefined ? {} : { 'content-type': 'application/json' }),
        },
        ...(body === undefined ? {} : { body: typeof body === 'string' ? body : JSON.stringify(body) }),
      })
      const set = reply.headers.get('set-cookie')
      if (set !== null) cookie = set.split(';')[0]!
      const text = await reply.text()
      return { status: reply.status, text, json: () => JSON.parse(text) }
    },
  }
}

describe('the first start on a skid', () => {
  it('writes a link that makes the administrator; no password, token or cookie is in a log, in a reply’s body or in a file, whatever goes wrong', async () => {
    const data = tempDir()
    const child = serve(data, '--skid', heronFile)
    const [, base] = await child.line(url)
    const [, , setup] = await child.line(link)
    const tab = browser(base!)
    const replies: string[] = []
    const send = async (method: string, path: string, body?: unknown): Promise<number> => {
      const reply = await tab.send(method, path, body)
      replies.push(reply.text)
      return reply.status
    }
    const secrets = new Set<string>([first, second, setup!])
    const keep = () => secrets.add(tab.cookie().replace(/^\w+=/, ''))

    expect(await send('POST', '/api/links/use', { token: setup, name: 'Odo Fenn', password: 'too short 42 x' })).toBe(422)
    expect(await send('POST', '/api/links/use', { token: setup, name: 'Odo Fenn', password: first })).toBe(200)
    keep()
    expect(await send('POST', '/api/links/use', { token: setup, name: 'Other One', password: first })).toBe(410)
    // Every way in, the wrong ones too: a wrong password, a wrong form, broken JSON, a body too large, a field too many.
    expect(await send('POST', '/api/session', { name: 'Odo Fenn', password: second })).toBe(401)
    expect(await send('POST', '/api/session', { name: second, password: first })).toBe(401)
    expect(await send('POST', '/api/session', { name: 'Odo Fenn', password: [second] })).toBe(400)
    expect(await send('POST', '/api/session', { name: 'Odo Fenn', password: second, [`x ${'y'.repeat(20)}`]: second })).toBe(400)
    // Too large: refused while it is still being sent, so the reply may not be read.
    const large = send('POST', '/api/session', { name: 'Odo Fenn', password: second.padEnd(3 * 2 ** 20) })
    expect([413, 'cut off']).toContain(await large.catch(() => 'cut off'))
    expect(await send('POST', '/api/session', { name: 'Odo Fenn', password: first })).toBe(200)
    keep()
    expect(await send('POST', '/api/session/password', { old: second, password: second })).toBe(401)
    expect(await send('POST', '/api/session/password', { old: first, password: second })).toBe(200)
    keep()
    const added = await tab.send('POST', '/api/people', { name: 'Ruth Alder', role: 'operator', reason: 'joins the shift' })
    const token = (added.json() as { path: string }).path.split('/').at(-1)!
    secrets.add(token)
    const other = browser(base!)
    expect((await other.send('POST', '/api/links/use', { token, name: null, password: first })).status).toBe(200)
    secrets.add(other.cookie().replace(/^\w+=/, ''))
    expect((await other.send('POST', '/api/runs/1/acts', { kind: 'comment', alarm: null, text: 'seen' })).status).toBe(200)
    expect(await send('DELETE', '/api/session')).toBe(200)
    await stop(child)

    expect(secrets.size).toBe(8)
    const logs = [...child.out, ...child.err].filter((line) => !link.test(line)).join('\n')
    expect(child.err).toEqual([])
    const files = readdirSync(data).map((f) => readFileSync(join(data, f)))
    for (const secret of secrets) {
      expect(logs).not.toContain(secret)
      expect(replies.join('\n')).not.toContain(secret)
      for (const bytes of files) expect(bytes.includes(secret)).toBe(false)
    }
    const store = openStore(data, { readonly: true })
    const trail = store.audit.list().map((a) => `${a.person}: ${a.act}`)
    expect(trail.filter((l) => !l.includes('person.'))).toEqual([
      'Odo Fenn: sign-in.refused',
      'nobody: sign-in.refused',
      'Odo Fenn: sign-in',
      // The session that the browser had before.
      'Odo Fenn: sign-out',
      'Odo Fenn: sign-in.refused',
      'Odo Fenn: sign-out',
    ])
    expect(trail[0]).toBe('at the machine: person.administrator-link')
    store.close()

    // The next start has no link to give, unless somebody at the machine asks for one.
    const again = serve(data, '--skid', heronFile)
    await again.line(/Advisory only/)
    expect(again.out.some((l) => link.test(l))).toBe(false)
    await stop(again)
    const asked = serve(data, '--skid', heronFile, '--new-administrator-link')
    await asked.line(link)
    await stop(asked)
  }, 60_000)
})

describe('listening beyond this machine', () => {
  const run = async (...args: string[]) => {
    const child = start(main, ['serve', '--data', tempDir(), '--port', '0', ...args])
    return { code: await child.ended, err: child.err.join('\n') }
  }
  // REC-07
  it.each([
    ['the demo', ['--host', '0.0.0.0']],
    ['a skid', ['--host', '0.0.0.0', '--skid', heronFile]],
    ['a skid behind a proxy', ['--public-url', 'https://skids.example', '--trust-proxy', '127.0.0.1', '--skid', heronFile]],
  ])('is refused for %s while nobody could sign in: one line with the way out, exit code 2', async (_, args) => {
    const { code, err } = await run(...args)
    expect([code, err.split('\n').length]).toEqual([2, 1])
    expect(err).toMatch(/nobody yet who could sign in; .*--new-administrator-link/)
  })
  it.each([
    ['a key without its certificate', ['--tls-key', heronFile], /belong together/],
    ['a certificate that is none', ['--tls-cert', heronFile, '--tls-key', heronFile], /no certificate and its key; .*PEM/],
    ['a proxy without its address', ['--trust-proxy', '127.0.0.1'], /--public-url/],
    ['a proxy that is a name', ['--trust-proxy', 'everybody', '--public-url', 'https://a.example'], /192\.0\.2\.7/],
    ['a public address with a path', ['--public-url', 'https://a.example/x'], /--public-url needs an address/],
    ['an idle time of nothing', ['--idle', '0'], /--idle needs a whole number from 1/],
  ])('%s is refused with exit code 2', async (_, args, says) => {
    const { code, err } = await run(...args)
    expect(code).toBe(2)
    expect(err).toMatch(says)
  })
  it('speaks TLS 1.2 or later with the certificate given, and people sign in with a cookie for https alone', async () => {
    const data = tempDir()
    const { cert, key } = selfSigned()
    writeFileSync(join(data, 'cert.pem'), cert)
    writeFileSync(join(data, 'key.pem'), key, { mode: 0o600 })
    const made = serve(data, '--new-administrator-link')
    const [, base] = await made.line(url)
    const [, , token] = await made.line(link)
    expect((await browser(base!).send('POST', '/api/links/use', { token, name: 'Odo Fenn', password: first })).status).toBe(200)
    await stop(made)
    const child = serve(data, '--host', '0.0.0.0', '--tls-cert', join(data, 'cert.pem'), '--tls-key', join(data, 'key.pem'))
    const [, outside] = await child.line(url)
    const port = new URL(outside!).port
    expect(outside).toMatch(/^https:/)
    const ask = (method: string, path: string, body: unknown, more: object = {}) =>
      new Promise<{ status: number; cookie: string }>((done, fail) => {
        const r = request(
          {
            host: '127.0.0.1', port, method, path, ca: cert, servername: 'localhost',
            headers: { host: `localhost:${port}`, origin: `https://localhost:${port}`, 'content-type': 'application/json' },
            ...more,
          },
          (reply) => {
            reply.resume()
            reply.on('end', () => done({ status: reply.statusCode ?? 0, cookie: String(reply.headers['set-cookie']) }))
          },
        ) // biome-ignore format: a list
        r.on('error', fail)
        r.end(JSON.stringify(body))
      })
    const reply = await ask('POST', '/api/session', { name: 'Odo Fenn', password: first })
    expect(reply.status).toBe(200)
    expect(reply.cookie).toMatch(/^__Host-clearbore=[\w-]{43}; Path=\/; HttpOnly; Secure; SameSite=Strict$/)
    const page = new WebSocket(`wss://127.0.0.1:${port}/ws`, {
      ca: cert,
      headers: { host: `localhost:${port}`, origin: `https://localhost:${port}`, cookie: reply.cookie.split(';')[0]! },
    })
    const hello = await new Promise<string>((done, fail) => {
      page.once('message', (data) => done(String(data)))
      page.once('error', fail)
    })
    expect(JSON.parse(hello)).toMatchObject({ type: 'hello', runs: [{ skid: 'heron' }] })
    page.terminate()
    // Nothing is shown to whom nobody knows, no demo person acts, and an old protocol is not spoken.
    expect((await ask('GET', '/api/runs', undefined)).status).toBe(401)
    await expect(ask('GET', '/api/service', undefined, { maxVersion: 'TLSv1.1', minVersion: 'TLSv1' })).rejects.toThrow()
    await stop(child)
  }, 60_000)
})
