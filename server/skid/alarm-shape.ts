import { disturbances } from '../core/bank/model.ts'
import { phases } from '../core/reading.ts'
import { alarmKinds } from '../core/report.ts'
import { meant } from './nearest.ts'
import { choice, dictionary, flag, group, list, number, type Reader, text } from './readers.ts'

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

const logic = group(
  {
    alarms: list(text('an alarm or alarm:SEGMENT'), { min: 1, name: 'alarms' }),
    phases: list(choice(phases), { min: 1, name: 'phases' }),
  },
  { required: ['alarms', 'phases'] },
)

/** `suppression`, a key beyond the contract's: by the name of its logic, these alarms while the log's phase is one of these (ALM-09). */
export const suppressionShape = dictionary("a name of letters, digits and '-'", logic, (key) =>
  /^[A-Za-z0-9-]{1,64}$/.test(key) ? null : { hint: `for example '${key.replace(/[^A-Za-z0-9]+/g, '-').slice(0, 64)}'` },
)

/** `disturbances`, a key beyond the contract's: sizes over the tool's defaults, in the units of core/bank/model.ts. */
export const disturbancesShape = group(
  Object.fromEntries(
    Object.keys(disturbances).map((name) => [
      name,
      name.endsWith('TauH') ? number({ above: 0, max: 1e6, unit: 'hours' }) : number({ min: 0, max: 1e9 }),
    ]),
  ) as Record<keyof typeof disturbances, Reader<number>>,
)
