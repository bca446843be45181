import { MonitorError } from '../core/errors.ts'
import { aboutOf, type Desk, machine, note } from './desk.ts'
import { nameKey, nameOf } from './name.ts'
import { checkPassword } from './password.ts'
import type { Sessions } from './sessions.ts'
import { isToken, newToken, tokenHash } from './tokens.ts'

/** What a one-time link is for. */
export interface LinkFacts {
  /** Whose password it sets; null makes an administrator, who chooses a name. */
  readonly name: string | null
  readonly endsMs: number
}

export function createLinks(desk: Desk, sessions: Sessions) {
  const { store, wallMs, hasher, linkMs } = desk
  const need = (token: string) => {
    const found = isToken(token) ? store.people.link(tokenHash(token), wallMs()) : undefined
    const person = found === undefined || found.person === null ? null : store.people.byId(found.person)
    if (found === undefined || person?.disabled === true)
      throw new MonitorError('LINK_SPENT', 'this link was used already or is over', {
        hint: 'an administrator gives out a new one; the first administrator gets one at each start of the server',
      })
    return { person, endsMs: found.endsMs }
  }

  return {
    /** A link to set a person's password, or to make an administrator (null). An earlier one of the same is void. Callers bring the transaction. */
    make(person: number | null): string {
      const token = newToken()
      store.people.putLink(tokenHash(token), person, wallMs() + linkMs, wallMs())
      return token
    },
    /** Errors: LINK_SPENT. */
    look(token: string): LinkFacts {
      const { person, endsMs } = need(token)
      return { name: person?.name ?? null, endsMs }
    },
    /** The link is used up, the password set, the person signed in. Errors: LINK_SPENT, PERSON_REFUSED, BUSY. */
    async use(token: string, { name, password }: { readonly name: string | null; readonly password: string }): Promise<string> {
      const { person } = need(token)
      const fresh = person === null ? nameOf(name ?? '') : person.name
      checkPassword(password, fresh)
      const hash = await hasher.hash(password)
      const made = store.together(() => {
        // Two who use it at the same moment: the second finds it spent.
        need(token)
        store.people.dropLinks(person?.id ?? null, wallMs())
        let id = person?.id
        if (id === undefined) {
          if (store.people.byKey(nameKey(fresh)) !== null) throw nameTaken(fresh)
          id = store.people.add(fresh, nameKey(fresh), 'administrator', wallMs())
          note(desk, machine, 'person.add', aboutOf({ id, name: fresh }), {
            reason: 'one-time link of the console',
            new: 'administrator',
          })
        }
        store.people.setPassword(id, hash)
        store.people.endSessions(id)
        note(desk, fresh, 'person.password', { ...aboutOf({ id, name: fresh }), by: 'one-time link' })
        return sessions.begin(store.people.byId(id)!)
      })
      desk.changed()
      return made
    },
  }
}
export type Links = ReturnType<typeof createLinks>

export const nameTaken = (name: string): MonitorError =>
  new MonitorError('PERSON_REFUSED', `there is a person called '${name}' already`, {
    hint: 'names tell people apart: give another',
  })
