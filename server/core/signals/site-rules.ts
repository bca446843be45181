import type { Policy } from '../alarms/alarm-state.ts'
import { defaultPolicy } from '../alarms/book.ts'
import type { Signal } from '../alarms/occurrence.ts'
import type { Priority } from '../report.ts'
import type { Skid } from '../skid.ts'

type Fields = Readonly<Record<string, string | number | boolean>>

/**
 * What the skid file's `alarms` change in how an alarm behaves: priority, delays, deadband, latching; by kind, then by `kind:segment`. An
 * alarm the file does not name behaves by its own defaults. Texts (cause, action …) are the rationalisation's business.
 */
export function siteRules(skid: Skid) {
  const known = new Map<string, Fields | null>()
  const any = Object.keys(skid.alarms).length > 0
  const fieldsOf = (kind: string, segment: string | null): Fields | null => {
    if (!any) return null
    const key = segment === null ? kind : `${kind}:${segment}`
    const found = known.get(key)
    if (found !== undefined) return found
    const of = { ...skid.alarms[kind], ...(segment === null ? {} : skid.alarms[key]) }
    const fields = Object.keys(of).length === 0 ? null : of
    known.set(key, fields)
    return fields
  }
  return {
    apply(s: Signal): Signal {
      const f = fieldsOf(s.kind, s.segment)
      if (f === null) return s
      return {
        ...s,
        priority: (f['priority'] as Priority | undefined) ?? s.priority,
        onDelayS: (f['onDelaySeconds'] as number | undefined) ?? s.onDelayS,
        offDelayS: (f['offDelaySeconds'] as number | undefined) ?? s.offDelayS,
      }
    },
    /** In the unit of the limit; null where the file gives none. */
    deadband: (kind: string, segment: string): number | null =>
      (fieldsOf(kind, segment)?.['deadband'] as number | undefined) ?? null,
    /** The book asks by key, which begins with the kind and has the segment second where there is one. */
    policyOf(key: string, priority: Priority): Policy {
      const [kind = '', segment] = key.split(':')
      return defaultPolicy(priority, fieldsOf(kind, segment ?? null)?.['latching'] === true)
    },
  }
}
export type SiteRules = ReturnType<typeof siteRules>
