import { MonitorError } from '../errors.ts'
import type { AlarmKind, Priority } from '../report.ts'
import { type DefaultRationale, defaultRationales, type RationaleName } from './default-rationale.ts'
import { type DelayBasis, delays } from './delays.ts'
import { priorityFor, type Severity, severities } from './priority.ts'

/** The rationalisation of one alarm (ALM-02), under the names that the skid file uses for the same fields. */
export interface Rationale {
  /** Which alarm: a kind, or kind/variant. */
  readonly alarm: RationaleName
  readonly kind: AlarmKind
  readonly segment: string | null
  readonly name: string
  readonly type: string
  readonly basis: string
  readonly cause: string
  readonly consequence: string
  readonly check: string
  readonly action: string
  readonly timeToRespondSeconds: number
  readonly severity: Severity
  readonly priority: Priority
  readonly priorityReason: string
  readonly class: string
  readonly onDelaySeconds: number
  readonly offDelaySeconds: number
  /** In the unit of the limit where the site gives one; null: `deadbandPct` of the range. */
  readonly deadband: number | null
  readonly deadbandPct: number
  readonly latching: boolean
  readonly suppression: string
  readonly approvedBy: string
  readonly approvedOn: string
  readonly version: string
  /** Whether a person of this site has looked at it. */
  readonly review: string
}

export const notReviewed = 'default, not reviewed for this site'

/** Fields that a skid file may give, and what each must be. */
const rationaleFields = {
  name: 'string',
  type: 'string',
  basis: 'string',
  cause: 'string',
  consequence: 'string',
  check: 'string',
  action: 'string',
  timeToRespondSeconds: 'number',
  severity: 'string',
  priority: 'string',
  priorityReason: 'string',
  class: 'string',
  onDelaySeconds: 'number',
  offDelaySeconds: 'number',
  deadband: 'number',
  latching: 'boolean',
  suppression: 'string',
  approvedBy: 'string',
  approvedOn: 'string',
  version: 'string',
} as const
const mayBe: Readonly<Record<string, readonly string[]>> = {
  severity: severities,
  priority: ['low', 'medium', 'high'],
  type: ['absolute', 'deviation', 'rate', 'ratio', 'statistical', 'discrepancy', 'diagnostic'],
}

export type Overrides = Readonly<Record<string, Readonly<Record<string, string | number | boolean>>>>

/**
 * The default rationalisation of one alarm with what the skid file says over it: first under its kind, then its name (kind/variant), then
 * either with `:segment`. Severity or time to respond changed there moves the priority with it, unless the priority is given too. It counts as reviewed when the file names who approved it.
 * Errors: CONFIG_RANGE for an unknown field, one of the wrong type or out of range, and an empty action, consequence or time to respond (ALM-02).
 */
export function rationale(
  alarm: RationaleName,
  segment: string | null,
  basis: Omit<DelayBasis, 'timeToRespondS'>,
  overrides: Overrides = {},
): Rationale {
  const base: DefaultRationale = defaultRationales[alarm]
  const given: Record<string, string | number | boolean> = {}
  const names = alarm === base.kind ? [base.kind] : [base.kind, alarm]
  for (const key of segment === null ? names : [...names, ...names.map((n) => `${n}:${segment}`)]) {
    const over = Object.hasOwn(overrides, key) ? overrides[key] : undefined
    for (const [field, value] of Object.entries(over ?? {})) given[field] = checkAlarmField(key, field, value)
  }
  const timeToRespondSeconds = (given['timeToRespondSeconds'] ?? base.timeToRespondS) as number
  const severity = (given['severity'] ?? base.severity) as Severity
  const ranked = priorityFor(severity, timeToRespondSeconds)
  const wait = delays(base.signalled, { ...basis, timeToRespondS: timeToRespondSeconds })
  return {
    alarm,
    kind: base.kind,
    segment,
    name: base.title,
    type: base.type,
    basis: base.basis,
    cause: base.causes.join('; '),
    consequence: base.consequence,
    check: base.check,
    action: base.action,
    timeToRespondSeconds,
    severity,
    priority: ranked.priority,
    priorityReason: given['priority'] === undefined ? ranked.reason : 'given in the skid file',
    class: 'process',
    onDelaySeconds: wait.onDelayS,
    offDelaySeconds: wait.offDelayS,
    deadband: null,
    deadbandPct: wait.deadbandPct,
    latching: base.latching,
    suppression: 'none',
    approvedBy: '',
    approvedOn: '',
    version: 'default',
    ...given,
    review: given['approvedBy'] === undefined ? notReviewed : `approved by ${given['approvedBy']}`,
  }
}

/** One field of an alarm's rationalisation as given. Errors: CONFIG_RANGE for an unknown field, a wrong type, a value out of range or empty. */
export function checkAlarmField(key: string, field: string, value: string | number | boolean): string | number | boolean {
  const at = `alarms.${key}.${field}`
  if (!Object.hasOwn(rationaleFields, field)) {
    throw new MonitorError('CONFIG_RANGE', `${at} is not a field of an alarm`, {
      hint: `one of ${Object.keys(rationaleFields).join(', ')}`,
    })
  }
  const want = rationaleFields[field as keyof typeof rationaleFields]
  const is = typeof value
  if (is !== want) throw new MonitorError('CONFIG_RANGE', `${at} must be a ${want}, got ${is} ${value}`)
  const words = Object.hasOwn(mayBe, field) ? mayBe[field] : undefined
  if (words !== undefined && !words.includes(value as string)) {
    throw new MonitorError('CONFIG_RANGE', `${at} is '${value}'`, { hint: `one of ${words.join(', ')}` })
  }
  if (typeof value === 'number' && !(Number.isFinite(value) && (field === 'timeToRespondSeconds' ? value > 0 : value >= 0))) {
    throw new MonitorError(
      'CONFIG_RANGE',
      `${at} must be ${field === 'timeToRespondSeconds' ? 'above' : 'at least'} 0, got ${value}`,
      {
        hint: 'an alarm without a time to respond is an event, not an alarm',
      },
    )
  }
  if (typeof value === 'string' && value.trim() === '') {
    const hint = 'an alarm without action and consequence is an event, not an alarm'
    throw new MonitorError('CONFIG_RANGE', `${at} is empty`, field === 'action' || field === 'consequence' ? { hint } : {})
  }
  return value
}
