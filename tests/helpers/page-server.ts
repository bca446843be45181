import { createReadStream, existsSync } from 'node:fs'
import { createServer } from 'node:http'
import { extname, join, normalize } from 'node:path'
import { fileURLToPath } from 'node:url'
import { type WebSocket, WebSocketServer } from 'ws'
import type { ClientMessage, ServerMessage, Session } from '../../server/wire/index.ts'
import type { Scene } from './scene.ts'

const pages = fileURLToPath(new URL('../../dist/web', import.meta.url))
const types: Record<string, string> = {
  '.html': 'text/html; charset=utf-8',
  '.js': 'text/javascript',
  '.css': 'text/css',
  '.svg': 'image/svg+xml',
}
/** As strict as the real server's, so that a page that needs more fails here too. */
const policy =
  "default-src 'self'; style-src 'self'; script-src 'self'; img-src 'self'; connect-src 'self'; object-src 'none'; base-uri 'none'; frame-ancestors 'none'"

export const demoSession: Session = {
  person: { name: 'demo operator', role: 'engineer' },
  how: 'demo',
  resting: false,
  endsMs: null,
  mayRead: true,
  hasPeople: false,
  idleMs: 1_800_000,
}

/**
 * The built pages over a scripted scene: states that a real skid shows once a year (a flood, twelve segments, a bad sensor) can be set at will.
 * The wire is the real one; only what is said on it is invented.
 */
export async function servePages(first: Scene, port = 0) {
  let scene = first
  let session = demoSession
  let beating = true
  let live = true
  let seq = 0
  const posted: unknown[] = []
  let refusal: ((body: { kind: string }) => string | null) | null = null
  const extra = new Map<string, unknown>()
  const sockets = new Set<WebSocket>()
  const http = createServer((request, reply) => {
    const url = new URL(request.url ?? '/', 'http://localhost')
    reply.setHeader('content-security-policy', policy)
    const json = (body: unknown, status = 200) => {
      reply.writeHead(status, { 'content-type': 'application/json' })
      reply.end(JSON.stringify(body))
    }
    if (url.pathname.startsWith('/api/')) {
      const path = url.pathname.slice(4)
      const n = (name: string) => Number(url.searchParams.get(name))
      if (request.method === 'POST' && path === '/runs/1/acts') {
        let text = ''
        request.on('data', (chunk: Buffer) => {
          text += chunk.toString()
        })
        request.on('end', () => {
          const body = JSON.parse(text) as { kind: string }
          posted.push(body)
          const reason = refusal?.(body) ?? null
          json({ seq: 1, act: { ...body, tMs: scene.endMs }, transitions: reason === null ? [] : [{ outcome: 'refused', reason }] })
        })
        return
      }
      if (path === '/session' || path === '/session/seen') return json(session)
      if (path === '/service') return json(scene.service)
      if (path === '/runs') return json(live ? [scene.row] : [])
      if (path === '/runs/1') return json(scene.detail)
      if (path === '/runs/1/marks') return json(scene.marks)
      if (path === '/runs/1/alarms') return json(scene.state.alarms)
      if (path === '/runs/1/state') return json(scene.stateAt(url.searchParams.has('atMs') ? n('atMs') : scene.endMs))
      if (path === '/runs/1/trends') return json(scene.trends(n('fromMs'), n('toMs'), n('buckets')))
      if (extra.has(path)) return json(extra.get(path))
      return json({ code: 'HTTP_404', message: `nothing at ${url.pathname}`, hint: null, place: null }, 404)
    }
    const file = join(pages, normalize(url.pathname === '/' ? '/index.html' : url.pathname))
    if (!file.startsWith(pages) || !existsSync(file))
      return json({ code: 'HTTP_404', message: 'no such page', hint: null, place: null }, 404)
    reply.writeHead(200, { 'content-type': types[extname(file)] ?? 'application/octet-stream' })
    createReadStream(file).pipe(reply)
  })
  const ws = new WebSocketServer({ server: http, path: '/ws' })
  const send = (socket: WebSocket, m: ServerMessage) => socket.send(JSON.stringify(m))
  ws.on('connection', (socket) => {
    sockets.add(socket)
    socket.on('close', () => sockets.delete(socket))
    send(socket, { type: 'hello', api: 1, version: '0.0.0', runs: live ? [scene.row] : [] })
    socket.on('message', (data: Buffer) => {
      const m = JSON.parse(data.toString()) as ClientMessage
      if (m.type === 'subscribe')
        send(socket, { type: 'snapshot', run: 1, seq, state: scene.state, steps: [], readings: [], moreFromMs: null })
    })
  })
  const beat = setInterval(() => {
    if (!beating) return
    for (const s of sockets)
      send(s, { type: 'heartbeat', wallMs: 0, runs: [{ run: 1, clock: scene.state.clock, lastRowMs: scene.state.data.lastRowMs }] })
  }, 500)
  await new Promise<void>((done) => http.listen(port, '127.0.0.1', done))
  const address = http.address()
  const at = typeof address === 'object' && address !== null ? address.port : 0
  return {
    url: `http://127.0.0.1:${at}`,
    port: at,
    posted,
    /** From now on the run stands like this; pages hear it as a delta. */
    show(next: Scene): void {
      scene = next
      seq++
      for (const s of sockets) send(s, { type: 'delta', run: 1, seq, state: scene.state, alarms: scene.state.alarms })
    },
    /** Who is signed in from now on; pages see it when they ask next. */
    signed(next: Session): void {
      session = next
    },
    /** What the server refuses an act for, by its body; null: nothing. */
    refuse(by: ((body: { kind: string }) => string | null) | null): void {
      refusal = by
    },
    /** Answers `GET /api` + path with a body. */
    answer: (path: string, body: unknown): void => {
      extra.set(path, body)
    },
    runs(on: boolean): void {
      live = on
      for (const s of sockets) send(s, { type: 'runs', runs: on ? [scene.row] : [] })
    },
    silence(on: boolean): void {
      beating = !on
    },
    async close(): Promise<void> {
      clearInterval(beat)
      for (const s of sockets) s.terminate()
      ws.close()
      http.closeAllConnections()
      await new Promise((done) => http.close(done))
    },
  }
}
export type PageServer = Awaited<ReturnType<typeof servePages>>
