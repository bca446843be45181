import type { IncomingMessage, Server } from 'node:http'
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
  /** Refuses the upgrade (a foreign Host or Origin, nobody signed in), or says until when the page may stay. */
  readonly admit: (request: IncomingMessage) => { readonly refused: string } | { readonly holds: () => boolean }
  readonly maxConnections?: number
  readonly heartbeatMs?: number
}

/** Close code of a socket whose session ended. */
const signedOut = 4401

/**
 * The websockets: who is subscribed to what, a heartbeat each second, and deltas. A page that does not take its messages is not waited
 * for: its deltas are dropped and it gets one snapshot when it has caught up (see connection.ts).
 */
export function createHub({ source, version, wallMs, admit, maxConnections = 64, heartbeatMs = 1000 }: HubOptions) {
  const sockets = new WebSocketServer({ noServer: true, maxPayload: 16_384, perMessageDeflate: false })
  const connections = new Map<Connection, () => boolean>()
  let messages = 0
  const all = (message: ServerMessage): void => {
    const text = JSON.stringify(message)
    for (const c of connections.keys()) {
      c.send(text)
      messages++
    }
  }
  const beat = setInterval(() => {
    review()
    if (connections.size === 0) return
    all({ type: 'heartbeat', wallMs: wallMs(), runs: source.beats() })
    for (const c of connections.keys()) c.catchUp()
  }, heartbeatMs)
  beat.unref()

  /** Pages whose session is over are let go. */
  function review(): void {
    for (const [c, holds] of connections) if (!holds()) c.close(signedOut, 'signed out')
  }

  function join(socket: WebSocket, holds: () => boolean): void {
    const connection = createConnection(socket, source)
    connections.set(connection, holds)
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
        // Not by URL: it throws for what a socket may send.
        if (request.url?.split('?')[0] !== '/ws') return refuse(socket, '404 Not Found')
        const admission = admit(request)
        if ('refused' in admission) return refuse(socket, admission.refused)
        if (connections.size >= maxConnections) return refuse(socket, '503 Service Unavailable')
        sockets.handleUpgrade(request, socket, head, (joined) => join(joined, admission.holds))
      })
    },
    news(run: number, fresh: Fresh): void {
      for (const c of connections.keys()) if (c.news(run, fresh)) messages++
    },
    runs(): void {
      if (connections.size > 0) all({ type: 'runs', runs: source.runs() })
    },
    review,
    /** Connections, and messages sent since the start. */
    counts: () => ({ connections: connections.size, messages }),
    close(): void {
      clearInterval(beat)
      for (const c of connections.keys()) c.close()
      sockets.close()
    },
  }
}
export type Hub = ReturnType<typeof createHub>
