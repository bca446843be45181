import type { ClientMessage, ServerMessage } from '../server/wire/index.ts'
import { backoffMs } from './model/backoff.ts'

/** No message for so long: the page is cut off. The server beats each second, so two beats are missing. */
export const silentMs = 2000

export interface Link {
  /** False from the moment it closed, or from two seconds without a beat. */
  readonly up: boolean
  /** When something last came, by this machine's monotonic clock; null before the first. */
  readonly heardAt: number | null
  /** Wait until the next try; null while connected or connecting. */
  readonly retryInMs: number | null
}

interface Hooks {
  message(message: ServerMessage): void
  /** The link came up: subscribe again. */
  open(): void
  /** The server let this page go, or does not let it in: its session may be over. */
  refused(): void
  link(link: Link): void
}

/** Close code by which the server lets a page go whose session is over. */
const signedOut = 4401

/** The socket that keeps itself up once it may: tries again with growing waits, tells when nothing comes. */
export function openFeed(url: string, hooks: Hooks) {
  let socket: WebSocket | null = null
  let heardAt: number | null = null
  let attempt = 0
  let retryAt: number | null = null
  let wanted = false
  let told = ''

  const up = (): boolean => socket?.readyState === WebSocket.OPEN && heardAt !== null && performance.now() - heardAt < silentMs
  function tell(): void {
    const retryInMs = retryAt === null ? null : Math.max(0, retryAt - performance.now())
    const link = { up: up(), heardAt, retryInMs }
    const text = `${link.up} ${retryInMs === null ? '' : Math.ceil(retryInMs / 1000)}`
    if (text === told && link.up) return
    told = text
    hooks.link(link)
  }

  function connect(): void {
    retryAt = null
    const next = new WebSocket(url)
    socket = next
    next.addEventListener('open', () => {
      heardAt = performance.now()
      hooks.open()
      tell()
    })
    next.addEventListener('message', (event: MessageEvent<string>) => {
      heardAt = performance.now()
      attempt = 0
      hooks.message(JSON.parse(event.data) as ServerMessage)
      tell()
    })
    next.addEventListener('close', (event) => {
      if (!wanted || socket !== next) return
      socket = null
      if (event.code === signedOut) hooks.refused()
      retryAt = performance.now() + backoffMs(attempt++, Math.random())
      tell()
    })
  }

  const timer = setInterval(() => {
    if (!wanted) return
    if (retryAt !== null && performance.now() >= retryAt) connect()
    // A half-dead link (laptop woke, cable pulled) never says that it closed: start again after six silent seconds.
    else if (socket !== null && heardAt !== null && performance.now() - heardAt > 3 * silentMs) {
      const dead = socket
      socket = null
      dead.close()
      retryAt = performance.now() + backoffMs(attempt++, Math.random())
    }
    tell()
  }, 250)

  return {
    send(message: ClientMessage): void {
      if (socket?.readyState === WebSocket.OPEN) socket.send(JSON.stringify(message))
    },
    /** Connects, or lets go: nothing may be seen without a person. */
    want(on: boolean): void {
      if (on === wanted) return
      wanted = on
      const was = socket
      socket = null
      retryAt = null
      if (on) connect()
      else was?.close()
    },
    close(): void {
      wanted = false
      clearInterval(timer)
      socket?.close()
    },
  }
}
export type Feed = ReturnType<typeof openFeed>
