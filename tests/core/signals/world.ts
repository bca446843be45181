import { createPipeline } from '../../../server/core/pipeline/pipeline.ts'
import { randomOf } from '../../../server/core/sim/random.ts'
import type { Skid } from '../../../server/core/skid.ts'
import { block, type Row } from '../../helpers/rows.ts'

export const startMs = Date.UTC(2031, 0, 6)

/** Readings of the two-segment skid: kg/h, bar, bar, bar, °C, °C, phase. Null is an empty cell, undefined no word. */
export interface Reading {
  readonly flow?: number | null
  readonly p1?: number | null | undefined
  readonly p2?: number | null | undefined
  readonly p3?: number | null
  readonly t1?: number | null
  readonly t2?: number | null
  readonly phase?: string
  /** No row at all. */
  readonly none?: true
  /** This one stands still to the last digit. */
  readonly still?: 'p1' | 'flow'
  /** Lateness of the time stamp against the grid of the logger, ms. */
  readonly shiftMs?: number
}

/** An alarm with the seconds from the start at which it was raised and cleared. */
export interface Heard {
  readonly key: string
  readonly kind: string
  readonly segment: string | null
  readonly tag: string | null
  readonly priority: string
  readonly raisedS: number
  readonly clearedS: number | null
}

/** Runs readings, one each `everyS`, through the pipeline. Healthy readings wiggle a little, as an instrument does that is not frozen. */
export function hear(skid: Skid, n: number, of: (k: number) => Reading, everyS = 1): Heard[] {
  const r = randomOf(1, 'signals')
  const wiggle = (x: number | null | undefined, sd: number) => (typeof x === 'number' ? x + sd * r.normal() : x)
  const rows: Row[] = []
  for (let k = 0; k < n; k++) {
    const x = of(k)
    if (x.none) continue
    const pick = <K extends keyof Reading>(key: K, usual: number) => (key in x ? (x[key] as number | null | undefined) : usual)
    rows.push([
      startMs + 1000 * everyS * k + (x.shiftMs ?? 0),
      x.still === 'flow' ? 6.0012 : wiggle(pick('flow', 6), 0.002),
      x.still === 'p1' ? 6.5003 : wiggle(pick('p1', 6.5), 0.002),
      wiggle(pick('p2', 4.5), 0.002),
      wiggle(pick('p3', 3), 0.002),
      wiggle(pick('t1', 20), 0.02),
      wiggle(pick('t2', 20), 0.02),
      x.phase ?? 'production',
    ])
  }
  const pipeline = createPipeline(skid)
  const events = [...pipeline.push({ kind: 'rows', block: block(rows, 7) }), ...pipeline.finish()]
  const heard = new Map<number, Heard>()
  for (const e of events)
    if (e.kind === 'alarm') {
      const o = e.change.occurrence
      const s = (ms: number) => (ms - startMs) / 1000
      heard.set(o.id, {
        key: o.key,
        kind: o.kind,
        segment: o.segment,
        tag: o.tag,
        priority: o.priority,
        raisedS: s(o.raisedMs),
        clearedS: o.clearedMs === null ? null : s(o.clearedMs),
      })
    }
  return [...heard.values()]
}
