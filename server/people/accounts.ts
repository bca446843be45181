import { MonitorError } from '../core/errors.ts'
import type { PersonRow } from '../store/people.ts'
import { aboutOf, type Desk, note } from './desk.ts'
import { type Links, nameTaken } from './links.ts'
import { nameKey, nameOf } from './name.ts'
import type { Role } from './roles.ts'

/** Who does it and why. */
export interface By {
  readonly id: number
  readonly name: string
  readonly reason: string
}

const leastReason = 5

/**
 * What administrators do. Nobody does it to himself, so an administrator is always left. Every act takes a reason and is in the audit
 * trail. Errors of all: PERSON_REFUSED, PERSON_UNKNOWN.
 */
export function createAccounts(desk: Desk, links: Links) {
  const { store, wallMs, changed } = desk

  function mustHaveReason({ reason }: By): void {
    if (reason.trim().length < leastReason)
      throw new MonitorError('PERSON_REFUSED', `a reason of at least ${leastReason} characters is required`, { hint: 'say why' })
  }
  /** One act on another person, as one transaction. */
  function on<R>(id: number, by: By, act: (person: PersonRow) => R): R {
    const result = store.together(() => {
      const person = store.people.byId(id)
      if (person === null)
        throw new MonitorError('PERSON_UNKNOWN', `there is no person ${id}`, { hint: 'look at the list of people' })
      if (id === by.id)
        throw new MonitorError('PERSON_REFUSED', 'nobody changes the own role, disables or resets himself', {
          hint: 'another administrator does it; the own password is changed on the page of the own account',
        })
      mustHaveReason(by)
      return act(person)
    })
    changed()
    return result
  }
  const same = (what: string) => new MonitorError('PERSON_REFUSED', `the person is ${what} already`)

  return {
    list: (): PersonRow[] => store.people.list(),
    /** Gives the token of the one-time link by which the person sets a password. */
    add(name: string, role: Role, by: By): { readonly id: number; readonly token: string } {
      const fresh = nameOf(name)
      mustHaveReason(by)
      return store.together(() => {
        if (store.people.byKey(nameKey(fresh)) !== null) throw nameTaken(fresh)
        const id = store.people.add(fresh, nameKey(fresh), role, wallMs())
        note(desk, by.name, 'person.add', aboutOf({ id, name: fresh }), { reason: by.reason, new: role })
        return { id, token: links.make(id) }
      })
    },
    setRole(id: number, role: Role, by: By): void {
      on(id, by, (person) => {
        if (person.role === role) throw same(role)
        store.people.setRole(id, role)
        store.people.endSessions(id)
        note(desk, by.name, 'person.role', aboutOf(person), { reason: by.reason, old: person.role, new: role })
      })
    },
    /** A disabled person cannot sign in; the name stays with what was done under it. */
    setDisabled(id: number, disabled: boolean, by: By): void {
      on(id, by, (person) => {
        if (person.disabled === disabled) throw same(disabled ? 'disabled' : 'enabled')
        store.people.setDisabled(id, disabled)
        store.people.endSessions(id)
        store.people.dropLinks(id, wallMs())
        note(desk, by.name, disabled ? 'person.disable' : 'person.enable', aboutOf(person), { reason: by.reason })
      })
    },
    /** The password is void at once; gives the token of a one-time link for a new one. */
    reset(id: number, by: By): string {
      return on(id, by, (person) => {
        if (person.disabled) throw new MonitorError('PERSON_REFUSED', 'the person is disabled', { hint: 'enable the person first' })
        store.people.setPassword(id, null)
        store.people.endSessions(id)
        store.people.dropFailures(`person ${id}`)
        note(desk, by.name, 'person.reset', aboutOf(person), { reason: by.reason })
        return links.make(id)
      })
    },
  }
}
