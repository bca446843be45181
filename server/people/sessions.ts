import type { PersonRow } from '../store/people.ts'
import { aboutOf, type Desk, note } from './desk.ts'
import type { Role } from './roles.ts'
import { isToken, newToken, tokenHash } from './tokens.ts'

/** A person who is signed in. */
export interface Signed {
  readonly id: number
  readonly name: string
  readonly role: Role
  /** Nobody has been there for a while: it still reads, and acts after signing in again. */
  readonly resting: boolean
  readonly endsMs: number
}

/** How often a session's last use is written down [ms]. */
const seenEveryMs = 60_000

export function createSessions(desk: Desk) {
  const { store, wallMs, idleMs, sessionMs, changed } = desk

  function of(token: string): { signed: Signed; hash: Buffer; seenMs: number } | null {
    if (!isToken(token)) return null
    const hash = tokenHash(token)
    const found = store.people.session(hash)
    const now = wallMs()
    if (found === null || found.person.disabled || now - found.begunMs >= sessionMs) return null
    const { id, name, role } = found.person
    const signed = { id, name, role, resting: now - found.seenMs >= idleMs, endsMs: found.begunMs + sessionMs }
    return { signed, hash, seenMs: found.seenMs }
  }

  return {
    /** Always a new token, so that nobody can choose one for another. Callers bring the transaction. */
    begin(person: PersonRow): string {
      const token = newToken()
      const now = wallMs()
      store.people.endSessionsBefore(now - sessionMs)
      store.people.addSession(tokenHash(token), person.id, now)
      store.people.setSignedIn(person.id, now)
      return token
    },
    /** Who holds a token; null when it is none, or its session is over. */
    of: (token: string): Signed | null => of(token)?.signed ?? null,
    /** Somebody is there. A session that rests goes on resting. */
    seen(token: string): void {
      const found = of(token)
      if (found === null || found.signed.resting || wallMs() - found.seenMs < seenEveryMs) return
      store.people.seeSession(found.hash, wallMs())
    },
    end(token: string): void {
      const found = of(token)
      if (found === null) return
      store.together(() => {
        store.people.endSession(found.hash)
        note(desk, found.signed.name, 'sign-out', aboutOf(found.signed))
      })
      changed()
    },
  }
}
export type Sessions = ReturnType<typeof createSessions>
