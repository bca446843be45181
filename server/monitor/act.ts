import { MonitorError } from '../core/errors.ts'
import type { Act } from '../core/sequence.ts'
import type { Skid } from '../core/skid.ts'
import type { ActBody } from '../wire/act.ts'

/** The act that a request asks for, at a time of the run. Errors: ACT_REFUSED for a name left empty, TAG_UNKNOWN for a segment the skid has not. */
export function actOf(body: ActBody, skid: Skid, tMs: number): Act {
  const person = body.person.trim()
  if (person === '') throw new MonitorError('ACT_REFUSED', 'every act names the person who does it', { hint: 'give a name' })
  if (
    (body.kind === 'limit' || body.kind === 'flush-step' || body.kind === 'flush-check') &&
    !skid.segments.some((s) => s.id === body.segment)
  )
    throw new MonitorError('TAG_UNKNOWN', `skid ${skid.skid} has no segment '${body.segment}'`, {
      hint: `one of ${skid.segments.map((s) => s.id).join(', ')}`,
    })
  if (body.kind === 'limit' && body.value !== null && !Number.isFinite(body.value))
    throw new MonitorError('ACT_REFUSED', `the limit must be a number or null, got ${body.value}`)
  if (body.kind === 'comment' && body.text.trim() === '')
    throw new MonitorError('ACT_REFUSED', 'a comment needs some text', { hint: 'write what was seen or done' })
  if (body.kind === 'limit' && body.reason.trim().length < 5)
    throw new MonitorError('ACT_REFUSED', 'a changed limit needs a reason of at least 5 characters', { hint: 'say why' })
  return { ...body, person, tMs }
}
