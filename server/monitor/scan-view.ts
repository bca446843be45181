import { round9 } from '../core/pipeline/collect.ts'
import { gradeOf, reasons } from '../core/quality/tag-rules.ts'
import { type Phase, phases } from '../core/reading.ts'
import type { Scan } from '../core/scan/grid.ts'
import type { Skid } from '../core/skid.ts'
import { units, valueUnit } from '../core/units.ts'
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
  readonly min: Float64Array
  readonly max: Float64Array
  readonly sum: Float64Array
  readonly n: Uint32Array
}

/** What screens show of closed scans: the comb, each tag's newest value, and readings gathered since the last frame was taken. */
export function createScanView(skid: Skid, saved?: ScanViewState) {
  const tags = skid.tags.length
  const unit = skid.tags.map(valueUnit)
  const offset = Float64Array.from(unit, (u) => (u === null ? 0 : units[u].offset))
  const factor = Float64Array.from(unit, (u) => (u === null ? 1 : units[u].factor))
  const isText = skid.tags.map((t) => t.quantity === 'text' || t.quantity === 'state')
  const received = [...(saved?.received ?? [])]
  // Packed, as every scan touches them; a tag without a value yet is not `known`.
  const value = Float64Array.from({ length: tags }, (_, t) => saved?.value[t] ?? 0)
  const atMs = Float64Array.from({ length: tags }, (_, t) => saved?.atMs[t] ?? 0)
  const known = Uint8Array.from({ length: tags }, (_, t) => Number((saved?.value[t] ?? null) !== null))
  const used = Uint8Array.from({ length: tags }, (_, t) => Number(saved?.used[t] ?? false))
  const flaw = Uint8Array.from({ length: tags }, (_, t) => saved?.flaw[t] ?? 0)
  const held = Uint8Array.from({ length: tags }, (_, t) => Number(saved?.held[t] ?? false))
  let latestMs = saved?.endMs ?? null
  let phase = saved?.phase ?? -1
  const fresh = (): Gather => ({
    min: new Float64Array(tags).fill(Infinity),
    max: new Float64Array(tags).fill(-Infinity),
    sum: new Float64Array(tags),
    n: new Uint32Array(tags),
  })
  let gather = fresh()
  let fromMs: number | null = null

  return {
    state: (): ScanViewState => ({
      received: [...received],
      endMs: latestMs,
      phase,
      value: Array.from(value, (v, t) => (known[t] === 1 ? v : null)),
      atMs: Array.from(atMs, (at, t) => (known[t] === 1 ? at : null)),
      used: Array.from(used, (u) => u === 1),
      flaw: Array.from(flaw),
      held: Array.from(held, (h) => h === 1),
    }),
    scan(scan: Scan, endMs: number): void {
      fromMs ??= scan.tMs
      for (let i = Math.min(scan.skipped, combTeeth); i > 0; i--) received.push(false)
      received.push(scan.rows > 0)
      while (received.length > combTeeth) received.shift()
      latestMs = endMs
      if (scan.phase >= 0) phase = scan.phase
      const { min, max, sum, n } = gather
      for (let t = 0; t < tags; t++) {
        const isUsed = scan.used[t]! > 0
        used[t] = isUsed ? 1 : 0
        flaw[t] = scan.flaw[t]!
        held[t] = scan.held[t]!
        if (!isUsed || isText[t]) continue
        const now = (scan.si[t]! - offset[t]!) / factor[t]!
        value[t] = now
        atMs[t] = endMs
        known[t] = 1
        if (now < min[t]!) min[t] = now
        if (now > max[t]!) max[t] = now
        sum[t] = sum[t]! + now
        n[t] = n[t]! + 1
      }
    },

    /** Readings since the last frame; null when no scan closed. */
    frame(): ReadingFrame | null {
      if (fromMs === null || latestMs === null) return null
      const g = gather
      const frame = {
        fromMs,
        toMs: latestMs,
        tags: skid.tags.map((_, t) =>
          g.n[t] === 0 ? null : { min: clean(g.min[t]!), max: clean(g.max[t]!), mean: clean(g.sum[t]! / g.n[t]!) },
        ),
      }
      gather = fresh()
      fromMs = null
      return frame
    },

    comb: (): ScanComb => ({ scanMs: skid.scanSeconds * 1000, endMs: latestMs, received: [...received] }),
    phase: (): Phase | null => (phase < 0 ? null : (phases[phase] ?? null)),
    tags: (): TagState[] =>
      skid.tags.map((tag, t) => {
        const reason = reasons[flaw[t]!]!
        const isClean = flaw[t] === 0
        return {
          tag: tag.tag,
          value: known[t] === 1 ? clean(value[t]!) : null,
          unit: unit[t]!,
          atMs: known[t] === 1 ? atMs[t]! : null,
          quality:
            used[t] === 1
              ? isClean
                ? 'good'
                : 'uncertain'
              : isClean
                ? 'none'
                : gradeOf[reason] === 'uncertain'
                  ? 'uncertain'
                  : 'bad',
          reason: isClean ? null : reason,
          held: held[t] === 1,
        }
      }),
  }
}
export type ScanView = ReturnType<typeof createScanView>
