import type { LimitName } from '../../server/core/sequence.ts'
import type { AlarmRow, LiveState, Marks, SegmentFacts, SegmentState } from '../../server/wire/index.ts'
import { fanEdge } from './fan.ts'
import { axisUnit, figure, fixed, unitText } from './format.ts'
import type { Line, Overlay, TrendSpec } from './overlay.ts'
import { feedPair, quotient } from './quotient.ts'
import { type RunData, rhythmMs } from './run-data.ts'
import type { Point } from './series.ts'
import { extent } from './trend-extent.ts'
import { gaps } from './trend-gaps.ts'
import { limitWords } from './words.ts'

export const trendKinds = ['ratio', 'dp', 'temperature', 'pressure', 'flow', 'feed-ratio', 'charts'] as const
export type TrendKind = (typeof trendKinds)[number]
export const trendWords: Record<TrendKind, { readonly tab: string; readonly title: string }> = {
  ratio: { tab: 'Ratio', title: 'flow resistance over clean [–]' },
  dp: { tab: 'ΔP', title: 'pressure drop [bar]' },
  temperature: { tab: 'Temperatures', title: 'temperatures [°C]' },
  pressure: { tab: 'Pressures', title: 'pressures at its ends' },
  flow: { tab: 'Feeds', title: 'flows of its feeds' },
  'feed-ratio': { tab: 'Feed ratio', title: 'ratio of its feeds' },
  charts: { tab: 'Charts', title: 'chart of the promise, CUSUM over its decision interval [–]' },
}

export interface TrendView {
  readonly kind: TrendKind
  readonly segment: string
  readonly fromMs: number
  readonly toMs: number
  /** Now, or the moment shown; nothing later is known. */
  readonly atMs: number
  readonly alarms: readonly AlarmRow[]
  /** Another run in the same segment, laid over this one's time. */
  readonly other?: { readonly name: string; readonly ratio: readonly Point[]; readonly dpBar: readonly Point[] } | null
}

/** Trends of detector steps; the others are of readings. */
const ofSteps: ReadonlySet<TrendKind> = new Set(['ratio', 'dp', 'charts'])

/** What a trend shows of a segment at a moment: pure, from what the page knows. */
export function trendSpec(data: RunData, state: LiveState, marks: Marks, view: TrendView): TrendSpec {
  const facts = data.detail.skidFacts
  const spec = facts.segments.find((s) => s.id === view.segment) ?? facts.segments[0]!
  const now = state.segments.find((s) => s.segment === spec.id)
  const picture = pictureOf(data, marks, view, spec, now)
  const visible = picture.lines.flatMap((l) => l.points.filter((p) => p.x >= view.fromMs && p.x <= view.atMs))
  const limits = picture.limits.flatMap((l) => l.steps.map((s) => s.value)).filter((v) => v !== null)
  const [low, high] = extent(view.kind, visible, limits, picture.fan !== null)
  return {
    fromMs: view.fromMs,
    toMs: view.toMs,
    low,
    high,
    yTitle: picture.yTitle,
    lines: picture.lines,
    clock: data.clock,
    zone: facts.timeZone,
    overlay: {
      nowMs: view.atMs,
      nowLabel: picture.nowLabel,
      bands: picture.bands,
      limits: picture.limits,
      gaps: gaps(data, view, rhythmMs(state.clock.speed), ofSteps.has(view.kind) ? spec.id : null),
      fan: picture.fan,
      onset: onsetOf(data, marks, view, spec.id, now),
      alarms: view.alarms
        .filter((a) => a.raisedMs <= view.atMs && (a.segment === spec.id || a.segment === null))
        .map((a) => ({ tMs: a.raisedMs, priority: a.priority })),
      cursorMs: null,
      notes: noticed(data, view, spec.id),
    },
  }
}

type Picture = Pick<Overlay, 'bands' | 'limits' | 'fan' | 'nowLabel'> & { readonly lines: readonly Line[]; readonly yTitle: string }

function pictureOf(data: RunData, marks: Marks, view: TrendView, spec: SegmentFacts, now: SegmentState | undefined): Picture {
  const own = data.segments.get(spec.id)
  const facts = data.detail.skidFacts
  const tagLine = (tag: string, look: Line['look'], name = tag): Line => ({
    name,
    look,
    points: data.tags.get(tag)?.points() ?? [],
  })
  const limit = (name: LimitName, side: 1 | -1, scale = 1, unit = limitWords[name].unit) =>
    limitOf(marks, view, spec.id, name, side, scale, unit)
  const none = { bands: [], fan: null, limits: [] }
  switch (view.kind) {
    case 'ratio': {
      const clean = now?.cleanDpBar ?? now?.baseline?.dpBar ?? null
      const limits = clean === null || !(clean > 0) ? [] : [...limit('dpHighBar', 1, 1 / clean)]
      const b = now?.baseline ?? null
      const band =
        b === null
          ? []
          : [
              {
                fromMs: b.fromMs,
                toMs: view.atMs,
                low: 1 - 2 * b.sigma,
                high: 1 + 2 * b.sigma,
                label: `clean baseline${b.provisional ? ', provisional,' : ''} 1.00 ± ${fixed(2 * b.sigma, 3)}`,
              },
            ]
      return {
        lines: [{ name: spec.id, look: 'main', points: own?.ratio.points() ?? [] }, ...otherLine(view, 'ratio')],
        yTitle: 'ratio [–]',
        bands: band,
        limits,
        fan: fanOf(data, view, now, clean),
        nowLabel: now?.ratio == null ? null : fixed(now.ratio, 2),
      }
    }
    case 'dp':
      return {
        ...none,
        lines: [
          { name: spec.id, look: 'main', points: own?.dpBar.points() ?? [] },
          { name: 'clean bore', look: 'other', points: own === undefined ? [] : quotient(own.dpBar.points(), own.ratio.points()) },
          ...otherLine(view, 'dpBar'),
        ],
        yTitle: 'ΔP [bar]',
        limits: [...limit('dpHighBar', 1), ...limit('dpHighHighBar', 1)],
        nowLabel: now?.dpBar == null ? null : figure(now.dpBar, 'bar'),
      }
    case 'temperature': {
      const lines = spec.temperatures.map((t, i) => tagLine(t, i === hottest(spec, now) ? 'main' : 'other'))
      if (spec.coolantTemperature !== null)
        lines.push(tagLine(spec.coolantTemperature, 'other', `${spec.coolantTemperature} coolant`))
      return {
        ...none,
        lines,
        yTitle: 'temperature [°C]',
        limits: [...limit('temperatureHighC', 1), ...limit('temperatureHighHighC', 1), ...limit('temperatureLowC', -1)],
        nowLabel: null,
      }
    }
    case 'pressure': {
      const unit = facts.tags.find((t) => t.tag === spec.pressureIn)?.unit ?? null
      const lines = [spec.pressureIn, spec.pressureOut]
        .filter((t) => t !== null)
        .map((t, i) => tagLine(t, i === 0 ? 'main' : 'other'))
      if (spec.dpTag !== null) lines.push(tagLine(spec.dpTag, 'other'))
      return {
        ...none,
        lines,
        yTitle: `pressure ${axisUnit(unit)}`,
        limits: unit === 'bar' ? limit('pressureHighBar', 1) : [],
        nowLabel: null,
      }
    }
    case 'flow': {
      const tags = facts.streams.filter((s) => spec.streams.includes(s.id))
      const unit = facts.tags.find((t) => t.tag === tags[0]?.flowTag)?.unit ?? null
      return {
        ...none,
        lines: tags
          .filter((s) => facts.tags.find((t) => t.tag === s.flowTag)?.unit === unit)
          .map((s, i) => tagLine(s.flowTag, i === 0 ? 'main' : 'other', `${s.id} ${s.flowTag}`)),
        yTitle: `flow ${axisUnit(unit)}`,
        limits: limit('flowLow', -1, 1, unit),
        nowLabel: null,
      }
    }
    case 'feed-ratio': {
      const pair = feedPair(facts, spec)
      const flows = (pair?.tags ?? []).map((tag) => data.tags.get(tag)?.points() ?? [])
      const factor = pair?.molMol ?? 1
      const between = spec.feedRatio === null || pair?.molMol == null ? [] : [spec.feedRatio.low, spec.feedRatio.high]
      return {
        ...none,
        lines: [
          {
            name: pair === null ? '' : `${pair.of[0]} : ${pair.of[1]}`,
            look: 'main',
            points: quotient(flows[0] ?? [], flows[1] ?? [], factor),
          },
        ],
        yTitle: pair?.molMol == null ? 'ratio [–]' : 'ratio [mol/mol]',
        limits: between.map((value, i) => ({
          side: i === 0 ? -1 : 1,
          label: `${i === 0 ? 'lowest' : 'highest'} ${fixed(value, 2)} mol/mol`,
          steps: [{ fromMs: view.fromMs, value }],
        })),
        nowLabel: null,
      }
    }
    case 'charts':
      return {
        ...none,
        lines: [
          { name: 'rise', look: 'main', points: own?.cusum.points() ?? [] },
          { name: 'fall', look: 'other', points: own?.cusumLow.points() ?? [] },
        ],
        yTitle: 'CUSUM [–]',
        limits: [{ side: 1, label: 'decision interval h', steps: [{ fromMs: view.fromMs, value: 1 }] }],
        nowLabel: null,
      }
  }
}

const otherLine = ({ other }: TrendView, of: 'ratio' | 'dpBar'): Line[] =>
  other == null ? [] : [{ name: other.name, look: 'other', points: other[of] }]

const hottest = (spec: SegmentFacts, now: SegmentState | undefined): number => {
  let top = 0
  spec.temperatures.forEach((tag, i) => {
    const of = (t: string | undefined) => now?.temperatures.find((x) => x.tag === t)?.tempC ?? -Infinity
    if (of(tag) > of(spec.temperatures[top])) top = i
  })
  return top
}

/** A limit as it was in force up to the moment shown, in the unit it is named in times `scale`. */
function limitOf(
  marks: Marks,
  view: TrendView,
  segment: string,
  name: LimitName,
  side: 1 | -1,
  scale: number,
  unit: string | null,
): Overlay['limits'] {
  const all = marks.limits
    .filter((l) => l.segment === segment && l.limit === name && l.fromMs <= view.atMs)
    .sort((a, b) => a.fromMs - b.fromMs)
  if (!all.some((l) => l.value !== null)) return []
  const last = all.at(-1)!
  const was = all.at(-2)
  const value = last.value === null ? 'off' : `${fixed(last.value, 1)} ${unitText(unit)}`
  const changed =
    was === undefined || last.person === null ? '' : `, was ${was.value === null ? 'off' : fixed(was.value, 1)}; ${last.person}`
  return [
    {
      side,
      label: `${limitWords[name].name} ${value}${changed}`,
      steps: all.map((l, i) => ({
        fromMs: i === 0 ? Math.min(l.fromMs, view.fromMs) : l.fromMs,
        value: l.value === null ? null : l.value * scale,
      })),
    },
  ]
}

function fanOf(data: RunData, view: TrendView, now: SegmentState | undefined, clean: number | null): Overlay['fan'] {
  const f = now?.forecast ?? null
  if (f === null || now?.ratio == null || clean === null || f.limitBar === null) return null
  const limit = f.limitBar / clean
  const edge = (atMs: number) => fanEdge(view.atMs, now.ratio!, limit, atMs)
  const mid = edge(f.atMs)
  if (mid.length === 0) return null
  return {
    low: edge(f.lowMs),
    mid,
    high: edge(f.highMs),
    limit,
    lowMs: f.lowMs,
    highMs: f.highMs,
    label: `${data.clock.hm(f.lowMs)} to ${data.clock.hm(f.highMs)} (${Math.round(100 * f.level)} %)`,
  }
}

function onsetOf(data: RunData, marks: Marks, view: TrendView, segment: string, now: SegmentState | undefined): Overlay['onset'] {
  const o = now?.onset ?? [...marks.onsets].reverse().find((x) => x.segment === segment && x.foundMs <= view.atMs) ?? null
  if (o === null || view.kind === 'flow' || view.kind === 'pressure' || view.kind === 'feed-ratio') return null
  const { hm } = data.clock
  return {
    lowMs: o.lowMs,
    atMs: o.atMs,
    highMs: o.highMs,
    label: `began ${hm(o.atMs)} (${hm(o.lowMs)} to ${hm(o.highMs)}, ${Math.round(100 * o.level)} %)`,
  }
}

/** The moment that the growth was noticed: the fouling alarm. */
const noticed = (data: RunData, view: TrendView, segment: string): Overlay['notes'] =>
  view.alarms
    .filter((a) => a.kind === 'fouling' && a.segment === segment && a.raisedMs <= view.atMs)
    .slice(-1)
    .map((a) => ({ tMs: a.raisedMs, label: `noticed ${data.clock.hm(a.raisedMs)}` }))
