import { level } from '../alarms/condition.ts'
import type { Signal } from '../alarms/occurrence.ts'
import type { Layout } from '../derive/layout.ts'
import { segmentDp } from '../derive/step.ts'
import type { Priority } from '../report.ts'
import type { Scan } from '../scan/grid.ts'
import { type LimitName, limitNames } from '../sequence.ts'
import { barFromPa, cFromK, fromSi, valueUnit } from '../units.ts'

/** Limits in force, by segment; people may change them during a run. */
export type LimitTable = Record<LimitName, number | null>[]

export const limitsOf = (layout: Layout): LimitTable =>
  layout.segments.map((g) => Object.fromEntries(limitNames.map((n) => [n, g.spec.limits[n]])) as Record<LimitName, number | null>)

interface LimitRule {
  readonly limit: LimitName
  readonly kind: 'dp-limit' | 'pressure-limit' | 'temperature-limit' | 'flow'
  readonly side: 'high' | 'low'
  readonly priority: Priority
  readonly unit: string | null
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
    unit: 'bar',
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
    unit: 'bar',
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
    unit: 'bar',
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
    unit: 'degC',
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
    unit: 'degC',
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
    unit: 'degC',
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
    unit: null,
    word: 'flow below its limit',
    deadband: 0.05,
    delayS: 15,
    productionOnly: true,
  },
]

/** A delay never asks for more than fifteen scans: a grid finer than a second belongs to a run that lives for minutes. */
export const delayOnGrid = (delayS: number, scanS: number): number => Math.min(delayS, 15 * scanS)

interface Reading {
  readonly value: number | null
  readonly tag: string | null
  readonly span: number
  readonly unit: string | null
}

/** Plain limits of every segment at one scan. A bad input is null: it neither raises nor clears (ALM-06). */
export function limitSignals(
  layout: Layout,
  limits: LimitTable,
  scan: Scan,
  tMs: number,
  production: boolean,
  fouled: (i: number) => boolean,
  emit: (s: Signal) => void,
): void {
  const scanS = layout.skid.scanSeconds
  layout.segments.forEach((seg, i) => {
    for (const rule of rules) {
      const limit = limits[i]![rule.limit]
      if (limit === null) continue
      const r = readingFor(layout, i, rule, scan)
      const value = rule.productionOnly && !production ? null : r.value
      const now = level(value, limit, rule.deadband * r.span, rule.side)
      const delayS = delayOnGrid(rule.delayS, scanS)
      const idle = rule.productionOnly && !production
      emit({
        key: `${rule.kind}:${seg.spec.id}:${rule.limit}`,
        tMs,
        // Outside production a production limit has no condition at all; with a bad reading it has an unknown one.
        over: idle ? false : now === 'bad' ? null : now === 'over',
        under: idle || now === 'under',
        kind: rule.kind,
        segment: seg.spec.id,
        tag: r.tag,
        priority: rule.priority,
        value: r.value,
        limit,
        unit: r.unit,
        message: () => `${seg.spec.title}: ${rule.word} of ${limit} ${r.unit ?? ''}`.trim(),
        cause: rule.kind === 'dp-limit' ? (fouled(i) ? (seg.spec.kind === 'filter' ? 'filter' : 'fouling') : 'unknown') : null,
        onset: null,
        detector: 'limit',
        evidence: none,
        onDelayS: delayS,
        offDelayS: delayS,
      })
    }
  })
}
const none = { for: [], against: [], notExcluded: [] }

function readingFor(layout: Layout, i: number, rule: LimitRule, scan: Scan): Reading {
  const seg = layout.segments[i]!
  const tags = layout.skid.tags
  const spanOf = (t: number): number => {
    const range = tags[t]?.range
    return range == null ? 0 : range[1] - range[0]
  }
  const usable = (t: number) => t >= 0 && scan.used[t]! > 0
  switch (rule.kind) {
    case 'dp-limit': {
      const dp = segmentDp(layout, i, scan)
      const limit = seg.spec.limits.dpHighBar ?? seg.spec.limits.dpHighHighBar ?? 1
      return {
        value: dp === null ? null : barFromPa(dp),
        tag: seg.dpTag === null ? null : tags[seg.dpTag]!.tag,
        span: limit,
        unit: 'bar',
      }
    }
    case 'pressure-limit': {
      const t = seg.inTag
      return t === null
        ? { value: null, tag: null, span: 0, unit: 'bar' }
        : { value: usable(t) ? barFromPa(scan.si[t]!) : null, tag: tags[t]!.tag, span: spanOf(t), unit: 'bar' }
    }
    case 'temperature-limit': {
      let worst = -1
      for (const t of seg.temperatures)
        if (usable(t) && (worst < 0 || (rule.side === 'high' ? scan.si[t]! > scan.si[worst]! : scan.si[t]! < scan.si[worst]!)))
          worst = t
      return worst < 0
        ? { value: null, tag: null, span: 0, unit: 'degC' }
        : { value: cFromK(scan.si[worst]!), tag: tags[worst]!.tag, span: spanOf(worst), unit: 'degC' }
    }
    case 'flow': {
      const st = seg.streams[0]
      const t = st === undefined ? -1 : layout.streams[st]!.tag
      if (t < 0) return { value: null, tag: null, span: 0, unit: null }
      const unit = valueUnit(tags[t]!)
      return { value: usable(t) ? fromSi(scan.si[t]!, unit) : null, tag: tags[t]!.tag, span: spanOf(t), unit }
    }
  }
}
