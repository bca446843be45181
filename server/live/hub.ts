import type { Server } from 'node:http'
import type { Duplex } from 'node:stream'
import { type WebSocket, WebSocketServer } from 'ws'
import type { LiveState } from '../wire/live.ts'
import type { RunRow } from '../wire/run.ts'
import type { Beat, ServerMessage } from '../wire/socket.ts'
import type { ReadingFrame, StepPoint } from '../wire/trend.ts'
import { type Connection, createConnection, type Fresh } from './connection.ts'

/** What the hub asks of the monitor when a page subscribes. */
export interface HubSource {
  runs(): RunRow[]
  /** Of the live runs. */
  beats(): Beat[]
  /** Null for a run that is not live. */
  state(run: number): LiveState | null
  /** What a page that was cut off at `sinceMs` has missed. */
  missed(
    run: number,
    sinceMs: number,
  ): { steps: readonly StepPoint[]; readings: readonly ReadingFrame[]; moreFromMs: number | null }
}

export interface HubOptions {
  readonly source: HubSource
  readonly version: string
  readonly wallMs: () => number
  /** False refuses the upgrade: a foreign Host or Origin. */
  readonly admits: (host: string | undefined, origin: string | undefined) => boolean
  readonly maxConnections?: number
  readonly heartbeatMs?: number
}

/**
 * The websockets: who is subscribed to what, a heartbeat each second, and deltas. A page that does not take its messages is not waited
 * for: its deltas are dropped and it gets one snapshot when it has caught up (see connection.ts).
 */
export function createHub({ source, version, wallMs, admits, maxConnections = 64, heartbeatMs = 1000 }: HubOptions) {
  const sockets = new WebSocketServer({ noServer: true, maxPayload: 16_384, perMessageDeflate: false })
  const connections = new Set<Connection>()
  let messages = 0
  const all = (message: ServerMessage): void => {
    const text = JSON.stringify(message)
    for (const c of connections) {
      c.send(text)
      messages++
    }
  }
  const beat = setInterval(() => {
    if (connections.size === 0) return
    all({ type: 'heartbeat', wallMs: wallMs(), runs: source.beats() })
    for (const c of connections) c.catchUp()
  }, heartbeatMs)
  beat.unref()

  function join(socket: WebSocket): void {
    const connection = createConnection(socket, source)
    connections.add(connection)
    socket.on('close', () => connections.delete(connection))
    connection.send(JSON.stringify({ type: 'hello', api: 1, version, runs: source.runs() } satisfies ServerMessage))
  }

  function refuse(socket: Duplex, status: string): void {
    socket.end(`HTTP/1.1 ${status}\r\nConnection: close\r\nContent-Length: 0\r\n\r\n`)
  }

  return {
    /** Takes upgrades of this server at `/ws`. */
    attach(server: Server): void {
      server.on('upgrade', (request, socket, head) => {
        socket.on('error', () => socket.destroy())
        if (new URL(request.url ?? '/', 'http://x').pathname !== '/ws') return refuse(socket, '404 Not Found')
        if (!admits(request.headers.host, request.headers.origin)) return refuse(socket, '403 Forbidden')
        if (connections.size >= maxConnections) return refuse(socket, '503 Service Unavailable')
        sockets.handleUpgrade(request, socket, head, join)
      })
    },
    news(run: number, fresh: Fresh): void {
      for (const c of connections) if (c.news(run, fresh)) messages++
    },
    runs(): void {
      if (connections.size > 0) all({ type: 'runs', runs: source.runs() })
    },
    /** Connections, and messages sent since the start. */
    counts: () => ({ connections: connections.size, messages }),
    close(): void {
      clearInterval(beat)
      for (const c of connections) c.close()
      sockets.close()
    },
  }
}
export type Hub = ReturnType<typeof createHub>
