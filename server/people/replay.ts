import type { AuditEntry } from '../store/audit.ts'
import type { PersonRow } from '../store/people.ts'
import type { Role } from './roles.ts'

/** A person as the audit trail tells. */
export interface Told {
  readonly id: number
  readonly name: string
  readonly role: Role
  readonly disabled: boolean
  readonly hasPassword: boolean
}

/** People after one more entry of the trail. Entries of other things change nothing. */
function after(people: ReadonlyMap<number, Told>, { act, body, new: now }: AuditEntry): ReadonlyMap<number, Told> {
  const { id, name } = (body ?? {}) as { id?: number; name?: string }
  if (!act.startsWith('person.') || id === undefined || name === undefined) return people
  const was = people.get(id)
  if (act === 'person.add') return new Map(people).set(id, { id, name, role: now as Role, disabled: false, hasPassword: false })
  if (was === undefined) return people
  const change: Partial<Told> =
    act === 'person.role'
      ? { role: now as Role }
      : act === 'person.disable'
        ? { disabled: true }
        : act === 'person.enable'
          ? { disabled: false }
          : act === 'person.password'
            ? { hasPassword: true }
            : act === 'person.reset'
              ? { hasPassword: false }
              : {}
  return new Map(people).set(id, { ...was, ...change })
}

/** People as all entries of the trail leave them. */
export const peopleOf = (trail: Iterable<AuditEntry>): Told[] => {
  let people: ReadonlyMap<number, Told> = new Map()
  for (const entry of trail) people = after(people, entry)
  return [...people.values()]
}

export const toldOf = ({ id, name, role, disabled, password }: PersonRow): Told => ({
  id,
  name,
  role,
  disabled,
  hasPassword: password !== null,
})

/** Names of people whom the store holds otherwise than the trail tells: somebody has changed the file by hand. */
export function strangers(trail: Iterable<AuditEntry>, stored: readonly PersonRow[]): string[] {
  const told = new Map(peopleOf(trail).map((p) => [p.id, JSON.stringify(p)]))
  const other = stored.map(toldOf).filter((p) => told.get(p.id) !== JSON.stringify(p))
  const gone = [...told].filter(([id]) => !stored.some((p) => p.id === id)).map(([, text]) => (JSON.parse(text) as Told).name)
  return [...other.map((p) => p.name), ...gone]
}
