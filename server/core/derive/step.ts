import type { Scan } from '../scan/grid.ts'
import type { Layout } from './layout.ts'

/** Means over one detector step. Absent knowledge is null; the arrays follow the layout's order. */
export interface Step {
  /** Middle of the step, ms UTC. */
  readonly tMs: number
  readonly stepMs: number
  /** Share of the step's scans that carried any reading. */
  readonly seen: number
  /** Whole steps without any data since the step before. */
  readonly gapSteps: number
  /** Mean of the scans that held both taps; Pa. */
  readonly dpPa: readonly (number | null)[]
  /** Variance of the mean of ΔP estimated from neighbouring scans, Pa². */
  readonly dpVarPa2: readonly (number | null)[]
  readonly tapPa: readonly (number | null)[]
  /** kg/s or m3/s as the stream's tag measures. */
  readonly flow: readonly (number | null)[]
  /** K, by tag index of the skid (only temperature tags are filled). */
  readonly tempK: readonly (number | null)[]
  /** Share of the step's scans in each phase by the log's own word; null where the log has no phase column. */
  readonly production: number | null
  readonly flush: number | null
}

export interface StepperState {
  /** Index of the open step; −1 before the first scan. */
  open: number
  scans: number
  withRows: number
  dpSum: number[]
  dpN: number[]
  dpLast: number[]
  dpDiff2: number[]
  tagSum: number[]
  tagN: number[]
  lastPhase: number
  phaseScans: number
  productionScans: number
  flushScans: number
  lastClosed: number
}

/**
 * How long a detector step is: 30 scans for a grid finer than a second (a run on such a grid lives for minutes), 30 s up to a
 * 10-s grid, three scans beyond. The detectors count in steps, so their time constants follow.
 */
export const stepScans = (scanS: number): number => (scanS <= 1 ? 30 : scanS <= 10 ? Math.round(30 / scanS) : 3)

const productionWord = 1
const flushWord = 2

/**
 * Gathers scans into steps that lie on a fixed grid; calls `onStep` for each step that closes. A step the log ends in never closes:
 * half a step would give a verdict that the whole one might not.
 */
export function createStepper(layout: Layout, onStep: (step: Step) => void, saved?: StepperState) {
  const { skid, segments, taps, streams } = layout
  const scanMs = skid.scanSeconds * 1000
  const per = stepScans(skid.scanSeconds)
  const hasPhase = skid.phaseColumn !== null
  const tagN = skid.tags.length
  const segN = segments.length
  const zeros = (n: number) => new Array<number>(n).fill(0)
  const s: StepperState = saved ?? {
    open: -1,
    scans: 0,
    withRows: 0,
    dpSum: zeros(segN),
    dpN: zeros(segN),
    dpLast: zeros(segN),
    dpDiff2: zeros(segN),
    tagSum: zeros(tagN),
    tagN: zeros(tagN),
    lastPhase: -1,
    phaseScans: 0,
    productionScans: 0,
    flushScans: 0,
    lastClosed: -1,
  }
  const temperature = skid.tags.map((t) => t.quantity === 'temperature')
  const mean = (tag: number): number | null => (tag >= 0 && s.tagN[tag]! > 0 ? s.tagSum[tag]! / s.tagN[tag]! : null)

  function close(): void {
    const gapSteps = s.lastClosed < 0 ? 0 : s.open - s.lastClosed - 1
    const step: Step = {
      tMs: (s.open + 0.5) * per * scanMs,
      stepMs: per * scanMs,
      seen: s.withRows / per,
      gapSteps,
      dpPa: s.dpSum.map((sum, i) => (s.dpN[i]! > 0 ? sum / s.dpN[i]! : null)),
      dpVarPa2: s.dpDiff2.map((d2, i) => (s.dpN[i]! > 2 ? d2 / (2 * (s.dpN[i]! - 1)) / s.dpN[i]! : null)),
      tapPa: taps.map((t) => mean(t.tag)),
      flow: streams.map((t) => mean(t.tag)),
      tempK: temperature.map((is, t) => (is ? mean(t) : null)),
      production: hasPhase && s.phaseScans > 0 ? s.productionScans / s.phaseScans : null,
      flush: hasPhase && s.phaseScans > 0 ? s.flushScans / s.phaseScans : null,
    }
    s.lastClosed = s.open
    for (const list of [s.dpSum, s.dpN, s.dpDiff2, s.tagSum, s.tagN]) list.fill(0)
    s.scans = s.withRows = s.phaseScans = s.productionScans = s.flushScans = 0
    onStep(step)
  }

  return {
    state: s,
    scan(scan: Scan): void {
      const index = Math.floor(Math.round(scan.tMs / scanMs) / per)
      if (s.open >= 0 && index !== s.open) close()
      s.open = index
      s.scans++
      if (scan.phase >= 0) s.lastPhase = scan.phase
      if (scan.rows === 0) return
      s.withRows++
      if (hasPhase && s.lastPhase >= 0) {
        s.phaseScans++
        if (s.lastPhase === productionWord) s.productionScans++
        if (s.lastPhase === flushWord) s.flushScans++
      }
      for (let t = 0; t < tagN; t++)
        if (scan.used[t]! > 0) {
          s.tagSum[t]! += scan.si[t]!
          s.tagN[t]!++
        }
      for (let i = 0; i < segN; i++) {
        const dp = segmentDp(layout, i, scan)
        if (dp === null) continue
        if (s.dpN[i]! > 0) s.dpDiff2[i]! += (dp - s.dpLast[i]!) ** 2
        s.dpLast[i] = dp
        s.dpSum[i]! += dp
        s.dpN[i]!++
      }
    },
  }
}

/** ΔP of segment `i` in a scan, Pa; null unless every reading behind it is usable. */
export function segmentDp(layout: Layout, i: number, scan: Scan): number | null {
  const seg = layout.segments[i]!
  if (seg.dpTag !== null) return scan.used[seg.dpTag]! > 0 ? scan.si[seg.dpTag]! : null
  const inTag = seg.inTag!
  if (scan.used[inTag] === 0) return null
  if (seg.tapOut === null) return scan.si[inTag]! - seg.outHeldPa
  const outTag = layout.taps[seg.tapOut]!.tag
  return scan.used[outTag]! > 0 ? scan.si[inTag]! - scan.si[outTag]! : null
}
