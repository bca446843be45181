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
import { type Court, depositVerdict, otherVerdict, touches, type Verdict, verdictRules, zeroSuspect } from './verdicts.ts'

/** Below this a shift is as good as its tangent, ln ΔP. */
const leastBend = 0.03
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
  const s = saved ?? {
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
  const isWatched = (e: Explanation): boolean => touches(layout, e).some(watched)

  /** An observation less what is known of the taps' zeros. Null where nothing would be left. */
  function corrected(seg: number, o: SegmentObservation): SegmentObservation | null {
    const shifts = s.tapShiftPa
    if (shifts === undefined) return o
    const { tapIn, tapOut } = layout.segments[seg]!
    const offPa = (tapIn === null ? 0 : shifts[tapIn]!) - (tapOut === null ? 0 : shifts[tapOut]!)
    if (offPa === 0) return o
    const dpPa = o.dpPa - offPa
    return dpPa <= 0 ? null : { ...o, dpPa, y: o.y + Math.log(dpPa / o.dpPa) }
  }

  /**
   * ΔP by which a shift of so many Pa shows in ln ΔP: the logarithmic mean of what it was and what it is, Δ ln ΔP = Δ/L, L = ΔP (1 − e^−r)/r with r
   * how far ln ΔP is off. The tangent, ΔP itself, would take half a small ΔP for a third.
   */
  function dpOfShift(seg: number, o: SegmentObservation): number {
    const r = o.y - meanWithoutWander(seg, o)
    return Math.abs(r) < leastBend ? o.dpPa : (o.dpPa * -Math.expm1(-r)) / r
  }

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
      filter.startSegment(f, seg, o, s.known?.[seg] ?? nothingKnown)
      t.prior = { a: sdOf(map.flowExp(seg)), k: sdOf(map.viscExp(seg)), n0: o.n0, k0: o.k0 }
      t.started = true
      t.noisePa2 = Math.max(o.stepVar, 1e-6) * o.dpPa ** 2
    }
    learnNoise(seg, o)
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
    let noise = measurementNoise(seg, { ...before, lnFlow: o.lnFlow, lnVisc: o.lnVisc })
    const { mean, variance } = filter.predict(f, row)
    const z = (o.y - mean) / Math.sqrt(variance + noise)
    const third =
      Math.sign(t.z1) === Math.sign(z) && Math.sign(t.z2) === Math.sign(z) && Math.abs(t.z1) > 2.5 && Math.abs(t.z2) > 2.5
    if (Math.abs(z) > 3.5 && !third) noise = Math.max(noise, ((o.y - mean) / 3.5) ** 2 - variance)
    t.z2 = t.z1
    t.z1 = z
    const u = filter.update(f, row, o.y, noise)
    const shown = { ...before, dpPa: dpOfShift(seg, { ...before, y: yBefore }) }
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
  function putInto(index: number, size: number, variance: number): void {
    f.x[index]! += size
    f.p[index * map.size + index]! += variance
  }
  function shiftReference(seg: number, size: number): void {
    const t = s.tracks[seg]!
    if (t.cRef !== null) t.cRef += size
  }
  function freeze(seg: number): void {
    const t = s.tracks[seg]!
    t.fouled = true
    t.clean = { c: f.x[map.level(seg)]!, a: f.x[map.flowExp(seg)]!, k: f.x[map.viscExp(seg)]! }
  }

  function judge(): BankEvent | null {
    const deposit = depositVerdict(court())
    if (deposit !== null) {
      accept(deposit)
      freeze(deposit.column.of)
      return { kind: 'deposit', segment: deposit.column.of, size: deposit.size * deposit.ageSteps, ...common(deposit) }
    }
    const other = otherVerdict(court())
    if (other === null) return null
    accept(other)
    const variance = 1 / other.column.j + (0.1 * other.size) ** 2
    switch (other.column.kind) {
      case 'stream':
        putInto(map.visc[other.column.of]!, other.size, variance)
        return { kind: 'stream', stream: other.column.of, size: other.size, ...common(other) }
      case 'tap-ramp':
      case 'tap-step':
        return tapEvent(other, variance)
      default:
        return stepEvent(other, other.column.of, other.size, variance)
    }
  }

  const common = (v: Verdict) => ({
    likelihood: v.likelihood,
    ageSteps: v.ageSteps,
    rivals: v.rivals,
    nearMove: s.moves.some((m) => Math.abs(m - v.column.born) <= verdictRules.other.nearMove),
  })

  /** A lone step: the zero of an instrument nothing else checks, a blockage, or a plain step that goes into the level. */
  function stepEvent(v: Verdict, segment: number, size: number, variance: number): BankEvent {
    const more = common(v)
    const dpPa = s.tracks[segment]!.lastDpPa ?? 0
    const t = s.tracks[segment]!
    // A clean bore does not open step by step: three falls in a row, with nothing else moving, are one drift.
    const falls = size < 0 && !more.nearMove
    t.falls = falls ? (t.falls ?? 0) + 1 : 0
    t.fallen = falls ? (t.fallen ?? 0) + size : 0
    const drifts = t.falls >= verdictRules.falls && t.fallen < -verdictRules.zeroSize
    const whole = drifts ? t.fallen : size
    const clear = v.likelihood > verdictRules.zeroLikelihood && Math.abs(size) > verdictRules.zeroSize && !more.nearMove
    const named =
      (clear || drifts) && v.rivals.every((r) => r.kind !== 'stream' || v.likelihood - r.likelihood >= verdictRules.streamExcluded)
    const suspect = named ? zeroSuspect(layout, segment, dpPa * -Math.expm1(-whole)) : null
    if (suspect !== null) t.falls = t.fallen = 0
    if (suspect === null && size > verdictRules.blockage && !more.nearMove) {
      freeze(segment)
      return { kind: 'blockage', segment, size, ...more }
    }
    putInto(map.level(segment), size, variance)
    // What an instrument or the exponents did is no resistance: the clean level moves along, and the ratio stays.
    if (suspect !== null || more.nearMove) shiftReference(segment, suspect === null ? size : whole)
    if (suspect === null) return { kind: 'step', segment, size, ...more }
    return { kind: 'instrument', tag: suspect.tag, segment, neighbours: false, ramp: drifts, sizePa: suspect.sizePa, ...more }
  }

  function tapEvent(v: Verdict, variance: number): BankEvent {
    const tap = v.column.of
    const ramp = v.column.kind === 'tap-ramp'
    const grown = ramp ? v.ageSteps : 1
    const sizePa = v.size * 1000 * grown
    const zero = map.tapZero[tap]!
    const on = touches(layout, v.column)
    const segment = on.find(watched) ?? on[0]!
    if (zero < 0) {
      // An end tap has no zero of its own: its shift goes into the level of its one segment.
      const dpPa = s.tracks[segment]!.lastDpPa ?? 1
      const shift = ((layout.segments[segment]!.tapIn === tap ? 1 : -1) * sizePa) / dpPa
      if (!ramp) return stepEvent(v, segment, shift, variance * (1000 / dpPa) ** 2)
      putInto(map.level(segment), shift, (variance * (1000 * grown) ** 2) / dpPa ** 2)
      shiftReference(segment, shift)
    } else {
      putInto(zero, 0, variance * (1000 * grown) ** 2)
      s.tapShiftPa ??= layout.taps.map(() => 0)
      s.tapShiftPa[tap]! += sizePa
      for (const i of on) s.tracks[i]!.yMean = s.tracks[i]!.lastResidual = null
    }
    if (ramp) s.drifting[tap] = true
    const { name, spanPa } = layout.taps[tap]!
    const slight = !ramp && zero >= 0 && spanPa !== null && Math.abs(s.tapShiftPa![tap]!) < verdictRules.slightShare * spanPa
    const event = { kind: 'instrument' as const, tag: name, segment, neighbours: zero >= 0, ramp, sizePa, ...common(v) }
    return slight ? { ...event, slight } : event
  }

  return {
    map,
    /** One step in production. `armed` lets explanations be born; `gapSteps` whole steps without data came before. */
    step(
      read: readonly (SegmentObservation | null)[],
      armed: boolean,
      gapSteps: number,
    ): { segments: BankSegment[]; events: BankEvent[] } {
      const observations = read.map((o, seg) => (o === null ? null : corrected(seg, o)))
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
        return { lnRatio: o.y - meanWithoutWander(seg, o) + shift, ...sd }
      })
      return { segments, events }
    },

    /** ln ratio of an earlier observation by what is known now: an alarm's history is read with the clean parameters, not the polluted ones. */
    reread(seg: number, as: SegmentObservation): number {
      const t = s.tracks[seg]!
      const o = corrected(seg, as) ?? as
      const level = t.clean === null ? f.x[map.level(seg)]! : t.clean.c
      return o.y - meanWithoutWander(seg, o) + (t.cRef === null ? 0 : level - t.cRef)
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
      freeze(seg)
      columns = []
    },
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
