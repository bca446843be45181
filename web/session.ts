import type { Session } from '../server/wire/index.ts'
import { getJson, postJson } from './api.ts'

/** How often, at most, the server hears that somebody is at the page, and how often the page asks whether its session still holds. */
const everyMs = 60_000

/** Who is signed in on this page, as the server says. */
export function openSession(changed: (session: Session) => void) {
  let now: Session | null = null
  let saidMs = -Infinity

  function take(session: Session): Session {
    const isNew = now === null || JSON.stringify({ ...now, endsMs: 0 }) !== JSON.stringify({ ...session, endsMs: 0 })
    now = session
    if (isNew) changed(session)
    return session
  }
  const load = async (): Promise<Session> => take(await getJson<Session>('/api/session'))
  const quietly = (asked: Promise<unknown>): void => {
    // A server that does not answer is told by the board of the page; the next try comes by itself.
    asked.catch(() => undefined)
  }

  for (const what of ['pointerdown', 'keydown'] as const)
    window.addEventListener(what, () => {
      if (now?.how !== 'signed-in' || now.resting || performance.now() - saidMs < everyMs) return
      saidMs = performance.now()
      quietly(postJson<Session>('/api/session/seen', undefined).then(take))
    })
  setInterval(() => {
    if (now?.how === 'signed-in') quietly(load())
  }, everyMs)

  return {
    now: (): Session | null => now,
    /** Asks the server. */
    load,
    /** What a call that signed in or out has answered. */
    take,
    person: (): string => now?.person?.name ?? '',
    /** Acts would be taken. */
    mayAct: (): boolean => now !== null && now.person !== null && !now.resting,
  }
}
export type SessionKeeper = ReturnType<typeof openSession>
