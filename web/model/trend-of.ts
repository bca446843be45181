import type { AlarmRow, SkidFacts } from '../../server/wire/index.ts'
import type { TrendKind } from './trend-spec.ts'

type Facts = Pick<SkidFacts, 'segments' | 'tags' | 'streams'>

/** Which trend shows an alarm: of its segment, or of the first that uses its tag, in the quantity it is about. Null where no place belongs to it. */
export function trendOf(
  a: Pick<AlarmRow, 'kind' | 'segment' | 'tag'>,
  facts: Facts,
): { readonly segment: string; readonly kind: TrendKind } | null {
  const tag = facts.tags.find((t) => t.tag === a.tag)
  const uses = (s: Facts['segments'][number], name: string): boolean =>
    s.temperatures.includes(name) ||
    [s.coolantTemperature, s.pressureIn, s.pressureOut, s.dpTag].includes(name) ||
    s.streams.some((id) => facts.streams.some((x) => x.id === id && x.flowTag === name))
  const place =
    facts.segments.find((s) => s.id === a.segment) ?? (tag === undefined ? undefined : facts.segments.find((s) => uses(s, tag.tag)))
  if (place === undefined) return null
  return { segment: place.id, kind: kindOf(a, tag?.unit ?? null) }
}

function kindOf(a: Pick<AlarmRow, 'kind'>, unit: string | null): TrendKind {
  switch (a.kind) {
    case 'exotherm':
    case 'temperature-limit':
      return 'temperature'
    case 'feed-ratio':
    case 'flow':
      return 'flow'
    case 'dp-limit':
      return 'dp'
    case 'pressure-limit':
      return 'pressure'
    case 'sensor':
      return unit === 'degC' || unit === 'K' ? 'temperature' : unit === 'bar' || unit === 'mbar' ? 'pressure' : 'flow'
    default:
      return 'ratio'
  }
}

/** The part of the run that shows how an alarm came: from 20 min before its onset's earliest (half an hour before the raise without one) to half an hour after. */
export function spanOf(a: Pick<AlarmRow, 'onset' | 'raisedMs'>): readonly [fromMs: number, toMs: number] {
  const from = a.onset === null ? a.raisedMs - 1_800_000 : Math.min(Date.parse(a.onset.low), a.raisedMs) - 1_200_000
  return [from, a.raisedMs + 1_800_000]
}
