import type { Skid } from '../skid.ts'

/** What people enter by hand (a laboratory result, a change of drum or filter), and in which units a value may come. */
export interface HandEvent {
  readonly kind: string
  /** Other spellings that an events file may use. */
  readonly also: readonly string[]
  readonly of: 'stream' | 'segment' | 'any'
  /** Unit to the factor that gives the first unit; empty where no value belongs to it. */
  readonly units: Readonly<Record<string, number>>
  readonly min: number
  /** In the first unit; null: no bound. */
  readonly max: number | null
  /** A value must come with it. */
  readonly needsValue: boolean
}

/** Karl Fischer: mass of water per mass of sample. */
const massShare = { ppm: 1, 'mg/kg': 1, '%': 1e4 }

const handEvents: readonly HandEvent[] = [
  {
    kind: 'Karl Fischer',
    also: ['karl fischer result', 'kf', 'water', 'water content'],
    of: 'stream',
    units: massShare,
    min: 0,
    max: 1e6,
    needsValue: true,
  },
  { kind: 'titre', also: ['titer'], of: 'stream', units: { 'mol/L': 1, 'mmol/L': 1e-3 }, min: 0, max: 100, needsValue: true },
  { kind: 'drum change', also: [], of: 'stream', units: {}, min: 0, max: null, needsValue: false },
  { kind: 'filter change', also: ['filter changed'], of: 'segment', units: {}, min: 0, max: null, needsValue: false },
  {
    kind: 'effluent test',
    also: ['effluent'],
    of: 'any',
    units: { ...massShare, 'mg/L': 1, pH: 1, 'mS/cm': 1 },
    min: 0,
    max: null,
    needsValue: false,
  },
  { kind: 'sample', also: ['sample taken'], of: 'any', units: {}, min: 0, max: null, needsValue: false },
]

const plain = (text: string): string =>
  text
    .toLowerCase()
    .replaceAll(/[\s_-]+/g, ' ')
    .trim()

/** The known kind that an event is of, however it is spelt; null for another. */
export const handEventOf = (event: string): HandEvent | null =>
  handEvents.find((k) => plain(k.kind) === plain(event) || k.also.includes(plain(event))) ?? null

/** What an event entered by hand says. */
export interface HandEventInput {
  readonly event: string
  readonly value: number | null
  readonly unit: string | null
  readonly note: string
  readonly of?: string | null
}

/**
 * The stream or segment that an event belongs to: named in `of`, or by its note: the id alone, or after "feed", "stream" or "segment". Null
 * where none is named or more than one is.
 */
export function subjectOf(skid: Skid, e: HandEventInput): string | null {
  const kind = handEventOf(e.event)
  if (kind === null) return null
  const ids = [...(kind.of === 'segment' ? [] : skid.streams), ...(kind.of === 'stream' ? [] : skid.segments)].map((x) => x.id)
  const given = e.of ?? ''
  if (given !== '') return ids.find((id) => id === given) ?? null
  const words = [...e.note.matchAll(/\b(?:feed|stream|segment)\s+([A-Za-z0-9-]+)/gi)].map((m) => m[1]!)
  const found = new Set([...words, e.note.trim()].filter((w) => ids.includes(w)))
  if (found.size === 1) return [...found][0]!
  // A skid with one filter needs no name for it.
  const filters = skid.segments.filter((s) => s.kind === 'filter')
  return kind.kind === 'filter change' && found.size === 0 && filters.length === 1 ? filters[0]!.id : null
}

/** Why an event cannot be entered so; null where it can. An event of another kind is free text and needs no unit. */
export function eventFault(skid: Skid, e: HandEventInput): string | null {
  if (e.event.trim() === '') return 'an event needs its kind'
  if (e.value !== null && !Number.isFinite(e.value)) return 'the value must be a number'
  const kind = handEventOf(e.event)
  if (kind === null) return null
  const units = Object.keys(kind.units)
  if (kind.needsValue && e.value === null) return `${kind.kind} needs a value in ${units.join(', ')}`
  if (e.value !== null) {
    if (units.length === 0) return `${kind.kind} has no value; write it in the note`
    if (e.unit === null || !units.includes(e.unit)) return `${kind.kind} needs its unit, one of ${units.join(', ')}`
    const first = e.value * kind.units[e.unit]!
    if (first < kind.min || (kind.max !== null && first > kind.max))
      return `${kind.kind} of ${e.value} ${e.unit} cannot be: at least ${kind.min}${kind.max === null ? '' : `, at most ${kind.max}`} ${units[0]!}`
  } else if (e.unit !== null) return 'a unit without a value'
  const given = e.of ?? ''
  if (given !== '' && subjectOf(skid, e) === null)
    return `${kind.kind} is of ${kind.of === 'any' ? 'a stream or segment' : `a ${kind.of}`}; '${given}' is none of this skid`
  return null
}

/** Water that a Karl Fischer result gives for a stream, ppm by mass; null where the event gives none. */
export function waterResult(skid: Skid, e: HandEventInput): { readonly stream: string; readonly ppm: number } | null {
  const kind = handEventOf(e.event)
  const stream = kind?.kind === 'Karl Fischer' && eventFault(skid, e) === null ? subjectOf(skid, e) : null
  return stream === null ? null : { stream, ppm: e.value! * kind!.units[e.unit!]! }
}

/** The filter segment that an event says was changed; null where it says none. */
export function filterChanged(skid: Skid, e: HandEventInput): string | null {
  if (handEventOf(e.event)?.kind !== 'filter change') return null
  const segment = subjectOf(skid, e)
  return skid.segments.some((s) => s.id === segment && s.kind === 'filter') ? segment : null
}

/** Why an event of a kind that the calculation would use is kept only; null where it is used, or of no such kind. */
export function unusedWhy(skid: Skid, e: HandEventInput): string | null {
  const kind = handEventOf(e.event)?.kind
  const fault = eventFault(skid, e)
  if (fault !== null) return fault
  if (kind === 'Karl Fischer' && waterResult(skid, e) === null) return 'it names no feed'
  return kind === 'filter change' && filterChanged(skid, e) === null ? 'it names no filter' : null
}
