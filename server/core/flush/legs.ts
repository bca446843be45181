import { MonitorError } from '../errors.ts'
import { type Operation, operationOf, type SegmentOperation } from '../figures/operation.ts'
import type { FlushInput } from './input.ts'

/** A segment on the path of the flush liquid. */
export interface Leg {
  readonly id: string
  readonly op: SegmentOperation
  readonly asked: boolean
  readonly ratio: number
  /** Share of the whole flush flow that goes through it, in proportion to the feeds' normal volumes. */
  readonly share: number | null
}

export interface FlushPath {
  readonly legs: readonly Leg[]
  /** Legs one after another that each feed passes. */
  readonly chains: readonly (readonly Leg[])[]
  /** Normal flow of all feeds of the path together, m³/s. */
  readonly normalM3S: number | null
  readonly operation: Operation
  readonly assumptions: readonly string[]
  readonly hasQuench: boolean
}

/** The path as it would be without a deposit. */
export const cleanPath = (path: FlushPath): FlushPath => ({
  ...path,
  legs: path.legs.map((l) => ({ ...l, ratio: 1 })),
  chains: path.chains.map((c) => c.map((l) => ({ ...l, ratio: 1 }))),
})

/**
 * The path of the flush liquid: the asked segments, what follows them up to a quench (aqueous, isolated instead), and every leg that feeds these.
 * A segment follows another if it comes later and carries all its streams; a leg feeds if all its streams arrive on the path.
 * Errors: FLUSH_REFUSED without a segment or for one the skid does not have.
 */
export function flushPath(input: FlushInput): FlushPath {
  const { skid, segments } = input
  const unknown = segments.find((id) => !skid.segments.some((s) => s.id === id))
  if (segments.length === 0 || unknown !== undefined)
    throw new MonitorError(
      'FLUSH_REFUSED',
      unknown === undefined ? 'a flush plan needs a segment' : `the skid has no segment '${unknown}'`,
    )
  const operation = operationOf(skid, input.given)
  const indices = segments.map((id) => skid.segments.findIndex((s) => s.id === id))
  const quenchAsked = indices.some((i) => skid.segments[i]?.kind === 'quench')
  const firstQuench = skid.segments.findIndex((s, i) => s.kind === 'quench' && i > Math.min(...indices))
  const before = (i: number): boolean =>
    quenchAsked || (skid.segments[i]?.kind !== 'quench' && (firstQuench < 0 || i < firstQuench))
  const holds = (all: readonly string[], part: readonly string[]): boolean => part.length > 0 && part.every((s) => all.includes(s))
  const downstream = skid.segments.filter(
    (s, i) => indices.includes(i) || (before(i) && indices.some((k) => i > k && holds(s.streams, skid.segments[k]?.streams ?? []))),
  )
  const streams = [...new Set(downstream.flatMap((s) => s.streams))]
  const ops = operation.segments.filter((o, i) => segments.includes(o.spec.id) || (before(i) && holds(streams, o.spec.streams)))
  const flowOf = (ids: readonly string[]): number | null =>
    ids.reduce<number | null>((a, id) => {
      const q = operation.streams.find((s) => s.id === id)?.volumeFlowM3S ?? null
      return a === null || q === null ? null : a + q
    }, 0)
  const normalM3S = streams.length === 0 ? null : flowOf(streams)
  const assumptions: string[] = []
  const legs = ops.map((op): Leg => {
    const asked = segments.includes(op.spec.id)
    const given = input.ratios?.[op.spec.id] ?? null
    if (given === null) assumptions.push(`${op.spec.id}: no present ratio given, the clean channel (1.00) assumed`)
    const own = op.spec.streams.length === 0 ? null : flowOf(op.spec.streams)
    return {
      id: op.spec.id,
      op,
      asked,
      ratio: Math.max(1, given ?? 1),
      share: own === null || normalM3S === null || normalM3S === 0 ? null : own / normalM3S,
    }
  })
  const chains = streams.map((s) => legs.filter((l) => l.op.spec.streams.includes(s)))
  return {
    legs,
    chains,
    normalM3S,
    operation,
    assumptions,
    hasQuench: !quenchAsked && skid.segments.some((s) => s.kind === 'quench'),
  }
}
