import type { Act, LimitName } from '../core/sequence.ts'
import type { TransitionRow } from './alarm.ts'

/** Body of `POST /api/runs/:run/acts`. The server gives the time, by the run's clock. Every act names a person. */
export type ActBody = { readonly person: string } & (
  | { readonly kind: 'acknowledge'; readonly alarm: number }
  | { readonly kind: 'reset'; readonly alarm: number }
  | { readonly kind: 'shelve'; readonly alarm: number; readonly minutes: number; readonly reason: string }
  | { readonly kind: 'unshelve'; readonly alarm: number; readonly reason: string }
  | { readonly kind: 'comment'; readonly alarm: number | null; readonly text: string }
  | {
      readonly kind: 'limit'
      readonly segment: string
      readonly limit: LimitName
      readonly value: number | null
      readonly reason: string
    }
  | {
      readonly kind: 'flush-step'
      readonly segment: string
      readonly step: string
      readonly state: 'started' | 'accepted' | 'refused' | 'skipped' | 'ended'
      readonly reason: string
    }
)

/** Reply: on disk before it is sent. `transitions` holds what it did to the alarm, a refusal (outcome 'refused') with its reason. */
export interface ActReply {
  readonly seq: number
  readonly act: Act
  readonly transitions: readonly TransitionRow[]
}

/** `GET /api/runs/:run/acts`, oldest first. */
export interface ActRow {
  readonly seq: number
  readonly act: Act
}
