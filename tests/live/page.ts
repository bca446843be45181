import { WebSocket } from 'ws'
import type { ClientMessage, ServerMessage } from '../../server/wire/socket.ts'

/** A page's end of the websocket: what came, and a way to wait for what is to come. */
export async function openPage(port: number, headers: Record<string, string> = {}) {
  const socket = new WebSocket(`ws://127.0.0.1:${port}/ws`, { headers })
  const messages: ServerMessage[] = []
  const waiting: { test: (m: ServerMessage) => boolean; done: (m: ServerMessage) => void }[] = []
  socket.on('message', (data) => {
    const message = JSON.parse(String(data)) as ServerMessage
    messages.push(message)
    for (const w of [...waiting])
      if (w.test(message)) {
        waiting.splice(waiting.indexOf(w), 1)
        w.done(message)
      }
  })
  await new Promise<void>((done, fail) => {
    socket.once('open', done)
    socket.once('error', fail)
  })
  return {
    socket,
    messages,
    send: (m: ClientMessage | string): void => socket.send(typeof m === 'string' ? m : JSON.stringify(m)),
    /** The next message of a type, those that came already left out. */
    next: <T extends ServerMessage['type']>(type: T, more: (m: Extract<ServerMessage, { type: T }>) => boolean = () => true) =>
      new Promise<Extract<ServerMessage, { type: T }>>((done) =>
        waiting.push({
          test: (m) => m.type === type && more(m as Extract<ServerMessage, { type: T }>),
          done: (m) => done(m as Extract<ServerMessage, { type: T }>),
        }),
      ),
    closed: () => new Promise<number>((done) => socket.once('close', done)),
    of: <T extends ServerMessage['type']>(type: T) =>
      messages.filter((m) => m.type === type) as Extract<ServerMessage, { type: T }>[],
  }
}
export type Page = Awaited<ReturnType<typeof openPage>>
