import { round9 } from '../core/pipeline/collect.ts'
import { gradeOf, reasons } from '../core/quality/tag-rules.ts'
import { type Phase, phases } from '../core/reading.ts'
import type { Scan } from '../core/scan/grid.ts'
import type { Skid } from '../core/skid.ts'
import { fromSi, valueUnit } from '../core/units.ts'
import type { ScanComb, TagState } from '../wire/live.ts'
import type { ReadingFrame } from '../wire/trend.ts'

export const combTeeth = 30

/** Plain JSON. By tag: last usable value in the tag's unit, when, and how the newest scan saw it. */
export interface ScanViewState {
  received: boolean[]
  endMs: number | null
  phase: number
  value: (number | null)[]
  atMs: (number | null)[]
  used: boolean[]
  flaw: number[]
  held: boolean[]
}

/** A way to SI and back leaves dust in the last digits. */
const clean = (value: number): number => round9(value) ?? 0

interface Gather {
  readonly min: number[]
  readonly max: number[]
  readonly sum: number[]
  readonly n: number[]
}

/** What screens show of closed scans: the comb, each tag's newest value, and readings gathered since the last frame was taken. */
export function createScanView(skid: Skid, saved?: ScanViewState) {
  const tags = skid.tags.length
  const unit = skid.tags.map(valueUnit)
  const isText = skid.tags.map((t) => t.quantity === 'text' || t.quantity === 'state')
  const s: ScanViewState = saved ?? {
    received: [],
    endMs: null,
    phase: -1,
    value: new Array(tags).fill(null),
    atMs: new Array(tags).fill(null),
    used: new Array(tags).fill(false),
    flaw: new Array(tags).fill(0),
    held: new Array(tags).fill(false),
  }
  const fresh = (): Gather => ({
    min: new Array(tags).fill(Infinity),
    max: new Array(tags).fill(-Infinity),
    sum: new Array(tags).fill(0),
    n: new Array(tags).fill(0),
  })
  let gather = fresh()
  let fromMs: number | null = null

  return {
    state: s,
    scan(scan: Scan, endMs: number): void {
      fromMs ??= scan.tMs
      for (let i = Math.min(scan.skipped, combTeeth); i > 0; i--) s.received.push(false)
      s.received.push(scan.rows > 0)
      if (s.received.length > combTeeth) s.received.splice(0, s.received.length - combTeeth)
      s.endMs = endMs
      if (scan.phase >= 0) s.phase = scan.phase
      for (let t = 0; t < tags; t++) {
        const used = scan.used[t]! > 0
        s.used[t] = used
        s.flaw[t] = scan.flaw[t]!
        s.held[t] = scan.held[t] === 1
        if (!used || isText[t]) continue
        const value = fromSi(scan.si[t]!, unit[t]!)
        s.value[t] = value
        s.atMs[t] = endMs
        if (value < gather.min[t]!) gather.min[t] = value
        if (value > gather.max[t]!) gather.max[t] = value
        gather.sum[t]! += value
        gather.n[t]!++
      }
    },

    /** Readings since the last frame; null when no scan closed. */
    frame(): ReadingFrame | null {
      if (fromMs === null || s.endMs === null) return null
      const g = gather
      const frame = {
        fromMs,
        toMs: s.endMs,
        tags: skid.tags.map((_, t) =>
          g.n[t] === 0 ? null : { min: clean(g.min[t]!), max: clean(g.max[t]!), mean: clean(g.sum[t]! / g.n[t]!) },
        ),
      }
      gather = fresh()
      fromMs = null
      return frame
    },

    comb: (): ScanComb => ({ scanMs: skid.scanSeconds * 1000, endMs: s.endMs, received: [...s.received] }),
    phase: (): Phase | null => (s.phase < 0 ? null : (phases[s.phase] ?? null)),
    tags: (): TagState[] =>
      skid.tags.map((tag, t) => {
        const reason = reasons[s.flaw[t]!]!
        const value = s.value[t]!
        const isClean = s.flaw[t] === 0
        return {
          tag: tag.tag,
          value: value === null ? null : clean(value),
          unit: unit[t]!,
          atMs: s.atMs[t]!,
          quality: s.used[t]
            ? isClean
              ? 'good'
              : 'uncertain'
            : isClean
              ? 'none'
              : gradeOf[reason] === 'uncertain'
                ? 'uncertain'
                : 'bad',
          reason: isClean ? null : reason,
          held: s.held[t]!,
        }
      }),
  }
}
export type ScanView = ReturnType<typeof createScanView>
