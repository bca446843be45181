import { request } from 'node:http'
import { connect } from 'node:net'
import { WebSocket } from 'ws'

/** Where the storm blows and what it knows: paths of the OpenAPI text, cookies of people it may misuse. */
export interface Target {
  readonly port: number
  readonly paths: readonly string[]
  /** Of a person who may read, from a page of ours: all is allowed that changes nothing. */
  readonly reader: string
  /** Of an engineer and an administrator; used as a foreign page would, so nothing may come of them. */
  readonly stolen: readonly string[]
  /** Of an engineer, from a page of ours: what is well formed is taken, and told. */
  readonly writer: string
}

export interface Answers {
  /** Statuses with their number; `cut` where the server closed without one, `socket` frames sent. */
  readonly statuses: Record<string, number>
  /** Requests of the writer that were taken and may have written, as method and path without its query. */
  readonly taken: readonly string[]
}

const wordsThatHurt = [
  '..', '../../etc/passwd', '..%2f..%2fetc%2fpasswd', '%2e%2e%2f', '..%5c..%5cwindows', '%00', 'a%00b', '%ff', '%E0%A4%A', '%c0%ae%c0%ae', '.', '',
  "' OR '1'='1", "1; DROP TABLE run;--", "1' UNION SELECT password FROM person--", '" OR ""="', '1) OR (1=1', '-1', '0', '1e9', '1.5', '9007199254740993',
  'NaN', 'Infinity', '0x10', 'null', 'undefined', 'true', '[object Object]', '__proto__', 'constructor', 'hasOwnProperty', 'toString',
  '<script>alert(1)</script>', '<img src=x onerror=alert(1)>', '"><svg/onload=alert(1)>', 'javascript:alert(1)', '{{7*7}}', '#{7*7}',
  '=HYPERLINK("http://x")', '@SUM(1)', '+1', '-1+1', '\u202egnp.exe', '\u0000', '\ud800', 'ｓｃｒｉｐｔ', '😀'.repeat(40), 'é'.normalize('NFD'), ' ', '\t', '\r\n', '\r\nset-cookie: a=b',
  '$(reboot)', '`reboot`', '|reboot', ';reboot', '&&reboot', '%n%s%x', 'A'.repeat(300), 'A'.repeat(9000), '*', '//', '\\', 'C:\\', '/dev/null', 'file:///etc/passwd', 'http://127.0.0.1:1/',
] as const // biome-ignore format: a list
const methods = ['GET', 'HEAD', 'POST', 'PUT', 'DELETE', 'PATCH', 'OPTIONS', 'TRACE', 'PROPFIND', 'MKCOL', 'PURGE', 'LOCK'] as const
const types = [
  'application/json', 'application/json; charset=utf-16', 'application/json;charset=nonsense', 'text/plain', 'text/csv', 'application/octet-stream',
  'application/x-www-form-urlencoded', 'multipart/form-data; boundary=x', 'application/xml', '', 'a/b/c', 'application/json, text/csv', '__proto__',
] as const // biome-ignore format: a list

/** Numbers in [0, 1) from a seed, independent enough that every combination of choices comes up (mulberry32; a plain congruential one repeats pairs). */
function random(seed: number): () => number {
  let a = seed >>> 0
  return () => {
    a = (a + 0x6d2b79f5) >>> 0
    let t = Math.imul(a ^ (a >>> 15), a | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4_294_967_296
  }
}

/** Where most of what is sent is read. */
const busy = [
  '/api/runs/{run}/acts',
  '/api/runs/{run}/acts',
  '/api/uploads',
  '/api/skids/{skid}/settings',
  '/api/session',
  '/api/links/use',
] as const

/** A seeded maker of requests nobody should send. */
export function hostile(seed: number, target: Target) {
  const next = random(seed)
  const taken: string[] = []
  const int = (n: number): number => Math.floor(n * next())
  const one = <T>(of: readonly T[]): T => of[int(of.length)]!
  const some = (share: number): boolean => next() < share
  const own = `127.0.0.1:${target.port}`
  const latin = (text: string): string => text.replace(/[^\x20-\x7e\x80-\xff]/g, '?')

  function json(depth = 0): unknown {
    const leaf = (): unknown =>
      one<() => unknown>([
        () => one(wordsThatHurt),
        () => null,
        () => int(1e9) - 5e8,
        () => (next() - 0.5) * 10 ** (int(600) - 300),
        () => some(0.5),
        () => '',
        () => [],
        () => ({}),
      ])()
    if (depth > 3 || some(0.3)) return leaf()
    if (some(0.3)) return Array.from({ length: int(5) }, () => json(depth + 1))
    const names = [
      'kind',
      'alarm',
      'reason',
      'text',
      'name',
      'password',
      'token',
      'role',
      'skid',
      'title',
      'person',
      'segment',
      'limit',
      'value',
      'start',
    ]
    return Object.fromEntries(Array.from({ length: int(6) }, () => [some(0.2) ? one(wordsThatHurt) : one(names), json(depth + 1)]))
  }
  /** A form of an act, a sign-in, an upload, with something wrong or nothing. */
  const nearly = (): unknown => ({
    ...one<() => object>([
      () => ({ kind: 'comment', alarm: one([null, 1, 99]), text: one(wordsThatHurt) }),
      () => ({
        kind: 'limit',
        segment: some(0.7) ? 'R1' : one(wordsThatHurt),
        limit: 'dpHighBar',
        value: one([5, null, -1e300]),
        reason: one(wordsThatHurt),
      }),
      () => ({
        kind: one(['acknowledge', 'reset', 'open-valve', '__proto__']),
        alarm: one([1, 0, 2 ** 53, -1]),
        reason: 'because I may',
      }),
      () => ({ kind: 'shelve', alarm: 1, minutes: one([5, 1e9, -1]), reason: one(wordsThatHurt) }),
      () => ({
        kind: 'event',
        event: one(['karl-fischer', 'drum-change', one(wordsThatHurt)]),
        value: one([null, 40, 1e300]),
        unit: one([null, 'ppm', one(wordsThatHurt)]),
        note: one(wordsThatHurt),
      }),
      () => ({
        kind: one(['out-of-service', 'in-service']),
        key: one(['flow:R1:flowLow', one(wordsThatHurt)]),
        reason: one(wordsThatHurt),
      }),
      () => ({
        kind: 'flush-step',
        segment: 'R1',
        step: one(['F0', one(wordsThatHurt)]),
        state: one(['started', 'ended']),
        reason: one(wordsThatHurt),
      }),
      () => ({ reason: one(wordsThatHurt), changes: json(1), fromMs: one([null, 0, 1e300]) }),
      () => ({ name: one(wordsThatHurt), password: one(wordsThatHurt) }),
      () => ({ token: one(wordsThatHurt), name: 'Mallory', password: 'a perfectly long one of mine' }),
      () => ({ name: 'Mallory Mole', role: 'administrator', reason: 'because I may' }),
      () => ({
        title: one(wordsThatHurt),
        skid: { name: one(wordsThatHurt), text: one(wordsThatHurt) },
        events: null,
        start: null,
      }),
      () => ({ title: 'x', skid: { ofRun: 1 }, events: { name: 'e.csv', text: one(wordsThatHurt) }, start: one(wordsThatHurt) }),
    ])(),
    ...(some(0.15) ? { [one(wordsThatHurt)]: json(2) } : {}),
  })
  function body(): Buffer {
    return one<() => Buffer>([
      () => Buffer.from(JSON.stringify(nearly())),
      () => Buffer.from(JSON.stringify(nearly())),
      () => Buffer.from(JSON.stringify(json()) ?? ''),
      () => Buffer.from(`{"__proto__":{"role":"administrator"},"kind":"comment","kind":"limit","text":"x"}`),
      () => Buffer.from('['.repeat(1 + int(20_000))),
      () => Buffer.from(`{"a":${'{"a":'.repeat(int(2000))}1`),
      () => Buffer.from(`{"value":1e999,"alarm":-0,"text":"\\ud800"}`),
      () => Buffer.from('{"kind":"comment"', 'utf16le'),
      () => Buffer.from(Array.from({ length: int(400) }, () => int(256))),
      () => Buffer.from([0xef, 0xbb, 0xbf, 0x7b, 0x7d]),
      () => Buffer.alloc(some(0.02) ? 3 * 2 ** 20 : int(4000), 'a,b\n"'),
      () => Buffer.alloc(0),
    ])()
  }
  const value = (): string => {
    const word = one(wordsThatHurt)
    return some(0.6) ? encodeURIComponent(word.replace('\ud800', '\ufffd')) : latin(word).replace(/[ \t\r\n]/g, '+')
  }
  function path(): string {
    let p = one(some(0.3) ? busy : target.paths).replace(/\{(\w+)\}/g, (_, name: string) =>
      some(0.75) ? (name === 'run' ? '1' : name === 'person' ? '2' : 'heron') : value(),
    )
    if (some(0.15))
      p = one([
        `/${value()}`,
        '/ws',
        `/api/${value()}`,
        `/assets/${value()}`,
        `/${value()}/../api/people`,
        `//api/runs`,
        `/api/runs/1/../../people`,
        '/.git/config',
        '/api/runs/1/',
      ])
    if (some(0.3))
      p += `?${Array.from({ length: 1 + int(4) }, () => `${one(['atMs', 'fromMs', 'toMs', 'buckets', 'tags', 'segment', 'ratio', 'kind', 'from', 'to', '__proto__', 'a[]'])}=${value()}`).join('&')}`
    return p.slice(0, some(0.02) ? 20_000 : 4000)
  }
  function headers(): Record<string, string> {
    const h: Record<string, string> = {
      host: some(0.9)
        ? own
        : latin(one(['rebound.example', '', 'localhost:x', '127.0.0.1.rebound.example', one(wordsThatHurt).trim()])).trim(),
    }
    if (some(0.9)) h['content-type'] = some(0.7) ? 'application/json' : one(types)
    // People of ours on our page, somebody's session on a foreign page, or nobody.
    const who = int(6)
    if (who >= 4) Object.assign(h, { cookie: who === 4 ? target.reader : target.writer, origin: `http://${own}` })
    else if (who === 0) Object.assign(h, { cookie: target.reader, origin: `http://${own}` })
    else if (who === 1) {
      h['cookie'] = one(target.stolen)
      if (some(0.7)) h['origin'] = one(['http://rebound.example', 'null', `https://${own}`, `http://127.0.0.1:${target.port + 1}`])
      if (some(0.3)) h['sec-fetch-site'] = one(['cross-site', 'same-site', 'none'])
    } else if (who === 2)
      h['cookie'] = latin(
        one([
          `clearbore=${'A'.repeat(43)}`,
          `clearbore=${value()}`,
          'clearbore',
          `a=${'b'.repeat(3000)}`,
          ';;;=',
          `__Host-clearbore=${'B'.repeat(43)}`,
        ]),
      ).trim()
    // Each from an address of its own, so that the storm is not only met by the limit of a rate.
    h['x-forwarded-for'] = some(0.95) ? `10.${int(250)}.${int(250)}.${1 + int(250)}` : latin(one(wordsThatHurt)).trim()
    if (some(0.1))
      h[
        one([
          'range',
          'if-none-match',
          'if-modified-since',
          'accept',
          'accept-encoding',
          'x-forwarded-host',
          'x-http-method-override',
          'forwarded',
          'authorization',
        ])
      ] = latin(one(wordsThatHurt)).trim()
    return h
  }

  /** `inside`: an engineer at our page sends nonsense that is nearly right. */
  const plain = (method: string, inside = false): Promise<string> =>
    new Promise((done) => {
      const sent = inside
        ? Buffer.from(JSON.stringify(nearly()))
        : method === 'GET' || method === 'HEAD' || some(0.1)
          ? null
          : body()
      const where = inside ? one(busy).replace('{run}', '1').replace('{skid}', 'heron') : path().replace(/[^\x21-\xff]/g, '?')
      const said = headers()
      if (inside)
        Object.assign(said, { host: own, 'content-type': 'application/json', cookie: target.writer, origin: `http://${own}` })
      // Whoever signs out, or changes the password, would be nobody from then on.
      if (where.startsWith('/api/session')) delete said['cookie']
      const r = request(
        {
          host: '127.0.0.1',
          port: target.port,
          method,
          path: where,
          headers: said,
          timeout: 20_000,
        },
        (reply) => {
          reply.resume()
          reply.on('end', () => {
            const status = reply.statusCode ?? 0
            if (status < 300 && !['GET', 'HEAD', 'OPTIONS'].includes(method) && said['cookie'] === target.writer)
              taken.push(`${method} ${where.split('?')[0]}`)
            done(String(status))
          })
          reply.on('error', () => done('cut'))
        },
      )
      r.on('timeout', () => r.destroy(new Error('no answer in 20 s')))
      r.on('error', (error) => done(error.message.includes('20 s') ? 'silent' : 'cut'))
      if (sent !== null) r.write(sent)
      r.end()
    })

  /** Bytes that are hardly HTTP. */
  const raw = (): Promise<string> =>
    new Promise((done) => {
      const host = `Host: 127.0.0.1:${target.port}\r\n`
      const text = one([
        'GET / HTTP/9.9\r\n\r\n',
        `GET / HTTP/1.1\r\n${host}Content-Length: 5\r\nTransfer-Encoding: chunked\r\n\r\n0\r\n\r\n`,
        `POST /api/session HTTP/1.1\r\n${host}Content-Length: -1\r\n\r\n`,
        `POST /api/session HTTP/1.1\r\n${host}Content-Type: application/json\r\nTransfer-Encoding: chunked\r\n\r\nzz\r\n{}\r\n0\r\n\r\n`,
        `GET /api/runs HTTP/1.1\r\n${host}X: ${'y'.repeat(20_000)}\r\n\r\n`,
        `GET /api/runs HTTP/1.1\r\n${host}${host}\r\n`,
        `GET /api/runs HTTP/1.1\r\n\r\n`,
        `GET http://rebound.example/api/runs HTTP/1.1\r\n${host}\r\n`,
        `CONNECT 127.0.0.1:1 HTTP/1.1\r\n${host}\r\n`,
        `GET /ws HTTP/1.1\r\n${host}Upgrade: websocket\r\nConnection: Upgrade\r\nSec-WebSocket-Key: x\r\nSec-WebSocket-Version: 13\r\n\r\n`,
        `GET /ws HTTP/1.1\r\n${host}Upgrade: websocket\r\nConnection: Upgrade\r\nSec-WebSocket-Version: 99\r\n\r\n`,
        `GET //[ HTTP/1.1\r\n${host}Upgrade: websocket\r\nConnection: Upgrade\r\n\r\n`,
        `GET /api/runs HTTP/1.1\r\n${host}Upgrade: h2c\r\nConnection: Upgrade, HTTP2-Settings\r\nHTTP2-Settings: AAA\r\n\r\n`,
        'PRI * HTTP/2.0\r\n\r\nSM\r\n\r\n',
        '\x16\x03\x01\x02\x00\x01\x00\x01\xfc\x03\x03',
        '\0\0\0\0',
        `${one(wordsThatHurt)}\r\n\r\n`,
      ])
      const socket = connect(target.port, '127.0.0.1', () => socket.write(Buffer.from(text, 'latin1')))
      let got = ''
      socket.setTimeout(400, () => socket.destroy())
      socket.on('data', (d) => {
        got += d.toString('latin1')
        if (got.includes('\r\n\r\n')) socket.end()
      })
      socket.on('error', () => undefined)
      socket.on('close', () => done(/^HTTP\/1\.1 (\d{3})/.exec(got)?.[1] ?? 'cut'))
    })

  /** Frames that no page sends. */
  const frames = (): Promise<string> =>
    new Promise((done) => {
      const socket = new WebSocket(`ws://${own}/ws`, {
        headers: some(0.8)
          ? { cookie: target.reader, origin: `http://${own}` }
          : { cookie: one(target.stolen), origin: 'http://rebound.example' },
      })
      socket.on('error', () => undefined)
      socket.on('unexpected-response', (request, reply) => {
        request.destroy()
        done(String(reply.statusCode))
      })
      socket.on('close', () => done('socket'))
      socket.on('open', () => {
        for (let i = 0; i < 1 + int(8); i++)
          one<() => void>([
            () => socket.send(one(wordsThatHurt)),
            () => socket.send(JSON.stringify(json())),
            () =>
              socket.send(
                JSON.stringify({
                  type: one(['subscribe', 'unsubscribe', '__proto__']),
                  run: json(3),
                  topics: json(2),
                  sinceMs: json(3),
                }),
              ),
            () =>
              socket.send(
                JSON.stringify({ type: 'subscribe', run: 1, topics: ['state', 'steps'], sinceMs: one([null, -1e300, 1e300, 0]) }),
              ),
            () => socket.send(body().subarray(0, 4000), { binary: some(0.5) }),
            () => socket.send('x'.repeat(20_000)),
            () => socket.ping(Buffer.alloc(125, 'p')),
            () =>
              (socket as unknown as { _socket: { write(b: Buffer): void } })._socket.write(
                Buffer.from([int(256), int(256), int(256), int(256)]),
              ),
            () => socket.close(one([1000, 1001, 3000, 4999]), 'x'),
          ])()
        setTimeout(() => socket.terminate(), 30)
      })
    })

  // One request; gives the status, or how else it ended.
  return {
    taken,
    ask: (): Promise<string> =>
      some(0.06)
        ? raw()
        : some(0.08)
          ? frames()
          : some(0.15)
            ? plain('POST', true)
            : plain(some(0.4) ? 'POST' : some(0.4) ? 'GET' : one(methods)),
  }
}

/** Sends so many, some at the same time. */
export async function storm(seed: number, count: number, target: Target, atOnce = 6): Promise<Answers> {
  const { ask, taken } = hostile(seed, target)
  const statuses: Record<string, number> = {}
  let left = count
  await Promise.all(
    Array.from({ length: atOnce }, async () => {
      while (left-- > 0) {
        const answer = await ask()
        statuses[answer] = (statuses[answer] ?? 0) + 1
      }
    }),
  )
  return { statuses, taken }
}
