import type Database from 'better-sqlite3'
import type { Role } from '../people/roles.ts'
import type { Failures } from '../people/waiting.ts'

export interface PersonRow {
  readonly id: number
  readonly name: string
  readonly role: Role
  /** As scrypt.ts writes it; null until one is set. */
  readonly password: string | null
  readonly disabled: boolean
  readonly addedMs: number
  readonly signedInMs: number | null
}

export interface SessionRow {
  readonly person: PersonRow
  readonly begunMs: number
  readonly seenMs: number
}

type Raw = Omit<PersonRow, 'disabled'> & { readonly disabled: number }
const personOf = ({ id, name, role, password, disabled, addedMs, signedInMs }: Raw): PersonRow => ({
  id, name, role, password, disabled: disabled === 1, addedMs, signedInMs,
}) // biome-ignore format: a list
const columns = 'p.id, name, role, password, disabled, added_ms AS addedMs, signed_in_ms AS signedInMs'
/** Addresses come from outside: no more of their failures are remembered than this. */
const mostFailures = 20_000

/** People, sessions, one-time links and failed sign-ins. Rules and the trail are the caller's (people/); tokens come here as hashes. */
export function peopleStore(db: Database.Database) {
  const list = db.prepare<[], Raw>(`SELECT ${columns} FROM person p ORDER BY p.id`)
  const byId = db.prepare<[number], Raw>(`SELECT ${columns} FROM person p WHERE p.id = ?`)
  const byKey = db.prepare<[string], Raw>(`SELECT ${columns} FROM person p WHERE key = ?`)
  const add = db.prepare('INSERT INTO person (name, key, role, password, disabled, added_ms) VALUES (?, ?, ?, NULL, 0, ?)')
  const setRole = db.prepare('UPDATE person SET role = ? WHERE id = ?')
  const setDisabled = db.prepare('UPDATE person SET disabled = ? WHERE id = ?')
  const setPassword = db.prepare('UPDATE person SET password = ? WHERE id = ?')
  const setSignedIn = db.prepare('UPDATE person SET signed_in_ms = ? WHERE id = ?')

  const session = db.prepare<[Buffer], Raw & { begunMs: number; seenMs: number }>(
    `SELECT ${columns}, begun_ms AS begunMs, seen_ms AS seenMs FROM session s JOIN person p ON p.id = s.person WHERE s.hash = ?`,
  )
  const addSession = db.prepare('INSERT INTO session (hash, person, begun_ms, seen_ms) VALUES (?, ?, ?, ?)')
  const seeSession = db.prepare('UPDATE session SET seen_ms = ? WHERE hash = ?')
  const endSession = db.prepare('DELETE FROM session WHERE hash = ?')
  const endOthers = db.prepare('DELETE FROM session WHERE person = ? AND hash <> ?')
  const endOld = db.prepare('DELETE FROM session WHERE begun_ms < ?')

  const link = db.prepare<[Buffer, number], { person: number | null; endsMs: number }>(
    'SELECT person, ends_ms AS endsMs FROM person_link WHERE hash = ? AND ends_ms > ?',
  )
  const addLink = db.prepare('INSERT INTO person_link (hash, person, ends_ms) VALUES (?, ?, ?)')
  const dropLinks = db.prepare('DELETE FROM person_link WHERE person IS ? OR ends_ms <= ?')

  const failures = db.prepare<[string], Failures>('SELECT count, last_ms AS lastMs FROM failure WHERE key = ?')
  const putFailures = db.prepare(
    'INSERT INTO failure (key, count, last_ms) VALUES (?, ?, ?) ON CONFLICT (key) DO UPDATE SET count = excluded.count, last_ms = excluded.last_ms',
  )
  const dropFailures = db.prepare('DELETE FROM failure WHERE key = ?')
  const forget = db.prepare('DELETE FROM failure WHERE last_ms < ?')
  const countFailures = db.prepare<[], number>('SELECT count(*) FROM failure').pluck()
  const crowdOut = db.prepare('DELETE FROM failure WHERE key IN (SELECT key FROM failure ORDER BY last_ms LIMIT ?)')
  const maybe = (row: Raw | undefined): PersonRow | null => (row === undefined ? null : personOf(row))

  return {
    list: (): PersonRow[] => list.all().map(personOf),
    byId: (id: number): PersonRow | null => maybe(byId.get(id)),
    byKey: (key: string): PersonRow | null => maybe(byKey.get(key)),
    add: (name: string, key: string, role: Role, nowMs: number): number => Number(add.run(name, key, role, nowMs).lastInsertRowid),
    setRole: (id: number, role: Role): void => void setRole.run(role, id),
    setDisabled: (id: number, disabled: boolean): void => void setDisabled.run(disabled ? 1 : 0, id),
    setPassword: (id: number, password: string | null): void => void setPassword.run(password, id),
    setSignedIn: (id: number, nowMs: number): void => void setSignedIn.run(nowMs, id),

    session(hash: Buffer): SessionRow | null {
      const row = session.get(hash)
      return row === undefined ? null : { person: personOf(row), begunMs: row.begunMs, seenMs: row.seenMs }
    },
    addSession: (hash: Buffer, person: number, nowMs: number): void => void addSession.run(hash, person, nowMs, nowMs),
    seeSession: (hash: Buffer, nowMs: number): void => void seeSession.run(nowMs, hash),
    endSession: (hash: Buffer): void => void endSession.run(hash),
    /** All of a person's but one; all with `kept` null. */
    endSessions: (person: number, kept: Buffer | null = null): void => void endOthers.run(person, kept ?? Buffer.alloc(0)),
    endSessionsBefore: (begunMs: number): void => void endOld.run(begunMs),

    /** Whose it is: null makes an administrator; undefined for a link that is none, was used or is over. */
    link: (hash: Buffer, nowMs: number): { person: number | null; endsMs: number } | undefined => link.get(hash, nowMs),
    /** A person has one link at a time, and so has the next administrator. */
    putLink(hash: Buffer, person: number | null, endsMs: number, nowMs: number): void {
      dropLinks.run(person, nowMs)
      addLink.run(hash, person, endsMs)
    },
    dropLinks: (person: number | null, nowMs: number): void => void dropLinks.run(person, nowMs),

    failures: (key: string): Failures | null => failures.get(key) ?? null,
    putFailures(key: string, { count, lastMs }: Failures, forgottenMs: number): void {
      forget.run(lastMs - forgottenMs)
      putFailures.run(key, count, lastMs)
      const over = countFailures.get()! - mostFailures
      if (over > 0) crowdOut.run(over + mostFailures / 10)
    },
    dropFailures: (key: string): void => void dropFailures.run(key),
  }
}
export type PeopleStore = ReturnType<typeof peopleStore>
