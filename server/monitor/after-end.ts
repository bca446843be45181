import type { Act } from '../core/sequence.ts'
import type { Skid } from '../core/skid.ts'
import type { Json } from '../store/keys.ts'
import type { ActBody, ActRow } from '../wire/act.ts'
import { actOf } from './act.ts'
import type { MonitorStore } from './needs.ts'

/** What may still be entered once a run has ended. */
type Late = Extract<ActBody, { readonly kind: 'comment' | 'event' }>
export const isLate = (body: ActBody): body is Late => body.kind === 'comment' || body.kind === 'event'

const word = { comment: 'run.comment', event: 'run.event' } as const

/**
 * A comment or an event on a run that has ended (a laboratory answers days later). It is kept beside the run, in the audit trail, with the time of
 * recording: the recorded sequence and what was calculated from it stay as they were. Errors: ACT_REFUSED.
 */
export function enterLate(store: MonitorStore, skid: Skid, run: number, body: Late, nowMs: number): Act {
  const act = actOf(body, skid, nowMs)
  const about = body.kind === 'comment' ? body.text : `${body.event}${body.note === '' ? '' : `: ${body.note}`}`
  store.audit.append({ tMs: nowMs, person: act.person, act: word[body.kind], reason: about, body: act as unknown as Json, run })
  return act
}

/** What was entered on a run after its end, oldest first. */
export const lateActs = (store: MonitorStore, run: number): ActRow[] =>
  store.audit
    .list()
    .filter((e) => e.run === run && (e.act === word.comment || e.act === word.event))
    .map((e) => ({ seq: null, act: e.body as unknown as Act }))
