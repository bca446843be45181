import type { Phase } from '../reading.ts'
import { paFromBar } from '../units.ts'
import { type Growth, growthsOf, ratioAt } from './deposit.ts'
import type { Disturbances } from './disturbances.ts'
import { type Exotherm, excessAt, exothermsOf } from './exotherm.ts'
import { meterFaultsOf } from './faults.ts'
import { limitRatio } from './nominal.ts'
import type { Operator } from './operator.ts'
import { CELLS, cleanPressure, FEED_K, filledPressure, isFilter, type Plant } from './plant-model.ts'
import { randomOf } from './random.ts'
import { eventsOf, type Scenario, timeOf } from './scenario.ts'
import { coolantShiftK, flowShare, type Span, scheduleOf, spanAt } from './schedule.ts'

/** The plant as it truly is at one instant; arrays are reused from step to step. */
export interface Process {
  readonly growths: readonly Growth[]
  /** Those that can show now: none while no feed reacts. */
  exotherms: readonly Exotherm[]
  readonly schedule: readonly Span[]
  /** What the log names as phase now. */
  phase: Phase
  readonly massKgS: Float64Array
  /** Fluid along each segment, K. */
  readonly cellsK: readonly Float64Array[]
  readonly ratio: Float64Array
  /** ΔP that the segment would show clean, static head apart; and with its deposit and head, Pa. */
  readonly cleanPa: Float64Array
  readonly dpPa: Float64Array
  readonly coolantK: Float64Array
  /** Pressure by tap tag, Pa gauge. */
  readonly tapPa: ReadonlyMap<string, number>
  outletPa: number
  /** The true ratio of a segment at any instant, by its index. */
  ratioOf(segment: number, tMs: number): number
  /** Moves on to tMs, dtS after the last step. */
  step(tMs: number, dtS: number): void
}

/** Rises from 0 to 1 over `overS` seconds from `fromMs`. */
const ramp = (tMs: number, fromMs: number, overS: number): number =>
  Math.min(1, Math.max(0, overS <= 0 ? (tMs >= fromMs ? 1 : 0) : (tMs - fromMs) / (1000 * overS)))

/**
 * The true plant. Without disturbances it is what the truth is computed from: planned flows and temperatures with their lags, deposits,
 * exotherms, but no noise. Pressures go from the outlet backwards: p_in = p_out + ΔP. Temperatures go along the flow: each of five cells
 * tends to Tc + (T_in − Tc) e^(−NTU x) plus the heat of reaction, with the lag of the fluid and its wall.
 */
export function processOf(plant: Plant, scenario: Scenario, noise: Disturbances | null, operator: Operator | null = null): Process {
  const schedule = scheduleOf(scenario)
  const growths = growthsOf(
    scenario,
    (id) => limitRatio(plant, id),
    (id) => isFilter(plant, id),
  )
  const exotherms = exothermsOf(plant, scenario)
  const flushMs = (g: Growth) => {
    const span = schedule.find((s) => s.phase === 'flush' && s.fromMs === g.endMs)
    return span === undefined ? 0 : span.toMs - span.fromMs
  }
  const stepsAll = eventsOf(scenario, 'flowStep').map((e) => ({ ...e, tMs: timeOf(scenario, e) }))
  const stepsOne = eventsOf(scenario, 'flowStepOne').map((e) => ({
    ...e,
    tMs: timeOf(scenario, e),
    i: plant.streams.findIndex((s) => s.spec.id === e.stream),
  }))
  const slips = eventsOf(scenario, 'pumpSlip').map((e) => ({
    ...e,
    tMs: timeOf(scenario, e),
    i: plant.streams.findIndex((s) => s.spec.id === e.stream),
  }))
  const mixes = eventsOf(scenario, 'feedConcentration').map((e) => ({
    ...e,
    tMs: timeOf(scenario, e),
    i: plant.streams.findIndex((s) => s.spec.id === e.stream),
  }))
  const coolings = eventsOf(scenario, 'coolantStep').map((e) => ({ ...e, tMs: timeOf(scenario, e) }))
  const backs = eventsOf(scenario, 'backPressure').map((e) => ({ ...e, tMs: timeOf(scenario, e) }))
  const slugs = eventsOf(scenario, 'gasSlug').map((e, n) => ({
    ...e,
    tMs: timeOf(scenario, e),
    random: randomOf(scenario.seed, `slug ${n}`),
    level: 0,
  }))

  const meters = meterFaultsOf(plant, scenario)
  const nS = plant.streams.length
  const nominal = plant.streams.reduce((sum, s) => sum + s.nominalKgS, 0)
  const fast = new Float64Array(nS)
  const slow = new Float64Array(nS)
  const factors = new Float64Array(nS).fill(1)
  const jacket = Float64Array.from(plant.coolants, (c) => c.nominalK)
  const bath = Float64Array.from(jacket)
  const tapPa = new Map<string, number>()
  const p: Process = {
    growths,
    exotherms,
    schedule,
    phase: 'hold',
    massKgS: new Float64Array(nS),
    cellsK: plant.segments.map((s) => new Float64Array(CELLS).fill(plant.coolants[s.coolant]!.nominalK)),
    ratio: new Float64Array(plant.segments.length).fill(1),
    cleanPa: new Float64Array(plant.segments.length),
    dpPa: new Float64Array(plant.segments.length),
    coolantK: jacket,
    tapPa,
    outletPa: plant.outletPa,
    ratioOf(n, tMs) {
      const { id } = plant.segments[n]!.spec
      const course = (at: number): number => ratioAt(growths, id, at, flushMs)
      const first = growths.find((g) => g.segment === id)
      return operator === null || first === undefined ? course(tMs) : operator.ratio(tMs, course, first.onsetMs)
    },
    step,
  }

  function flows(tMs: number, dtS: number, span: Span): void {
    let all = flowShare(span, tMs)
    for (const e of stepsAll) if (tMs >= e.tMs) all *= e.factor
    for (let i = 0; i < nS; i++) {
      const stream = plant.streams[i]!
      let want = all * stream.nominalKgS
      for (const e of stepsOne) if (e.i === i && tMs >= e.tMs) want *= e.factor
      for (const e of slips) if (e.i === i) want *= 1 + (e.factor - 1) * ramp(tMs, e.tMs, e.overS)
      for (const x of exotherms) if (x.feed === i && tMs >= x.startMs && tMs < x.feedEndMs) want *= x.factor
      want = operator?.wantKgS(i, tMs) ?? want
      for (const f of meters) if (f.stream === i && tMs >= f.fromMs && tMs < f.toMs) want = Math.max(0, want - f.errorKgS(tMs))
      const a = 1 - Math.exp(-dtS / stream.tauS)
      const b = 1 - Math.exp(-dtS / (3 * stream.tauS))
      fast[i] = fast[i]! + a * (want - fast[i]!)
      slow[i] = slow[i]! + b * (want - slow[i]!)
      // A controller with a little integral action: overshoots by about a tenth of a step.
      const held = Math.max(0, fast[i]! + 0.25 * (fast[i]! - slow[i]!))
      p.massKgS[i] = noise === null ? held : held * (1 - noise.flow[i]!)
      let f = 1
      for (const e of mixes) if (e.i === i) f *= 1 + (e.viscosityFactor - 1) * (1 - Math.exp(-Math.max(0, tMs - e.tMs) / 40_000))
      factors[i] = f
    }
  }

  function temperatures(tMs: number, dtS: number, span: Span): void {
    let shift = coolantShiftK(span, tMs)
    for (const e of coolings) if (tMs >= e.tMs) shift += e.degC
    for (let c = 0; c < jacket.length; c++) {
      bath[c] =
        bath[c]! + (1 - Math.exp(-dtS / 150)) * (plant.coolants[c]!.nominalK + shift + (operator?.shiftK(c) ?? 0) - bath[c]!)
      const target = bath[c]! + (noise === null ? 0 : noise.coolantK[c]!)
      jacket[c] = jacket[c]! + (1 - Math.exp(-dtS / 60)) * (target - jacket[c]!)
    }
    let heat = 1
    for (const e of mixes) heat *= 1 + (e.heatFactor - 1) * (1 - Math.exp(-Math.max(0, tMs - e.tMs) / 40_000))
    for (let n = 0; n < plant.segments.length; n++) {
      const s = plant.segments[n]!
      const cells = p.cellsK[n]!
      const tc = jacket[s.coolant]!
      let mass = 0
      let inK = 0
      s.streams.forEach((i, k) => {
        const m = p.massKgS[i]!
        const from = s.upstream[k]!
        mass += m
        inK += m * (from < 0 ? FEED_K + (noise === null ? 0 : noise.ambientK) : p.cellsK[from]![CELLS - 1]!)
      })
      const normal = s.streams.reduce((sum, i) => sum + plant.streams[i]!.nominalKgS, 0)
      const share = mass / normal
      inK = share > 0.02 ? inK / mass : tc
      const ntu = s.ntu / Math.max(0.2, share) ** 0.7
      const restS = share > 0.02 ? s.volumeM3 / (mass / 850) / CELLS : 300
      const a = 1 - Math.exp(-dtS / (4 + restS + 1.5 * CELLS))
      const reacting = p.phase === 'production' || p.phase === 'startup' ? s.reactionK * heat * Math.min(1.6, share) : 0
      for (let c = 0; c < CELLS; c++) {
        const x = (c + 0.5) / CELLS
        const y = x / s.hotSpot
        const target = tc + (inK - tc) * Math.exp(-ntu * x) + reacting * y * Math.exp(1 - y)
        cells[c] = cells[c]! + a * (target - cells[c]!)
      }
    }
  }

  function pressures(tMs: number): void {
    let total = 0
    for (let i = 0; i < nS; i++) total += p.massKgS[i]!
    p.outletPa = plant.outletPa * (1 + 0.12 * (total / nominal - 1)) + (noise === null ? 0 : noise.outletPa)
    for (const e of backs) p.outletPa += paFromBar(e.bar) * ramp(tMs, e.tMs, e.overS)
    let gas = 0
    if (noise !== null) {
      for (const e of slugs) {
        if (tMs < e.tMs || tMs >= e.tMs + 1000 * e.lastsS) continue
        e.level = 0.7 * e.level + e.random.normal()
        gas += 0.25 * e.level
      }
    }
    tapPa.clear()
    let later = 0
    for (let n = plant.segments.length - 1; n >= 0; n--) {
      const s = plant.segments[n]!
      const cells = shownCells(n, tMs)
      const { flowPa, staticPa } =
        operator?.filled() === true
          ? filledPressure(plant, s, p.massKgS, factors, cells, operator.filling(n), operator.solvent(), operator.water)
          : cleanPressure(plant, s, p.massKgS, factors, cells)
      const wander = noise === null ? 0 : noise.segment[n]!
      p.cleanPa[n] = flowPa
      p.ratio[n] = p.ratioOf(n, tMs)
      const dp = flowPa * p.ratio[n]! * (1 + wander) * Math.max(0.2, 1 + gas) + staticPa
      p.dpPa[n] = dp
      const from = s.spec.dp
      if (from.kind === 'dp') later += dp
      else {
        const out = from.kind === 'held' ? paFromBar(from.outBar) : (tapPa.get(from.pressureOut) ?? p.outletPa + later)
        if (from.kind === 'taps' && !tapPa.has(from.pressureOut)) tapPa.set(from.pressureOut, out)
        tapPa.set(from.pressureIn, Math.max(tapPa.get(from.pressureIn) ?? Number.NEGATIVE_INFINITY, out + dp))
      }
    }
  }

  const scratch = new Float64Array(CELLS)
  /** Cells with what an exotherm adds to them. */
  function shownCells(n: number, tMs: number): Float64Array {
    const cells = p.cellsK[n]!
    for (let c = 0; c < CELLS; c++) scratch[c] = cells[c]! + excessAt(p.exotherms, n, (c + 0.5) / CELLS, tMs)
    return scratch
  }

  function step(tMs: number, dtS: number): void {
    noise?.step(dtS, tMs)
    const span = spanAt(schedule, tMs)
    operator?.step(tMs, dtS)
    p.phase = operator?.phase() ?? span.phase
    p.exotherms = operator === null || operator.feeding() ? exotherms : []
    flows(tMs, dtS, span)
    operator?.pass(p.massKgS, dtS)
    temperatures(tMs, dtS, span)
    pressures(tMs)
  }

  // A plant that has stood in its first phase for long: every lag has settled.
  for (let i = 0; i < 3; i++) step(scenario.fromMs, 1e7)
  return p
}
