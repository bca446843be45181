import { causeGuide } from '../core/alarms/default-rationale.ts'
import type { Occurrence } from '../core/alarms/occurrence.ts'
import { type Rationale, rationale } from '../core/alarms/rationale.ts'
import type { Skid } from '../core/skid.ts'
import type { AlarmHelp } from '../wire/alarm.ts'

type Name = Rationale['alarm']

/** The rationalisation that an occurrence falls under; the limit's name and the side stand in its key. */
function nameOf(skid: Skid, o: Occurrence): Name {
  const isHighHigh = o.key.includes('HighHigh')
  const isLow = o.key.includes('Low') || o.key.includes(':low')
  switch (o.kind) {
    case 'fouling':
      return skid.segments.some((s) => s.id === o.segment && s.kind === 'filter') ? 'fouling/filter' : 'fouling'
    case 'dp-limit':
      return isHighHigh ? 'dp-limit/high-high' : 'dp-limit/high'
    case 'temperature-limit':
      return isLow ? 'temperature-limit/low' : isHighHigh ? 'temperature-limit/high-high' : 'temperature-limit/high'
    case 'feed-ratio':
      return isLow ? 'feed-ratio/low' : 'feed-ratio/high'
    case 'exotherm':
      return o.key.includes('cold') ? 'exotherm/cold' : 'exotherm'
    default:
      return o.kind
  }
}

/** Texts of alarms by occurrence and configuration in force, computed once each; null where the skid file's own fields are not usable. */
export function alarmHelpOf(inForce: () => Skid): (o: Occurrence) => AlarmHelp | null {
  const known = new Map<string, AlarmHelp | null>()
  let of: Skid | null = null
  return (o) => {
    const skid = inForce()
    if (of !== skid) known.clear()
    of = skid
    const name = nameOf(skid, o)
    const id = `${name}\n${o.segment ?? ''}\n${o.cause ?? ''}`
    const found = known.get(id)
    if (found !== undefined) return found
    const made = make(skid, name, o)
    known.set(id, made)
    return made
  }
}

/** Check and action of the cause that was found, where the alarm is of fouling, the cause is another, and the site says nothing of its own. */
function byCause(skid: Skid, o: Occurrence): { readonly check?: string; readonly action?: string } {
  if (o.kind !== 'fouling' || o.cause === null || o.cause === 'fouling') return {}
  const guide = causeGuide[o.cause]
  const given = { ...skid.alarms[o.kind], ...(o.segment === null ? {} : skid.alarms[`${o.kind}:${o.segment}`]) }
  return {
    ...(given['check'] === undefined ? { check: guide.check } : {}),
    ...(given['action'] === undefined ? { action: guide.action } : {}),
  }
}

function make(skid: Skid, name: Name, o: Occurrence): AlarmHelp | null {
  const { segment } = o
  const pick = (r: Rationale): AlarmHelp => ({
    title: r.name,
    causes: r.cause,
    consequence: r.consequence,
    check: r.check,
    action: r.action,
    timeToRespondS: r.timeToRespondSeconds,
    review: r.review,
    ...byCause(skid, o),
  })
  const basis = { scanS: skid.scanSeconds, residenceS: null }
  try {
    return pick(rationale(name, segment, basis, skid.alarms))
  } catch {
    // A field of the skid file that is none of an alarm's does not take the tool's own text away.
    return pick(rationale(name, segment, basis))
  }
}
