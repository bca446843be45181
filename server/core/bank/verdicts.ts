import type { Layout } from '../derive/layout.ts'
import { type Column, type Explanation, type Kind, likelihood, sizeOf } from './hypotheses.ts'

/** Likelihood margins and ages (steps) at which an explanation is accepted; log likelihood ratios are in nats. Starting values. */
export const verdictRules = {
  deposit: { likelihood: 14, size: 0.012, age: 3, sinceGap: 4, margin: 3, driftingTap: 6 },
  other: { likelihood: 16, age: 10, ramp: 20, overDeposit: 4, overOther: 3, waivedAfter: 60, nearMove: 10 },
  tapLess: 1,
  tapAloneLess: 6,
  streamLess: 1,
  gapStepLess: 10,
  /** A lone sudden rise of this much is a blockage, unless the zero of an instrument may well have shifted so far: this share of its span. */
  blockage: 0.15,
  zeroShare: 0.01,
  /** Least likelihood and size (ln ΔP) of a lone step before an instrument is named for it. */
  zeroLikelihood: 40,
  zeroSize: 0.03,
  /** Lone falls in a row that together are the drift of an instrument. */
  falls: 3,
  /** A shift of this share of a tap's span is within what its accuracy allows: known, not alarmed. */
  slightShare: 0.001,
  /** Nats by which a stream must fall short before a lone step is put down to an instrument. */
  streamExcluded: 6,
} as const

/** Another explanation and how well it does, for the evidence shown with an alarm. */
export interface Rival {
  readonly kind: Kind
  readonly of: number
  readonly likelihood: number
}

/** What a verdict looks at. */
export interface Court {
  readonly layout: Layout
  readonly columns: readonly Column[]
  readonly now: number
  readonly sinceGap: number
  /** Step at which data came back after the last gap; −1 without one. */
  readonly gapAt: number
  /** Steps at which flow or viscosity moved. */
  readonly moves: readonly number[]
  readonly drifting: readonly boolean[]
  watched(segment: number): boolean
}

export interface Verdict {
  readonly column: Column
  readonly likelihood: number
  readonly size: number
  readonly ageSteps: number
  readonly rivals: readonly Rival[]
}

/** Segments whose ΔP an explanation touches. */
export const touches = (layout: Layout, e: Explanation): number[] =>
  e.kind === 'tap-ramp' || e.kind === 'tap-step'
    ? [...layout.taps[e.of]!.inletOf, ...layout.taps[e.of]!.outletOf]
    : e.kind === 'stream'
      ? layout.segments.flatMap((g, i) => (g.streams.includes(e.of) ? [i] : []))
      : [e.of]

/** A growing deposit that is likely, large enough, old enough and beats the best rival by the margin; null while none does. */
export function depositVerdict(court: Court): Verdict | null {
  const rule = verdictRules.deposit
  if (court.sinceGap < rule.sinceGap) return null
  const { now } = court
  const top = best(
    court,
    (c) => c.kind === 'deposit',
    (c) => c.d > 0 && now - c.born >= rule.age && likelihood(c, now) > rule.likelihood && sizeOf(c) * (now - c.born) > rule.size,
  )
  if (top === null) return null
  const seg = court.layout.segments[top.of]!
  const rivals = rivalsOf(court, top.of)
  const onDrift = [seg.tapIn, seg.tapOut].some((t) => t !== null && court.drifting[t] === true)
  const margin = rule.margin + (onDrift ? rule.driftingTap : 0)
  if (likelihood(top, now) < (rivals[0]?.likelihood ?? 0) + margin) return null
  return { column: top, likelihood: likelihood(top, now), size: sizeOf(top), ageSteps: now - top.born, rivals }
}

/** Rivals of a deposit in a segment, best first, with the handicaps that experience gives each. */
function rivalsOf(court: Court, segment: number): Rival[] {
  const { columns, now, layout } = court
  const g = layout.segments[segment]!
  const top = (kinds: readonly Kind[], of: number, less: (c: Column) => number) =>
    columns.reduce((m, c) => (kinds.includes(c.kind) && c.of === of ? Math.max(m, likelihood(c, now) - less(c)) : m), 0)
  const inGap = (c: Column) => court.gapAt >= 0 && Math.abs(c.born - court.gapAt) <= 2
  const rivals: Rival[] = [
    { kind: 'step', of: segment, likelihood: top(['step', 'settling'], segment, (c) => (inGap(c) ? verdictRules.gapStepLess : 0)) },
  ]
  for (const tap of [g.tapIn, g.tapOut]) {
    if (tap === null) continue
    const mirror = touches(layout, { kind: 'tap-ramp', of: tap }).some((o) => o !== segment && court.watched(o))
    const less = mirror ? verdictRules.tapLess : verdictRules.tapAloneLess
    rivals.push({ kind: 'tap-ramp', of: tap, likelihood: top(['tap-ramp', 'tap-step'], tap, () => less) })
  }
  for (const i of g.streams) rivals.push({ kind: 'stream', of: i, likelihood: top(['stream'], i, () => verdictRules.streamLess) })
  return rivals.sort((a, b) => b.likelihood - a.likelihood)
}

/**
 * The best explanation that is no deposit, once it is likely and old enough, clear of any deposit in its segments and, for half an hour, of
 * any other explanation that shares a segment and would look different. Null while none is.
 */
export function otherVerdict(court: Court): Verdict | null {
  const rule = verdictRules.other
  const { columns, now, layout } = court
  const top = best(
    court,
    (c) => c.kind !== 'deposit',
    (c) => now - c.born >= (c.kind === 'tap-ramp' ? rule.ramp : rule.age) && likelihood(c, now) > rule.likelihood,
  )
  if (top === null) return null
  const l = likelihood(top, now)
  // A ramp may be old enough only because it was born before a jump: the jump of the same tap, if it fits better, is waited for.
  if (
    top.kind === 'tap-ramp' &&
    columns.some((c) => c.kind === 'tap-step' && c.of === top.of && likelihood(c, now) > l + rule.overOther)
  )
    return null
  const on = touches(layout, top)
  for (const c of columns)
    if (c.kind === 'deposit' && c.d > 0 && on.includes(c.of) && court.watched(c.of) && l < likelihood(c, now) + rule.overDeposit)
      return null
  const own = familyOf(court, top)
  if (now - top.born < rule.waivedAfter)
    for (const c of columns) {
      if (c.kind === 'deposit' || familyOf(court, c) === own || l >= likelihood(c, now) + rule.overOther) continue
      if (touches(layout, c).some((s) => on.includes(s))) return null
    }
  const rivals = bestByKind(court, top)
  return { column: top, likelihood: l, size: sizeOf(top), ageSteps: now - top.born, rivals }
}

/** Explanations of one family look the same: a step in a segment and a shift of a tap that only this segment sees. */
function familyOf(court: Court, e: Explanation): string {
  if (e.kind === 'step' || e.kind === 'settling') return `segment ${e.of}`
  const seen = touches(court.layout, e).filter((s) => court.watched(s))
  if (seen.length === 1) return `segment ${seen[0]}`
  return e.kind === 'stream' ? `stream ${e.of}` : `tap ${e.of}`
}

/** The three best other explanations, each once. */
function bestByKind(court: Court, top: Column): Rival[] {
  const found = new Map<string, Rival>()
  for (const c of court.columns) {
    if (c.kind === top.kind && c.of === top.of) continue
    const l = likelihood(c, court.now)
    const key = `${c.kind} ${c.of}`
    if (l > (found.get(key)?.likelihood ?? 1)) found.set(key, { kind: c.kind, of: c.of, likelihood: l })
  }
  return [...found.values()].sort((a, b) => b.likelihood - a.likelihood).slice(0, 3)
}

/** The likeliest column of a kind that passes the test. */
function best(court: Court, isMeant: (c: Column) => boolean, test: (c: Column) => boolean): Column | null {
  let top: Column | null = null
  let most = 0
  for (const c of court.columns) {
    if (!isMeant(c)) continue
    const l = likelihood(c, court.now)
    if (l > most && test(c)) {
      top = c
      most = l
    }
  }
  return top
}

/** An instrument whose zero alone could have shifted the ΔP of one segment by so much: its dp cell, or a tap no other segment checks. */
export function zeroSuspect(
  layout: Layout,
  segment: number,
  shiftPa: number,
): { readonly tag: string; readonly sizePa: number } | null {
  const g = layout.segments[segment]!
  const within = (spanPa: number | null) => spanPa !== null && Math.abs(shiftPa) <= verdictRules.zeroShare * spanPa
  if (g.dpTag !== null) return within(g.dpSpanPa) ? { tag: layout.skid.tags[g.dpTag]!.tag, sizePa: shiftPa } : null
  for (const [tap, sign] of [
    [g.tapIn, 1],
    [g.tapOut, -1],
  ] as const) {
    if (tap === null) continue
    const t = layout.taps[tap]!
    if (t.inletOf.length + t.outletOf.length === 1 && within(t.spanPa)) return { tag: t.name, sizePa: sign * shiftPa }
  }
  return null
}
