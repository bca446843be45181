/** What a person may be; `server/people/roles.ts` says what each may do. */
export type RoleName = 'viewer' | 'operator' | 'engineer' | 'reviewer' | 'administrator'

/** `GET /api/session`, and the reply of every call that signs in or out. */
export interface Session {
  readonly person: { readonly name: string; readonly role: RoleName } | null
  /** demo: everybody at this machine is the demo operator. */
  readonly how: 'none' | 'demo' | 'signed-in'
  /** Nobody used it for `idleMs`: it reads on, acts need signing in again. */
  readonly resting: boolean
  readonly endsMs: number | null
  /** Runs may be seen. */
  readonly mayRead: boolean
  /** There is an administrator, so people can sign in. */
  readonly hasPeople: boolean
  readonly idleMs: number
}

/** `GET /api/people`. */
export interface PersonFacts {
  readonly id: number
  readonly name: string
  readonly role: RoleName
  readonly disabled: boolean
  readonly hasPassword: boolean
  readonly addedMs: number
  readonly signedInMs: number | null
}

/** A one-time link, to be handed to the person; it is shown once. */
export interface OneTimeLink {
  readonly id: number
  /** Goes behind the server's address. */
  readonly path: string
}

/** Reply of `POST /api/links/look`. `name` null: it makes an administrator. */
export interface LinkFacts {
  readonly name: string | null
  readonly endsMs: number
}
