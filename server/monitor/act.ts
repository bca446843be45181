import { MonitorError } from '../core/errors.ts'
import { alarmKinds } from '../core/report.ts'
import type { Act } from '../core/sequence.ts'
import { eventFault } from '../core/settings/hand-events.ts'
import type { Skid } from '../core/skid.ts'
import { needReason } from '../settings/decide.ts'
import type { ActBody } from '../wire/act.ts'

const refuse = (message: string, hint: string): MonitorError => new MonitorError('ACT_REFUSED', message, { hint })

/**
 * The act that a request asks for, at a time of the run. What a person asks of an alarm is judged by the alarm book, which journals a refusal
 * (a reason too short, a class that may not be shelved); what needs no alarm is judged here. Errors: ACT_REFUSED for a name left empty, a
 * reason missing where one is needed (USR-05), an event that cannot be; TAG_UNKNOWN for a segment the skid has not.
 */
export function actOf(body: Exclude<ActBody, { readonly kind: 'limit' }>, skid: Skid, tMs: number): Act {
  const person = body.person.trim()
  if (person === '') throw refuse('every act names the person who does it', 'give a name')
  switch (body.kind) {
    case 'flush-step':
    case 'flush-check':
      if (!skid.segments.some((s) => s.id === body.segment)) throw noSegment(skid, body.segment)
      // A step is accepted on its checks alone; a reading by hand carries its own reason.
      if (body.kind === 'flush-step' && (body.state === 'skipped' || body.state === 'refused'))
        needReason(body.reason, `a step ${body.state} by hand`)
      if (body.kind === 'flush-check' && body.verdict === 'skipped') needReason(body.reason, 'a point skipped')
      break
    case 'comment':
      if (body.text.trim() === '') throw refuse('a comment needs some text', 'write what was seen or done')
      break
    case 'out-of-service':
    case 'in-service': {
      const kind = body.key.split(':')[0] ?? ''
      if (!(alarmKinds as readonly string[]).includes(kind))
        throw refuse(`'${body.key}' is no alarm`, `its key begins with one of ${alarmKinds.join(', ')}`)
      break
    }
    case 'event': {
      const fault = eventFault(skid, body)
      if (fault !== null) throw refuse(fault, 'correct it and enter it again')
      if ((body.atMs ?? tMs) > tMs) throw refuse('the sample cannot be taken later than now', 'give the time it was taken')
      break
    }
  }
  return { ...body, person, tMs }
}

export const noSegment = (skid: Skid, segment: string): MonitorError =>
  new MonitorError('TAG_UNKNOWN', `skid ${skid.skid} has no segment '${segment}'`, {
    hint: `one of ${skid.segments.map((s) => s.id).join(', ')}`,
  })
