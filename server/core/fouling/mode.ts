import type { Layout } from '../derive/layout.ts'
import type { Step } from '../derive/step.ts'

export interface ModeState {
  /** Usual flow of each stream while it runs, in the stream's own SI unit; 0 before it has run. */
  usual: number[]
  /** Usual temperature in production by tag, K; 0 before it is known. */
  usualK: number[]
  production: boolean
  inferred: boolean
  /** Steps in production since it began; steps out of it with data. */
  steps: number
  outSteps: number
  /** True from a stop long enough until production begins again. */
  stopped: boolean
  everStarted: boolean
  /** There has been a stop: levels may have moved, so arming takes longer. */
  restarts: boolean
  /** Last few steps' flows and temperatures, to see whether they have settled. */
  recent: { flow: (number | null)[]; tempK: (number | null)[] }[]
}

export interface Mode {
  readonly production: boolean
  /** Production was inferred from flows and temperatures; the log names no phase. */
  readonly inferred: boolean
  /** Detectors may judge: production has lasted long enough. */
  readonly armed: boolean
  readonly steps: number
  /** Production began with this step; a stop ended with it. */
  readonly begins: boolean
  /** This step made the stop long enough to count. */
  readonly stops: boolean
  /** All pumps stand still. */
  readonly rests: boolean
}

/**
 * Below this share of its usual flow a stream is out of production; below the second, and below that share of its meter's span, it stands still. Water of a
 * flush begins at a tenth of the usual flow, which is 3 % of a wide meter's span: counted as rest, it would teach a false zero.
 */
const least = { production: 0.4, rest: 0.03, restOfSpan: 0.005 }
/** Steps: before detectors are armed at first and after a stop; out of production before it counts as a stop; settled window. */
const modeSteps = { arm: 10, armAgain: 24, stop: 16, settled: 4 }
const settled = { flow: 0.03, tempK: 0.8 }
/** Half of all thermometers so far from their usual readings is a flush or a warm-up, not production, K; how slowly the usual follows, steps. */
const band = { tempK: 8, follow: 120 }

/**
 * Whether the skid is in production. By the log's own phase word where it has one (a whole step decides, at 90 %: one missing word
 * ends nothing); otherwise inferred: every stream that has run flows at 40 % of its usual at least, temperatures are in their usual band and, to
 * begin with, flows and temperatures have settled. No data is not the end of production: everything holds.
 */
export function createMode(layout: Layout, saved?: ModeState) {
  const { streams } = layout
  const s: ModeState = saved ?? {
    usual: streams.map(() => 0),
    usualK: layout.skid.tags.map(() => 0),
    production: false,
    inferred: false,
    steps: 0,
    outSteps: 0,
    stopped: false,
    everStarted: false,
    restarts: false,
    recent: [],
  }

  function flows(step: Step): { enough: boolean; rests: boolean; known: boolean } {
    let enough = true
    let rests = true
    let known = false
    streams.forEach((_, i) => {
      const q = step.flow[i] ?? null
      if (q === null) return
      known = true
      const usual = s.usual[i]!
      if (usual > 0 && q < least.production * usual) enough = false
      if (q > Math.max(least.rest * usual, least.restOfSpan * streams[i]!.spanSi)) rests = false
      if (q > least.rest * streams[i]!.spanSi && q > least.production * usual)
        s.usual[i] = usual === 0 ? q : usual + (q - usual) / (q > usual ? 4 : 120)
    })
    if (known && !s.usual.some((u) => u > 0)) enough = false
    return { enough, rests: known && rests, known }
  }

  function isSettled(): boolean {
    if (s.recent.length < modeSteps.settled) return false
    const span = (values: (number | null | undefined)[]): { low: number; high: number } | null => {
      const v = values.filter((x): x is number => x != null)
      return v.length === 0 ? null : { low: Math.min(...v), high: Math.max(...v) }
    }
    for (let i = 0; i < streams.length; i++) {
      const r = span(s.recent.map((x) => x.flow[i]))
      if (r !== null && s.usual[i]! > 0 && r.high - r.low > settled.flow * s.usual[i]!) return false
    }
    const tags = s.recent[0]!.tempK.length
    for (let t = 0; t < tags; t++) {
      const r = span(s.recent.map((x) => x.tempK[t]))
      if (r !== null && r.high - r.low > settled.tempK) return false
    }
    return true
  }

  /** Temperatures in band; a band is known only once production has been seen. */
  function isInBand(step: Step): boolean {
    const off: number[] = []
    step.tempK.forEach((t, i) => {
      if (t !== null && s.usualK[i]! > 0) off.push(Math.abs(t - s.usualK[i]!))
    })
    off.sort((a, b) => a - b)
    return off.length === 0 || off[off.length >> 1]! < band.tempK
  }
  function learnBand(step: Step): void {
    step.tempK.forEach((t, i) => {
      if (t !== null) s.usualK[i] = s.usualK[i] === 0 ? t : s.usualK[i]! + (t - s.usualK[i]!) / band.follow
    })
  }

  return {
    state: s,
    step(step: Step): Mode {
      const was = s.production
      const flow = flows(step)
      const quiet: Omit<Mode, 'production' | 'steps'> = {
        inferred: s.inferred,
        armed: false,
        begins: false,
        stops: false,
        rests: flow.rests,
      }
      if (step.seen === 0) return { ...quiet, production: was, steps: s.steps, rests: false, armed: was && isArmed() }
      s.recent.push({ flow: [...step.flow], tempK: [...step.tempK] })
      if (s.recent.length > modeSteps.settled) s.recent.shift()
      s.inferred = step.production === null
      const now = flow.enough && (step.production === null ? isInBand(step) && (was || isSettled()) : step.production >= 0.9)
      if (now) learnBand(step)
      let begins = false
      let stops = false
      if (now) {
        begins = !was && (s.stopped || !s.everStarted)
        if (begins) s.steps = 0
        s.everStarted = true
        s.steps++
        s.outSteps = 0
        if (begins) s.stopped = false
      } else {
        s.outSteps++
        if (s.everStarted && !s.stopped && s.outSteps >= modeSteps.stop) {
          stops = true
          s.stopped = true
          s.restarts = true
        }
      }
      s.production = now
      return { production: now, inferred: s.inferred, armed: now && isArmed(), steps: s.steps, begins, stops, rests: flow.rests }
    },
  }

  function isArmed(): boolean {
    return s.steps > (s.restarts ? modeSteps.armAgain : modeSteps.arm)
  }
}
