import { alarmKinds } from '../core/report.ts'
import { meant } from './nearest.ts'
import { choice, dictionary, flag, group, number, text } from './readers.ts'

const seconds = number({ min: 0, max: 86_400, unit: 'seconds' })
const date = text('a date yyyy-MM-dd', (value) => {
  const ms = /^\d{4}-\d{2}-\d{2}$/.test(value) ? Date.parse(`${value}T00:00:00Z`) : Number.NaN
  return Number.isFinite(ms) && new Date(ms).toISOString().startsWith(value) ? null : { hint: 'for example 2026-03-31' }
})

/**
 * Rationalisation of one alarm (ALM-02), over the defaults. Each key is optional, but none may be empty: an alarm without an action,
 * a consequence or a time to respond is refused.
 */
const rationalisation = group(
  {
    name: text('the alarm in plain words'),
    type: choice(['absolute', 'deviation', 'rate', 'ratio', 'statistical', 'discrepancy', 'diagnostic']),
    basis: text('why the setpoint is what it is'),
    cause: text('what brings the alarm about'),
    consequence: text('what happens when nobody acts'),
    check: text('how the operator confirms it'),
    action: text('what the operator does'),
    timeToRespondSeconds: number({ above: 0, max: 604_800, unit: 'seconds' }),
    severity: choice(['low', 'medium', 'high']),
    priority: choice(['low', 'medium', 'high']),
    priorityReason: text('why this priority'),
    class: text('the class of the alarm, as the site names it'),
    onDelaySeconds: seconds,
    offDelaySeconds: seconds,
    deadband: number({ min: 0, unit: 'in the unit of the limit' }),
    latching: flag,
    suppression: text('when it is suppressed by design'),
    approvedBy: text('who approved it'),
    approvedOn: date,
    version: text('the version of this rationalisation'),
  },
  { nullable: false },
)

/** `alarms`, by alarm kind or `kind:SEGMENT`; the segment is checked once all are known. */
export const alarmsShape = dictionary(`an alarm (${alarmKinds.join(', ')}) or alarm:SEGMENT`, rationalisation, (key) => {
  const kind = key.split(':')[0] ?? ''
  return (alarmKinds as readonly string[]).includes(kind) ? null : { hint: meant(kind, alarmKinds) }
})
