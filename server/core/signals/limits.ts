import type { AlarmBook } from '../alarms/book.ts'
import { level } from '../alarms/condition.ts'
import type { Signal } from '../alarms/occurrence.ts'
import type { Layout } from '../derive/layout.ts'
import { segmentDp } from '../derive/step.ts'
import type { Priority } from '../report.ts'
import type { Scan } from '../scan/grid.ts'
import { type LimitName, limitNames } from '../sequence.ts'
import { barFromPa, fromSi, type Unit, units, valueUnit } from '../units.ts'
import type { SiteRules } from './site-rules.ts'

/** Limits in force, by segment; people may change them during a run. */
export type LimitTable = Record<LimitName, number | null>[]

export const limitsOf = (layout: Layout): LimitTable =>
  layout.segments.map((g) => Object.fromEntries(limitNames.map((n) => [n, g.spec.limits[n]])) as Record<LimitName, number | null>)

interface LimitRule {
  readonly limit: LimitName
  readonly kind: 'dp-limit' | 'pressure-limit' | 'temperature-limit' | 'flow'
  readonly side: 'high' | 'low'
  readonly priority: Priority
  readonly word: string
  /** Deadband as a share of the instrument's range; delays in s, before they are cut to the grid. Starting values of EEMUA 191 (secondary). */
  readonly deadband: number
  readonly delayS: number
  readonly productionOnly: boolean
}

const rules: readonly LimitRule[] = [
  {
    limit: 'dpHighHighBar',
    kind: 'dp-limit',
    side: 'high',
    priority: 'high',
    word: 'ΔP above its high-high limit',
    deadband: 0.02,
    delayS: 15,
    productionOnly: false,
  },
  {
    limit: 'dpHighBar',
    kind: 'dp-limit',
    side: 'high',
    priority: 'medium',
    word: 'ΔP above its high limit',
    deadband: 0.02,
    delayS: 15,
    productionOnly: false,
  },
  {
    limit: 'pressureHighBar',
    kind: 'pressure-limit',
    side: 'high',
    priority: 'high',
    word: 'inlet pressure above its limit',
    deadband: 0.02,
    delayS: 15,
    productionOnly: false,
  },
  {
    limit: 'temperatureHighHighC',
    kind: 'temperature-limit',
    side: 'high',
    priority: 'high',
    word: 'temperature above its high-high limit',
    deadband: 0.01,
    delayS: 2,
    productionOnly: true,
  },
  {
    limit: 'temperatureHighC',
    kind: 'temperature-limit',
    side: 'high',
    priority: 'high',
    word: 'temperature above its high limit',
    deadband: 0.01,
    delayS: 2,
    productionOnly: true,
  },
  {
    limit: 'temperatureLowC',
    kind: 'temperature-limit',
    side: 'low',
    priority: 'medium',
    word: 'temperature below its low limit',
    deadband: 0.01,
    delayS: 60,
    productionOnly: true,
  },
  {
    limit: 'flowLow',
    kind: 'flow',
    side: 'low',
    priority: 'medium',
    word: 'flow below its limit',
    deadband: 0.05,
    delayS: 15,
    productionOnly: true,
  },
]

/** A delay never asks for more than fifteen scans: a grid finer than a second belongs to a run that lives for minutes. */
const delayOnGrid = (delayS: number, scanS: number): number => Math.min(delayS, 15 * scanS)

/** One limit of one segment, with what it reads. */
interface Check {
  readonly rule: LimitRule
  readonly segment: number
  readonly key: string
  /** Tags behind the value; a flaw in any of them makes it unknown. */
  readonly tags: readonly number[]
  readonly deadband: number
  readonly unit: Unit | null
  /** Whether the value is one tag's reading as it stands, (si − offset)/factor. */
  readonly direct: boolean
  readonly offset: number
  readonly factor: number
}

/**
 * Plain limits of every segment, scan by scan. A bad input is null: it neither raises nor clears (ALM-06). A scan in which a tag simply did
 * not report says nothing, unless the log has gone `silent`: loggers jitter, and an empty cell is not a bad reading.
 * `hears` is the book's: what it would not hear costs no signal.
 */
export function createLimits(layout: Layout, limits: LimitTable, hears: AlarmBook['hears'], site: SiteRules) {
  const scanS = layout.skid.scanSeconds
  const checks = layout.segments.flatMap((_, i) =>
    rules.map((rule) => checkOf(layout, i, rule, site)).filter((c) => c.tags.length > 0),
  )
  const dpBar = (c: Check, scan: Scan): number | null => {
    const dp = segmentDp(layout, c.segment, scan)
    return dp === null ? null : barFromPa(dp)
  }
  return {
    scan(
      scan: Scan,
      tMs: number,
      on: { production: boolean; silent: boolean; fouled: (i: number) => boolean },
      emit: (s: Signal) => void,
    ): void {
      for (const c of checks) {
        const limit = limits[c.segment]![c.rule.limit]
        if (limit === null && !hears(c.key, false)) continue
        const idle = limit === null || (c.rule.productionOnly && !on.production)
        if ((idle || isBelow(c, limit, scan)) && !hears(c.key, false)) continue
        const tag = worst(c, scan)
        const value = c.rule.kind === 'dp-limit' ? dpBar(c, scan) : tag < 0 ? null : fromSi(scan.si[tag]!, c.unit)
        if (value === null && !idle && !on.silent && !c.tags.some((t) => scan.flaw[t] !== 0)) continue
        const now = idle ? 'under' : level(value, limit, c.deadband, c.rule.side)
        const over = now === 'bad' ? null : now === 'over'
        if (hears(c.key, over)) emit(signalOf(c, limit, value, tag, over, now === 'under', tMs, on.fouled))
      }
    },
  }

  /** Apart from the loop: what its message closes over would be set up anew for every check. */
  function signalOf(
    c: Check,
    limit: number | null,
    value: number | null,
    tag: number,
    over: boolean | null,
    under: boolean,
    tMs: number,
    fouled: (i: number) => boolean,
  ): Signal {
    const seg = layout.segments[c.segment]!.spec
    const delay = delayOnGrid(c.rule.delayS, scanS)
    return {
      key: c.key,
      tMs,
      over,
      under,
      kind: c.rule.kind,
      segment: seg.id,
      tag: value === null || tag < 0 ? null : layout.skid.tags[tag]!.tag,
      priority: c.rule.priority,
      value,
      limit,
      unit: c.unit,
      message: () => `${seg.title}: ${c.rule.word} of ${String(limit)} ${c.unit ?? ''}`.trim(),
      cause: c.rule.kind !== 'dp-limit' ? null : !fouled(c.segment) ? 'unknown' : seg.kind === 'filter' ? 'filter' : 'fouling',
      onset: null,
      detector: 'limit',
      evidence: none,
      onDelayS: delay,
      offDelayS: delay,
    }
  }
}
const none = { for: [], against: [], notExcluded: [] }

function checkOf(layout: Layout, i: number, rule: LimitRule, site: SiteRules): Check {
  const seg = layout.segments[i]!
  const { tags } = layout.skid
  const spanOf = (t: number): number => {
    const range = tags[t]?.range
    return range == null ? 0 : range[1] - range[0]
  }
  const make = (list: readonly number[], span: number, unit: Unit | null): Check => ({
    rule,
    segment: i,
    key: `${rule.kind}:${seg.spec.id}:${rule.limit}`,
    tags: list,
    deadband: site.deadband(rule.kind, seg.spec.id) ?? rule.deadband * span,
    unit,
    direct: rule.kind !== 'dp-limit' || seg.dpTag !== null,
    offset: unit === null ? 0 : units[unit].offset,
    factor: unit === null ? 1 : units[unit].factor,
  })
  switch (rule.kind) {
    case 'dp-limit': {
      const outTag = seg.tapOut === null ? [] : [layout.taps[seg.tapOut]!.tag]
      return make(
        seg.dpTag !== null ? [seg.dpTag] : [seg.inTag!, ...outTag],
        seg.spec.limits.dpHighBar ?? seg.spec.limits.dpHighHighBar ?? 0,
        'bar',
      )
    }
    case 'pressure-limit':
      return make(seg.inTag === null ? [] : [seg.inTag], seg.inTag === null ? 0 : spanOf(seg.inTag), 'bar')
    case 'temperature-limit':
      return make(seg.temperatures, Math.max(0, ...seg.temperatures.map(spanOf)), 'degC')
    case 'flow': {
      const st = seg.streams[0]
      const t = st === undefined ? -1 : layout.streams[st]!.tag
      return make(t < 0 ? [] : [t], spanOf(t), t < 0 ? null : valueUnit(tags[t]!))
    }
  }
}

/** Whether a reading is there and not beyond its limit: what nearly every scan says, told without a number that has to be boxed. */
function isBelow(c: Check, limit: number, scan: Scan): boolean {
  const tag = c.direct ? worst(c, scan) : -1
  if (tag < 0 || scan.used[tag] === 0) return false
  const value = (scan.si[tag]! - c.offset) / c.factor
  return c.rule.side === 'high' ? value <= limit : value >= limit
}

/** The tag a limit is read from: of several the one nearest the limit, of ΔP the cell where there is one; −1 where none is. */
function worst(c: Check, scan: Scan): number {
  if (c.rule.kind === 'dp-limit') return c.tags.length === 1 ? c.tags[0]! : -1
  const { si, used } = scan
  let at = -1
  for (let i = 0; i < c.tags.length; i++) {
    const t = c.tags[i]!
    if (used[t] === 0) continue
    if (at < 0 || (c.rule.side === 'high' ? si[t]! > si[at]! : si[t]! < si[at]!)) at = t
  }
  return at
}
