import { createHash } from 'node:crypto'
import { MonitorError } from '../core/errors.ts'
import type { PersonRow } from '../store/people.ts'
import { aboutOf, type Desk, note } from './desk.ts'
import { nameKey } from './name.ts'
import { networkOf } from './network.ts'
import { checkPassword } from './password.ts'
import type { Sessions } from './sessions.ts'
import { addressRule, failedAgain, forgottenMs, nameRule, waitMs } from './waiting.ts'

/** In the trail for a name that nobody has. The name itself is not written: it may be a password in the wrong field. */
export const unknownPerson = 'nobody'

const refusal = () =>
  new MonitorError('SIGN_IN_REFUSED', 'this name and this password do not belong together', {
    hint: 'check both; an administrator can give you a link for a new password',
  })

/** Under what failures of a name are counted. Names that nobody has share 4096 places, by which no typed word can be told. */
const placeOf = (key: string, person: PersonRow | null): string =>
  person === null ? `unknown ${createHash('sha256').update(key).digest().readUInt16BE() >> 4}` : `person ${person.id}`

export function createSignIn(desk: Desk, sessions: Sessions) {
  const { store, wallMs, hasher } = desk

  /** Errors: SIGN_IN_WAIT. */
  function mustNotWait(places: Places): void {
    const now = wallMs()
    const wait = Math.max(
      waitMs(store.people.failures(places.name), nameRule, now),
      waitMs(store.people.failures(places.address), addressRule, now),
    )
    if (wait > 0)
      throw new MonitorError('SIGN_IN_WAIT', `too many failed tries: the next is taken in ${Math.ceil(wait / 1000)} s`, {
        hint: 'wait, then try again; an administrator can give you a link for a new password',
      })
  }
  function countOne(places: Places): void {
    for (const place of [places.name, places.address])
      store.people.putFailures(place, failedAgain(store.people.failures(place), wallMs()), forgottenMs)
  }
  function takeBack(places: Places): void {
    store.people.dropFailures(places.name)
    const address = store.people.failures(places.address)
    if (address !== null && address.count > 1)
      store.people.putFailures(places.address, { ...address, count: address.count - 1 }, forgottenMs)
    else store.people.dropFailures(places.address)
  }

  /** An administrator may have reset or disabled a person while a password was computed. */
  function isAsBefore(person: PersonRow): boolean {
    const now = store.people.byId(person.id)
    return now !== null && !now.disabled && now.password === person.password
  }

  /** Whether a password is a person's. Counted as failed before it is known, so that tries at the same moment see each other. */
  async function proves(person: PersonRow | null, key: string, password: string, address: string): Promise<boolean> {
    const places = { name: placeOf(key, person), address: `address ${networkOf(address)}` }
    store.together(() => {
      mustNotWait(places)
      countOne(places)
    })
    const same = await hasher.verify(password, person?.password ?? null)
    return store.together(() => {
      const good = same && person !== null && isAsBefore(person)
      if (good) takeBack(places)
      else {
        const count = store.people.failures(places.name)?.count ?? 0
        note(desk, person?.name ?? unknownPerson, 'sign-in.refused', { address, failures: count })
      }
      return good
    })
  }

  return {
    /** A new session. Errors: SIGN_IN_REFUSED alike for a wrong name, a wrong password and a disabled person; SIGN_IN_WAIT, BUSY. */
    async signIn(name: string, password: string, address: string): Promise<string> {
      const key = nameKey(name)
      const person = store.people.byKey(key)
      if (!(await proves(person, key, password, address)) || person === null) throw refusal()
      const fresh = hasher.isStale(person.password ?? '') ? await hasher.hash(password) : null
      return store.together(() => {
        if (!isAsBefore(person)) throw refusal()
        if (fresh !== null) store.people.setPassword(person.id, fresh)
        note(desk, person.name, 'sign-in', { ...aboutOf(person), address })
        return sessions.begin(person)
      })
    },
    /** Gives the person's new session; all older ones end. Errors: SIGN_IN_REFUSED, SIGN_IN_WAIT, BUSY, PERSON_REFUSED. */
    async changePassword(id: number, old: string, password: string, address: string): Promise<string> {
      const person = store.people.byId(id)
      if (person === null) throw refusal()
      checkPassword(password, person.name)
      if (!(await proves(person, nameKey(person.name), old, address)))
        throw new MonitorError('SIGN_IN_REFUSED', 'the old password is another', { hint: 'type it again' })
      const hash = await hasher.hash(password)
      const token = store.together(() => {
        if (!isAsBefore(person)) throw refusal()
        store.people.setPassword(id, hash)
        store.people.dropLinks(id, wallMs())
        store.people.endSessions(id)
        note(desk, person.name, 'person.password', { ...aboutOf(person), by: 'old password' })
        return sessions.begin(person)
      })
      desk.changed()
      return token
    },
  }
}
interface Places {
  readonly name: string
  readonly address: string
}
