import type { Act } from '../core/sequence.ts'
import type { TransitionRow } from './alarm.ts'

type Untimed<A> = A extends Act ? Omit<A, 'tMs'> : never

/** An act without its time, which the server gives by the run's clock. Every act names a person. */
export type ActBody =
  | Exclude<Untimed<Act>, { readonly kind: 'settings' | 'commissioned' | 'reset' | 'limit' }>
  | Omit<Required<Extract<Act, { readonly kind: 'reset' }>>, 'tMs'>
  | Omit<Extract<Act, { readonly kind: 'limit' }>, 'tMs' | 'version'>

type Unnamed<A> = A extends ActBody ? Omit<A, 'person'> : never
/** Body of `POST /api/runs/:run/acts`. The person is who is signed in. */
export type ActSent = Unnamed<ActBody>

/** Reply: on disk before it is sent. `transitions` holds what it did to the alarm, a refusal (outcome 'refused') with its reason. */
export interface ActReply {
  readonly seq: number | null
  readonly act: Act
  readonly transitions: readonly TransitionRow[]
}

/** `GET /api/runs/:run/acts`, oldest first. */
export interface ActRow {
  /** Its place in the sequence; null: entered after the run had ended and kept beside it. */
  readonly seq: number | null
  readonly act: Act
}
