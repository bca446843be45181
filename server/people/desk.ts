import type { Json } from '../store/keys.ts'
import type { Store } from '../store/open.ts'
import type { PersonRow } from '../store/people.ts'
import type { Hasher } from './scrypt.ts'

/** What all parts of people/ work with. */
export interface Desk {
  readonly store: Pick<Store, 'people' | 'audit' | 'together'>
  readonly wallMs: () => number
  readonly hasher: Hasher
  /** Without an act for so long a session only reads [ms]. */
  readonly idleMs: number
  /** A session is over after so long [ms]. */
  readonly sessionMs: number
  /** A one-time link is good for so long [ms]. */
  readonly linkMs: number
  /** Sessions may have ended: whoever serves one looks again. */
  readonly changed: () => void
}

/** Who does what is no person's doing. */
export const machine = 'at the machine'

/** What the trail says of a person. */
export const aboutOf = ({ id, name }: Pick<PersonRow, 'id' | 'name'>): { readonly id: number; readonly name: string } => ({
  id,
  name,
})

/** An entry in the audit trail, now. Callers bring the transaction. */
export function note(
  { store, wallMs }: Pick<Desk, 'store' | 'wallMs'>,
  person: string,
  act: string,
  body: Json,
  more: { readonly reason?: string; readonly old?: Json; readonly new?: Json } = {},
): void {
  store.audit.append({ tMs: wallMs(), person, act, reason: more.reason ?? '', body, old: more.old ?? null, new: more.new ?? null })
}
