import type { Priority } from '../../server/core/report.ts'
import type { ZoneClock } from './clock.ts'
import type { Point } from './series.ts'

/** What stands in a trend besides its lines. Times in ms, values on the chart's own scale. */
export interface Overlay {
  /** Right of it nothing is known: now, or the moment shown. */
  readonly nowMs: number
  readonly nowLabel: string | null
  readonly bands: readonly {
    readonly fromMs: number
    readonly toMs: number
    readonly low: number
    readonly high: number
    readonly label: string
  }[]
  /** A limit as it was in force: value from `fromMs` on; the last holds to the end. side 1: above is not allowed. */
  readonly limits: readonly {
    readonly steps: readonly { readonly fromMs: number; readonly value: number | null }[]
    readonly side: 1 | -1
    readonly label: string
  }[]
  readonly gaps: readonly { readonly fromMs: number; readonly toMs: number; readonly label: string }[]
  readonly fan: {
    readonly low: readonly Point[]
    readonly mid: readonly Point[]
    readonly high: readonly Point[]
    readonly limit: number
    readonly lowMs: number
    readonly highMs: number
    readonly label: string
  } | null
  readonly onset: { readonly lowMs: number; readonly atMs: number; readonly highMs: number; readonly label: string } | null
  readonly alarms: readonly { readonly tMs: number; readonly priority: Priority }[]
  /** Where the reader points, in all charts of a page at once; null where nowhere. */
  readonly cursorMs: number | null
  /** A dashed upright with words: a change, a moment of notice. */
  readonly notes: readonly { readonly tMs: number; readonly label: string }[]
}

export const emptyOverlay = (nowMs: number): Overlay => ({
  nowMs,
  nowLabel: null,
  bands: [],
  limits: [],
  gaps: [],
  fan: null,
  onset: null,
  alarms: [],
  cursorMs: null,
  notes: [],
})

export interface Line {
  readonly name: string
  readonly points: readonly Point[]
  /** main: what the chart is about. The others differ by dash and carry their name at the end. */
  readonly look: 'main' | 'other'
}

export interface TrendSpec {
  readonly fromMs: number
  readonly toMs: number
  readonly low: number
  readonly high: number
  /** Name with unit, for the axis. */
  readonly yTitle: string
  readonly lines: readonly Line[]
  readonly overlay: Overlay
  readonly clock: ZoneClock
  readonly zone: string
}

/** What a chart shows at a moment, a line each: the value of the nearest point, null where none is near. */
export function valuesAt(spec: TrendSpec, tMs: number): { readonly name: string; readonly value: number | null }[] {
  const near = (spec.toMs - spec.fromMs) / 100
  return spec.lines.map((l) => {
    let best: Point | null = null
    for (const p of l.points) if (Math.abs(p.x - tMs) <= (best === null ? near : Math.abs(best.x - tMs))) best = p
    return { name: l.name, value: best?.y ?? null }
  })
}
