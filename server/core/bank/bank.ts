import type { Layout } from '../derive/layout.ts'
import {
  type BankEvent,
  type BankSegment,
  type BankSettings,
  type BankState,
  bankSettings,
  freshTrack,
  held,
  type LearnedExponent,
  whiteVar,
} from './bank-state.ts'
import { createConsequences } from './consequences.ts'
import { createFilter, type KnownSegment, nothingKnown, wanderVar } from './filter.ts'
import {
  births,
  type Column,
  type Explanation,
  explanations,
  giveBirth,
  isKept,
  likelihood,
  loadColumn,
  observe,
  saveColumn,
} from './hypotheses.ts'
import { rowOf, type SegmentObservation, stateMap } from './model.ts'
import { createReadings } from './readings.ts'
import { type Court, depositVerdict, otherVerdict, touches, type Verdict, verdictRules } from './verdicts.ts'

/** Share of a step in the mean of the last few. */
const recentShare = 0.2

/**
 * The clean skid as one linear model, and the bank of explanations that compete for whatever it does not predict. A deposit is
 * called when its likelihood is high and beats the best other explanation, never because a level was passed. Model, priors and rules:
 * method paper of this project; state plain JSON through `save`.
 */
export function createBank(
  layout: Layout,
  stepMs: number,
  saved?: BankState,
  settings: BankSettings = bankSettings,
  known?: readonly KnownSegment[],
) {
  const d = settings.disturbances
  const map = stateMap(layout)
  const filter = createFilter(layout, map, d)
  const list = explanations(layout).filter((e) => settings.kinds.includes(e.kind))
  const wanders = layout.segments.map((_, i) => map.wander(i))
  /** Finer grids live faster: their hours are counted as if a step were 30 s. */
  const stepH = Math.max(stepMs, 30_000) / 3.6e6
  const f = saved ? { x: Float64Array.from(saved.x), p: Float64Array.from(saved.p) } : filter.fresh()
  const s: BankState = saved ?? {
    steps: 0,
    x: [],
    p: [],
    tracks: layout.segments.map(freshTrack),
    columns: [],
    tapStartPa: layout.taps.map(() => null),
    tapMeanPa: layout.taps.map(() => null),
    drifting: layout.taps.map(() => false),
    sinceGap: 1e6,
    gapAt: -1,
    sinceMove: 1e6,
    moves: [],
    started: false,
    ...(known === undefined ? {} : { known }),
  }
  let columns: Column[] = saved ? saved.columns.map(loadColumn) : []

  const sdOf = (i: number): number => Math.sqrt(Math.max(0, f.p[i * map.size + i]!))
  const watched = (seg: number): boolean => s.tracks[seg]!.started && !s.tracks[seg]!.fouled
  const readings = createReadings({ layout, map, f, s, d })
  const consequences = createConsequences({ layout, map, f, s, watched })
  const isWatched = (e: Explanation): boolean => touches(layout, e).some(watched)

  function measure(seg: number, o: SegmentObservation): void {
    const t = s.tracks[seg]!
    if (!t.started) {
      filter.startSegment(f, seg, o, s.known?.[seg] ?? nothingKnown)
      t.prior = { a: sdOf(map.flowExp(seg)), k: sdOf(map.viscExp(seg)), n0: o.n0, k0: o.k0 }
      t.started = true
      t.noisePa2 = Math.max(o.stepVar, 1e-6) * o.dpPa ** 2
    }
    readings.learnNoise(seg, o)
    // What multiplies the states rests on the steps before: this step's own noise is in y too, and would teach zeros, gains and
    // exponents for ever.
    const yBefore = t.yMean ?? o.y
    const before: SegmentObservation = {
      ...o,
      tapPa: s.tapMeanPa,
      dpPa: o.dpPa * Math.exp(yBefore - o.y),
      lnFlow: held(t, 'flowHeld', o.lnFlow),
      lnVisc: held(t, 'viscHeld', o.lnVisc),
    }
    t.yMean = t.yMean === null ? o.y : t.yMean + recentShare * (o.y - t.yMean)
    const row = rowOf(layout, map, seg, before, s.tapStartPa)
    let noise = readings.noise(seg, { ...before, lnFlow: o.lnFlow, lnVisc: o.lnVisc })
    const { mean, variance } = filter.predict(f, row)
    const z = (o.y - mean) / Math.sqrt(variance + noise)
    const third =
      Math.sign(t.z1) === Math.sign(z) && Math.sign(t.z2) === Math.sign(z) && Math.abs(t.z1) > 2.5 && Math.abs(t.z2) > 2.5
    if (Math.abs(z) > 3.5 && !third) noise = Math.max(noise, ((o.y - mean) / 3.5) ** 2 - variance)
    t.z2 = t.z1
    t.z1 = z
    const u = filter.update(f, row, o.y, noise)
    const shown = { ...before, dpPa: readings.dpOfShift(seg, { ...before, y: yBefore }) }
    observe(columns, layout, seg, s.steps, shown, row, u.innovation, u.variance, u.gain)
    t.seen++
  }

  const court = (): Court => ({
    layout,
    columns,
    now: s.steps,
    sinceGap: s.sinceGap,
    gapAt: s.gapAt,
    moves: s.moves,
    drifting: s.drifting,
    watched,
  })

  /** Takes the explanation out of the filter and begins the competition anew. */
  function accept(v: Verdict): void {
    filter.compensate(f, v.column.response, v.size, v.column.j)
    columns = []
  }
  function judge(): BankEvent | null {
    const deposit = depositVerdict(court())
    if (deposit !== null) {
      accept(deposit)
      return consequences.deposit(deposit)
    }
    const other = otherVerdict(court())
    if (other === null) return null
    accept(other)
    return consequences.other(other)
  }

  return {
    map,
    /** One step in production. `armed` lets explanations be born; `gapSteps` whole steps without data came before. */
    step(
      read: readonly (SegmentObservation | null)[],
      armed: boolean,
      gapSteps: number,
    ): { segments: BankSegment[]; events: BankEvent[] } {
      const observations = read.map((o, seg) => (o === null ? null : readings.corrected(seg, o)))
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
            s.tapMeanPa[i] ??= p
          })
      filter.advance(
        f,
        stepH * (1 + gapSteps),
        observations.map((o) => o?.dpPa ?? null),
        s.drifting,
      )
      if (columns.length > 0) decayColumns(1 + gapSteps)
      columns = columns.filter((c) => isKept(s.steps - c.born, c.born))
      if (s.tracks.some((t) => t.seen >= births.after) && s.steps % births.every === 0)
        giveBirth(layout, columns, list, s.steps, map, isWatched, settings.believable)
      const moved = s.sinceMove
      observations.forEach((o, seg) => {
        const t = s.tracks[seg]!
        if (o === null) return
        t.lastDpPa = o.dpPa
        if (!t.fouled) measure(seg, o)
      })
      if (s.sinceMove < moved) s.moves = [...s.moves.filter((m) => m > s.steps - births.twelfth), s.steps]
      const seen = observations.find((o) => o !== null)
      seen?.tapPa.forEach((p, i) => {
        const mean = s.tapMeanPa[i] ?? null
        if (p !== null) s.tapMeanPa[i] = mean === null ? p : mean + recentShare * (p - mean)
      })
      const events: BankEvent[] = []
      if (armed) {
        for (let round = 0; round < 4; round++) {
          const e = judge()
          if (e === null) break
          events.push(e)
        }
      }
      const segments = observations.map((o, seg): BankSegment => {
        const t = s.tracks[seg]!
        const sd = { whiteSd: Math.sqrt(whiteVar(t, t.lastDpPa)), wanderSd: Math.sqrt(wanderVar(t.lastDpPa, d)) }
        if (o === null || !t.started) return { lnRatio: null, ...sd }
        const shift = t.cRef === null ? 0 : (t.clean === null ? f.x[map.level(seg)]! : t.clean.c) - t.cRef
        return { lnRatio: o.y - readings.meanWithoutWander(seg, o) + shift, ...sd }
      })
      return { segments, events }
    },

    /** ln ratio of an earlier observation by what is known now: an alarm's history is read with the clean parameters, not the polluted ones. */
    reread(seg: number, as: SegmentObservation): number {
      const t = s.tracks[seg]!
      const o = readings.corrected(seg, as) ?? as
      const level = t.clean === null ? f.x[map.level(seg)]! : t.clean.c
      return o.y - readings.meanWithoutWander(seg, o) + (t.cRef === null ? 0 : level - t.cRef)
    },

    /** Declares the present level of a segment its clean baseline, if it has none. */
    setBaseline(seg: number): void {
      const t = s.tracks[seg]!
      if (t.cRef === null && t.started) t.cRef = f.x[map.level(seg)]!
    },
    level: (seg: number): number => f.x[map.level(seg)]!,
    levelSd: (seg: number): number => sdOf(map.level(seg)),
    /** Whether a step test vouched for anything of this segment. */
    isCommissioned: (seg: number): boolean => {
      const k = s.known?.[seg]
      return k !== undefined && (k.zeroChecked || k.flowExponent !== null)
    },
    /** Exponents of flow and viscosity as they stand (frozen under a deposit); null before the segment's first reading. */
    exponents(seg: number): { flow: LearnedExponent; viscosity: LearnedExponent } | null {
      const t = s.tracks[seg]!
      if (t.prior === undefined) return null
      const measured = (s.known?.[seg]?.flowExponent ?? null) !== null
      const one = (i: number, base: number, over: number, before: number): LearnedExponent => ({
        value: base + over,
        sd: sdOf(i),
        told: sdOf(i) < before / 2 || (measured && i === map.flowExp(seg)),
      })
      const [a, k] = [map.flowExp(seg), map.viscExp(seg)]
      return {
        flow: one(a, t.prior.n0, t.clean?.a ?? f.x[a]!, t.prior.a),
        viscosity: one(k, t.prior.k0, t.clean?.k ?? f.x[k]!, t.prior.k),
      }
    },

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
        t.lastResidual = t.lastLnVisc = t.lastLnFlow = t.yMean = null
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
      t.lastResidual = t.yMean = null
      if (fresh) t.cRef = null
      columns = []
    },
    /** A deposit was found by other means: its segment leaves the filter, clean being the level of its baseline. */
    declare(seg: number): void {
      const t = s.tracks[seg]!
      if (t.cRef !== null) f.x[map.level(seg)] = t.cRef
      consequences.freeze(seg)
      columns = []
    },
    /** A zero check at standstill moved the zero of each ΔP by so much, Pa. */
    rested: readings.rested,
    isFouled: (seg: number): boolean => s.tracks[seg]!.fouled,
    seen: (seg: number): number => s.tracks[seg]!.seen,
    noise: (seg: number): { whiteSd: number; wanderSd: number } => ({
      whiteSd: Math.sqrt(whiteVar(s.tracks[seg]!, s.tracks[seg]!.lastDpPa)),
      wanderSd: Math.sqrt(wanderVar(s.tracks[seg]!.lastDpPa, d)),
    }),

    /** Likelihood of a growing deposit in a segment now, for the screen. */
    suspicion: (seg: number): number =>
      columns.reduce((m, c) => (c.kind === 'deposit' && c.of === seg && c.d > 0 ? Math.max(m, likelihood(c, s.steps)) : m), 0),

    /** Whether an explanation other than a deposit is likely in a segment and not yet decided on. */
    weighs: (seg: number): boolean =>
      columns.some(
        (c) => c.kind !== 'deposit' && likelihood(c, s.steps) > verdictRules.other.likelihood && touches(layout, c).includes(seg),
      ),

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
    for (const { response } of columns) {
      for (let i = 0; i < wanders.length; i++) response[wanders[i]!]! *= wander
      for (let i = 0; i < map.meter.length; i++) response[map.meter[i]!]! *= meter
    }
  }
}
export type Bank = ReturnType<typeof createBank>
