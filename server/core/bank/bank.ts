import type { Layout } from '../derive/layout.ts'
import { createFilter, wanderVar } from './filter.ts'
import {
  births,
  type Column,
  type ColumnState,
  type Explanation,
  explanations,
  giveBirth,
  isKept,
  type Kind,
  likelihood as likelihoodAt,
  loadColumn,
  observe,
  saveColumn,
  sizeOf,
} from './hypotheses.ts'
import { disturbances as d, rowOf, type SegmentObservation, stateMap } from './model.ts'

/** Likelihood margins and ages (steps) at which an explanation is accepted; log likelihood ratios are in nats. */
export const verdictRules = {
  deposit: { likelihood: 14, size: 0.012, age: 3, sinceGap: 4, margin: 4 },
  other: { likelihood: 16, age: 10, ramp: 20, overDeposit: 4, overOther: 3, waivedAfter: 60 },
  tapLess: 1,
  tapAloneLess: 6,
  streamLess: 1,
  gapStepLess: 10,
  /** A lone sudden rise of this much is a blockage. */
  blockage: 0.15,
} as const

export type BankEvent =
  | {
      readonly kind: 'deposit'
      readonly segment: number
      readonly likelihood: number
      readonly size: number
      readonly ageSteps: number
      readonly rivals: readonly Rival[]
    }
  | {
      readonly kind: 'blockage'
      readonly segment: number
      readonly likelihood: number
      readonly size: number
      readonly ageSteps: number
      readonly rivals: readonly Rival[]
    }
  | {
      readonly kind: 'step'
      readonly segment: number
      readonly likelihood: number
      readonly size: number
      readonly ageSteps: number
      readonly nearMove: boolean
    }
  | {
      readonly kind: 'tap'
      readonly tap: number
      readonly ramp: boolean
      readonly likelihood: number
      readonly sizePa: number
      readonly ageSteps: number
      readonly rivals: readonly Rival[]
    }
  | {
      readonly kind: 'stream'
      readonly stream: number
      readonly likelihood: number
      readonly size: number
      readonly ageSteps: number
      readonly nearMove: boolean
      readonly rivals: readonly Rival[]
    }

/** Another explanation and how well it does, for the evidence shown with an alarm. */
export interface Rival {
  readonly kind: Kind
  readonly of: number
  readonly likelihood: number
}

interface SegmentTrack {
  started: boolean
  /** Left out of the filter: a deposit stands here; its clean parameters are those in `clean`. */
  fouled: boolean
  clean: { c: number; a: number; k: number } | null
  /** White noise of one step's mean ΔP, Pa²: instruments are noisy in bar, whatever the ΔP. */
  noisePa2: number
  noiseSteps: number
  lastResidual: number | null
  lastLnVisc: number | null
  lastLnFlow: number | null
  viscMove: number
  lnViscMean: number
  /** Normalised innovations of the last two steps; 0 where none. */
  z1: number
  z2: number
  /** Level at the first clean baseline: what ratios are taken against. */
  cRef: number | null
  /** Steps since production began, with an observation. */
  seen: number
  lastDpPa: number | null
}

export interface BankState {
  steps: number
  x: number[]
  p: number[]
  tracks: SegmentTrack[]
  columns: ColumnState[]
  tapStartPa: (number | null)[]
  drifting: boolean[]
  sinceGap: number
  gapAt: number
  sinceMove: number
  moves: number[]
  started: boolean
}

/** Result of one step for one segment: ln of its resistance over clean, wander included. */
export interface BankSegment {
  readonly lnRatio: number | null
  /** Sd of the white part and of the wander, for charts and fits. */
  readonly whiteSd: number
  readonly wanderSd: number
}

/**
 * The clean skid as one linear model, and the bank of explanations that compete for whatever it does not predict. A deposit is
 * called when its likelihood is high and beats the best other explanation, never because a level was passed. Model, priors and rules:
 * method paper of this project; state plain JSON through `save`.
 */
export function createBank(layout: Layout, stepMs: number, saved?: BankState) {
  const map = stateMap(layout)
  const filter = createFilter(layout, map)
  const list = explanations(layout)
  const segN = layout.segments.length
  /** Finer grids live faster: their hours are counted as if a step were 30 s. */
  const stepH = Math.max(stepMs, 30_000) / 3.6e6
  const f = saved ? { x: Float64Array.from(saved.x), p: Float64Array.from(saved.p) } : filter.fresh()
  const track = (): SegmentTrack => ({
    started: false,
    fouled: false,
    clean: null,
    noisePa2: 0,
    noiseSteps: 0,
    lastResidual: null,
    lastLnVisc: null,
    lastLnFlow: null,
    viscMove: 0,
    lnViscMean: 0,
    z1: 0,
    z2: 0,
    cRef: null,
    seen: 0,
    lastDpPa: null,
  })
  const s = saved ?? {
    steps: 0,
    x: [],
    p: [],
    tracks: layout.segments.map(track),
    columns: [],
    tapStartPa: layout.taps.map(() => null),
    drifting: layout.taps.map(() => false),
    sinceGap: 1e6,
    gapAt: -1,
    sinceMove: 1e6,
    moves: [],
    started: false,
  }
  let columns: Column[] = saved ? saved.columns.map(loadColumn) : []

  const likelihood = (c: Column): number => likelihoodAt(c, s.steps)
  const watched = (seg: number): boolean => s.tracks[seg]!.started && !s.tracks[seg]!.fouled
  const touches = (e: Explanation): number[] =>
    e.kind === 'tap-ramp' || e.kind === 'tap-step'
      ? [...layout.taps[e.of]!.inletOf, ...layout.taps[e.of]!.outletOf]
      : e.kind === 'stream'
        ? layout.segments.flatMap((g, i) => (g.streams.includes(e.of) ? [i] : []))
        : [e.of]
  const isWatched = (e: Explanation): boolean => touches(e).some(watched)

  function meanWithoutWander(seg: number, o: SegmentObservation): number {
    const t = s.tracks[seg]!
    const row = rowOf(layout, map, seg, o, s.tapStartPa)
    let mean = 0
    for (let i = 0; i < row.index.length; i++) {
      const k = row.index[i]!
      if (k === map.wander(seg)) continue
      const x =
        t.clean === null
          ? f.x[k]!
          : k === map.level(seg)
            ? t.clean.c
            : k === map.flowExp(seg)
              ? t.clean.a
              : k === map.viscExp(seg)
                ? t.clean.k
                : f.x[k]!
      mean += row.value[i]! * x
    }
    return mean
  }

  function measurementNoise(seg: number, o: SegmentObservation): number {
    const t = s.tracks[seg]!
    const dVisc = t.lastLnVisc === null ? 0 : Math.abs(o.lnVisc - t.lastLnVisc)
    const dFlow = t.lastLnFlow === null ? 0 : Math.abs(o.lnFlow - t.lastLnFlow)
    t.viscMove = Math.max(dVisc, 0.7 * t.viscMove)
    t.lnViscMean += (o.lnVisc - t.lnViscMean) / Math.min(60, t.seen + 1)
    if (Math.abs(o.lnVisc - t.lnViscMean) > 0.03) f.p[map.wander(seg) * map.size + map.wander(seg)]! += 1.5e-4 * dVisc
    t.lastLnVisc = o.lnVisc
    t.lastLnFlow = o.lnFlow
    if (dFlow > 0.015 || dVisc > 0.01) s.sinceMove = 0
    return (
      whiteVar(t, o.dpPa) +
      (d.thermalLag * t.viscMove) ** 2 +
      (d.flowMove * dFlow) ** 2 +
      (d.profileSpread * o.k0 * o.profileSpreadK) ** 2
    )
  }

  /** White noise from first differences of y less flow and viscosity: running mean over 30 steps, clipped at six times. In Pa. */
  function learnNoise(seg: number, o: SegmentObservation): void {
    const t = s.tracks[seg]!
    const residual = o.y - f.x[map.flowExp(seg)]! * o.lnFlow - f.x[map.viscExp(seg)]! * o.lnVisc
    if (t.lastResidual !== null && s.sinceMove > 2) {
      const v = ((residual - t.lastResidual) ** 2 / 2) * o.dpPa ** 2
      t.noiseSteps = Math.min(t.noiseSteps + 1, 30)
      t.noisePa2 += (Math.min(v, 36 * t.noisePa2) - t.noisePa2) / Math.max(t.noiseSteps, 3)
    }
    t.lastResidual = residual
  }

  function measure(seg: number, o: SegmentObservation): void {
    const t = s.tracks[seg]!
    if (!t.started) {
      filter.startSegment(f, seg, o, false)
      t.started = true
      t.noisePa2 = Math.max(o.stepVar, 1e-6) * o.dpPa ** 2
    }
    learnNoise(seg, o)
    const row = rowOf(layout, map, seg, o, s.tapStartPa)
    let noise = measurementNoise(seg, o)
    const { mean, variance } = filter.predict(f, row)
    const z = (o.y - mean) / Math.sqrt(variance + noise)
    const third =
      Math.sign(t.z1) === Math.sign(z) && Math.sign(t.z2) === Math.sign(z) && Math.abs(t.z1) > 2.5 && Math.abs(t.z2) > 2.5
    if (Math.abs(z) > 3.5 && !third) noise = Math.max(noise, ((o.y - mean) / 3.5) ** 2 - variance)
    t.z2 = t.z1
    t.z1 = z
    const u = filter.update(f, row, o.y, noise)
    observe(columns, layout, seg, s.steps, o, row, u.innovation, u.variance, u.gain)
    t.seen++
  }

  const best = (test: (c: Column) => boolean): Column | null => {
    let top: Column | null = null
    for (const c of columns) if (test(c) && (top === null || likelihood(c) > likelihood(top))) top = c
    return top
  }
  const bestOf = (kinds: readonly Kind[], of: number, alive?: (c: Column) => boolean): number =>
    columns.reduce((m, c) => (kinds.includes(c.kind) && c.of === of && (alive?.(c) ?? true) ? Math.max(m, likelihood(c)) : m), 0)

  /** Best rival of a deposit in `seg`, with the handicaps that experience gives each. */
  function rivalsOf(seg: number): Rival[] {
    const g = layout.segments[seg]!
    const rivals: Rival[] = []
    const inGap = (c: Column) => s.gapAt >= 0 && Math.abs(c.born - s.gapAt) <= 2
    let step = 0
    for (const c of columns)
      if ((c.kind === 'step' || c.kind === 'settling') && c.of === seg)
        step = Math.max(step, likelihood(c) - (inGap(c) ? verdictRules.gapStepLess : 0))
    rivals.push({ kind: 'step', of: seg, likelihood: step })
    for (const tap of [g.tapIn, g.tapOut]) {
      if (tap === null) continue
      const mirror = touches({ kind: 'tap-ramp', of: tap }).some((o) => o !== seg && watched(o))
      rivals.push({
        kind: 'tap-ramp',
        of: tap,
        likelihood: bestOf(['tap-ramp', 'tap-step'], tap) - (mirror ? verdictRules.tapLess : verdictRules.tapAloneLess),
      })
    }
    for (const i of g.streams) rivals.push({ kind: 'stream', of: i, likelihood: bestOf(['stream'], i) - verdictRules.streamLess })
    return rivals.sort((a, b) => b.likelihood - a.likelihood)
  }

  function accept(c: Column): void {
    const size = sizeOf(c)
    filter.compensate(f, c.response, size, c.j)
    columns = []
  }
  const doubt = (c: Column, size: number): number => 1 / c.j + (0.1 * size) ** 2
  function putInto(index: number, size: number, variance: number): void {
    f.x[index]! += size
    f.p[index * map.size + index]! += variance
  }

  function judgeDeposit(): BankEvent | null {
    const rule = verdictRules.deposit
    if (s.sinceGap < rule.sinceGap) return null
    const top = best(
      (c) =>
        c.kind === 'deposit' &&
        c.d > 0 &&
        s.steps - c.born >= rule.age &&
        likelihood(c) > rule.likelihood &&
        sizeOf(c) * (s.steps - c.born) > rule.size,
    )
    if (top === null) return null
    const rivals = rivalsOf(top.of)
    if (likelihood(top) < (rivals[0]?.likelihood ?? 0) + rule.margin) return null
    const t = s.tracks[top.of]!
    const ageSteps = s.steps - top.born
    const event: BankEvent = {
      kind: 'deposit',
      segment: top.of,
      likelihood: likelihood(top),
      size: sizeOf(top) * ageSteps,
      ageSteps,
      rivals,
    }
    accept(top)
    freeze(top.of, t)
    return event
  }

  function freeze(seg: number, t: SegmentTrack): void {
    t.fouled = true
    t.clean = { c: f.x[map.level(seg)]!, a: f.x[map.flowExp(seg)]!, k: f.x[map.viscExp(seg)]! }
  }

  function judgeOthers(): BankEvent | null {
    const rule = verdictRules.other
    const top = best(
      (c) =>
        c.kind !== 'deposit' &&
        s.steps - c.born >= (c.kind === 'tap-ramp' ? rule.ramp : rule.age) &&
        likelihood(c) > rule.likelihood,
    )
    if (top === null) return null
    const l = likelihood(top)
    const ageSteps = s.steps - top.born
    const on = touches(top)
    for (const seg of on)
      if (
        watched(seg) &&
        l <
          columns.reduce((m, c) => (c.kind === 'deposit' && c.of === seg && c.d > 0 ? Math.max(m, likelihood(c)) : m), 0) +
            rule.overDeposit
      )
        return null
    if (ageSteps < rule.waivedAfter)
      for (const c of columns) {
        if (c.kind === 'deposit' || (c.kind === top.kind && c.of === top.of)) continue
        const sameStep =
          (top.kind === 'step' || top.kind === 'settling') && (c.kind === 'step' || c.kind === 'settling') && c.of === top.of
        const sameTap =
          (top.kind === 'tap-ramp' || top.kind === 'tap-step') &&
          (c.kind === 'tap-ramp' || c.kind === 'tap-step') &&
          c.of === top.of
        if (sameStep || sameTap) continue
        if (touches(c).some((seg) => on.includes(seg)) && l < likelihood(c) + rule.overOther) return null
      }
    const size = sizeOf(top)
    const variance = doubt(top, size)
    const bornNearMove = s.moves.some((m) => Math.abs(m - top.born) <= 10)
    const rivals = columns
      .filter((c) => c.kind !== top.kind || c.of !== top.of)
      .map((c): Rival => ({ kind: c.kind, of: c.of, likelihood: likelihood(c) }))
      .sort((a, b) => b.likelihood - a.likelihood)
      .slice(0, 3)
    accept(top)
    if (top.kind === 'step' || top.kind === 'settling') {
      if (size > verdictRules.blockage && !bornNearMove) {
        freeze(top.of, s.tracks[top.of]!)
        return { kind: 'blockage', segment: top.of, likelihood: l, size, ageSteps, rivals }
      }
      putInto(map.level(top.of), size, variance)
      return { kind: 'step', segment: top.of, likelihood: l, size, ageSteps, nearMove: bornNearMove }
    }
    if (top.kind === 'stream') {
      putInto(map.visc[top.of]!, size, variance)
      return { kind: 'stream', stream: top.of, likelihood: l, size, ageSteps, nearMove: bornNearMove, rivals }
    }
    const ramp = top.kind === 'tap-ramp'
    const sizePa = size * 1000 * (ramp ? ageSteps : 1)
    const zero = map.tapZero[top.of]!
    if (zero >= 0) putInto(zero, sizePa, variance * 1e6 * (ramp ? ageSteps ** 2 : 1))
    else {
      // An end tap has no zero of its own: its shift goes into the level of its one segment.
      for (const seg of on) {
        const t = s.tracks[seg]!
        if (t.lastDpPa !== null)
          putInto(map.level(seg), ((layout.segments[seg]!.tapIn === top.of ? 1 : -1) * sizePa) / t.lastDpPa, variance)
      }
    }
    if (ramp) s.drifting[top.of] = true
    return { kind: 'tap', tap: top.of, ramp, likelihood: l, sizePa, ageSteps, rivals }
  }

  return {
    map,
    /** One step in production. `armed` lets explanations be born; `gapSteps` whole steps without data came before. */
    step(
      observations: readonly (SegmentObservation | null)[],
      armed: boolean,
      gapSteps: number,
    ): { segments: BankSegment[]; events: BankEvent[] } {
      s.steps += 1 + gapSteps
      const anything = observations.some((o) => o !== null)
      if (gapSteps > 0) {
        s.sinceGap = 0
        s.gapAt = s.steps
      }
      s.sinceMove++
      if (anything) s.sinceGap++
      else {
        s.sinceGap = 0
        s.gapAt = s.steps + 1
      }
      for (const o of observations)
        if (o !== null)
          o.tapPa.forEach((p, i) => {
            s.tapStartPa[i] ??= p
          })
      filter.advance(
        f,
        stepH * (1 + gapSteps),
        observations.map((o) => o?.dpPa ?? null),
        s.drifting,
      )
      if (columns.length > 0) decayColumns(1 + gapSteps)
      columns = columns.filter((c) => isKept(s.steps - c.born, c.born))
      if (armed && s.steps % births.every === 0) giveBirth(layout, columns, list, s.steps, map, isWatched)
      const moved = s.sinceMove
      observations.forEach((o, seg) => {
        const t = s.tracks[seg]!
        if (o === null) return
        t.lastDpPa = o.dpPa
        if (!t.fouled) measure(seg, o)
      })
      if (s.sinceMove < moved) s.moves = [...s.moves.filter((m) => m > s.steps - births.twelfth), s.steps]
      const events: BankEvent[] = []
      ;(globalThis as any).DBG?.(
        s.steps,
        columns.map((c) => ({ k: c.kind, of: c.of, age: s.steps - c.born, L: likelihood(c), A: sizeOf(c) })),
        s.tracks,
      )
      if (armed) {
        for (let round = 0; round < 4; round++) {
          const e = judgeDeposit() ?? judgeOthers()
          if (e === null) break
          events.push(e)
        }
      }
      const segments = observations.map((o, seg): BankSegment => {
        const t = s.tracks[seg]!
        const sd = { whiteSd: Math.sqrt(whiteVar(t, t.lastDpPa)), wanderSd: Math.sqrt(wanderVar(t.lastDpPa)) }
        if (o === null || !t.started) return { lnRatio: null, ...sd }
        const shift = t.cRef === null ? 0 : (t.clean === null ? f.x[map.level(seg)]! : t.clean.c) - t.cRef
        return { lnRatio: o.y - meanWithoutWander(seg, o) + shift, ...sd }
      })
      return { segments, events }
    },

    /** ln ratio of an earlier observation by what is known now: an alarm's history is read with the clean parameters, not the polluted ones. */
    reread(seg: number, o: SegmentObservation): number {
      const t = s.tracks[seg]!
      const level = t.clean === null ? f.x[map.level(seg)]! : t.clean.c
      return o.y - meanWithoutWander(seg, o) + (t.cRef === null ? 0 : level - t.cRef)
    },

    /** Declares the present level of a segment its clean baseline, if it has none. */
    setBaseline(seg: number): void {
      const t = s.tracks[seg]!
      if (t.cRef === null && t.started) t.cRef = f.x[map.level(seg)]!
    },
    level: (seg: number): number => f.x[map.level(seg)]!,
    levelSd: (seg: number): number => Math.sqrt(Math.max(0, f.p[map.level(seg) * map.size + map.level(seg)]!)),

    /** Production stopped: levels may have moved. A cleaned deposit's segment is taken back in. */
    restart(): void {
      columns = []
      s.tracks.forEach((t, seg) => {
        if (!t.started) return
        if (t.clean !== null) {
          f.x[map.level(seg)] = t.clean.c
          f.x[map.flowExp(seg)] = t.clean.a
          f.x[map.viscExp(seg)] = t.clean.k
        }
        filter.restartLevel(f, seg, t.fouled ? d.restartFouled : d.restartClean)
        t.fouled = false
        t.clean = null
        t.z1 = t.z2 = 0
        t.lastResidual = t.lastLnVisc = t.lastLnFlow = null
        t.viscMove = 0
        t.seen = 0
      })
      s.drifting.fill(false)
    },

    /** A segment fell back to clean while running (slough-off, filter change): watch it again. `fresh` forgets its baseline (new filter). */
    readmit(seg: number, fresh: boolean): void {
      const t = s.tracks[seg]!
      filter.restartLevel(f, seg, d.restartFouled)
      t.fouled = false
      t.clean = null
      t.z1 = t.z2 = 0
      t.lastResidual = null
      if (fresh) t.cRef = null
      columns = []
    },
    isFouled: (seg: number): boolean => s.tracks[seg]!.fouled,
    seen: (seg: number): number => s.tracks[seg]!.seen,
    noise: (seg: number): { whiteSd: number; wanderSd: number } => ({
      whiteSd: Math.sqrt(whiteVar(s.tracks[seg]!, s.tracks[seg]!.lastDpPa)),
      wanderSd: Math.sqrt(wanderVar(s.tracks[seg]!.lastDpPa)),
    }),

    /** Likelihood of a growing deposit in a segment now, for the screen. */
    suspicion: (seg: number): number =>
      columns.reduce((m, c) => (c.kind === 'deposit' && c.of === seg && c.d > 0 ? Math.max(m, likelihood(c)) : m), 0),

    save: (): BankState => ({
      ...structuredClone({ ...s, columns: [] }),
      x: Array.from(f.x),
      p: Array.from(f.p),
      columns: columns.map(saveColumn),
    }),
  }

  function decayColumns(steps: number): void {
    const wander = Math.exp((-stepH * steps) / d.wanderTauH)
    const meter = Math.exp((-stepH * steps) / d.meterTauH)
    for (const c of columns) {
      for (let seg = 0; seg < segN; seg++) c.response[map.wander(seg)]! *= wander
      for (const i of map.meter) c.response[i]! *= meter
    }
  }
}
/** White noise of ln ΔP at a ΔP; never better than 0.03 %. */
const whiteVar = (t: { readonly noisePa2: number }, dpPa: number | null): number =>
  Math.max(1e-7, dpPa === null ? 1e-5 : t.noisePa2 / dpPa ** 2)

export type Bank = ReturnType<typeof createBank>
