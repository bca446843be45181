import { createAccounts } from './accounts.ts'
import { type Desk, machine, note } from './desk.ts'
import { createLinks } from './links.ts'
import { strangers } from './replay.ts'
import { createHasher } from './scrypt.ts'
import { createSessions } from './sessions.ts'
import { createSignIn } from './sign-in.ts'

export type PeopleOptions = Pick<Desk, 'store' | 'wallMs'> & Partial<Pick<Desk, 'hasher' | 'idleMs' | 'sessionMs' | 'linkMs'>>

export const defaultIdleMs = 30 * 60_000
export const defaultSessionMs = 12 * 3_600_000
const defaultLinkMs = 48 * 3_600_000

/** People, who is signed in, and how they come in. */
export function createPeople(o: PeopleOptions) {
  const listeners: (() => void)[] = []
  const desk: Desk = {
    hasher: o.hasher ?? createHasher(),
    idleMs: o.idleMs ?? defaultIdleMs,
    sessionMs: o.sessionMs ?? defaultSessionMs,
    linkMs: o.linkMs ?? defaultLinkMs,
    store: o.store,
    wallMs: o.wallMs,
    changed: () => {
      for (const listener of listeners) listener()
    },
  }
  const sessions = createSessions(desk)
  const links = createLinks(desk, sessions)
  return {
    sessions,
    links: { look: links.look, use: links.use },
    accounts: createAccounts(desk, links),
    ...createSignIn(desk, sessions),
    /** Whether anybody could sign in: with the first administrator, acts are people's. */
    any: (): boolean => o.store.people.list().some((p) => p.role === 'administrator' && !p.disabled && p.password !== null),
    /** For the console: the token of a link that makes an administrator; an earlier one is void. In the audit trail. */
    administratorLink: (): string =>
      o.store.together(() => {
        note(desk, machine, 'person.administrator-link', null, { reason: 'asked for on the console' })
        return links.make(null)
      }),
    /** Names of people whom the store holds otherwise than the audit trail tells. */
    strangers: (): string[] => strangers(o.store.audit.list(), o.store.people.list()),
    /** Called when sessions may have ended. */
    onChange: (listener: () => void): void => void listeners.push(listener),
    idleMs: desk.idleMs,
  }
}
export type People = ReturnType<typeof createPeople>
