import { wanderVar } from '../bank/filter.ts'
import { disturbances } from '../bank/model.ts'
import { type Layout, layoutOf } from '../derive/layout.ts'
import { createObserver, type SegmentStep } from '../derive/observe.ts'
import { createStepper, type Step } from '../derive/step.ts'
import { dpUncertainty } from '../figures/dp-uncertainty.ts'
import { channelOf } from '../hydraulics/channel.ts'
import { cleanDp } from '../hydraulics/clean-dp.ts'
import type { RowBlock } from '../reading.ts'
import { createGrid } from '../scan/grid.ts'
import type { Skid } from '../skid.ts'
import { barFromPa, cFromK, mlMinFromM3s } from '../units.ts'
import { fitExponent, fitLine, fitTwoTerms, type LevelMean } from './exponent-fit.ts'
import { judge } from './judge.ts'
import type { CommissionedSegment, Commissioning } from './record.ts'
import { type Stretch, stretchesOf, stretchRules } from './stretches.ts'

const iso = (ms: number): string => new Date(ms).toISOString()
/** Re of a straight round bore between laminar and turbulent. */
const transition = [2000, 4000] as const

/**
 * Judges a logged step test: pumps at rest for the zero, then clean liquid at three or more flows, each held steady; the stretches are found in the
 * log, for each segment by itself. Rows in arrival order, as in a run. Errors: those of the grid and of the streams' liquids (FLUID_*).
 */
export function createCommissioning(skid: Skid) {
  const layout = layoutOf(skid)
  const steps: Step[] = []
  const stepper = createStepper(layout, (s) => steps.push(s))
  const grid = createGrid(skid, (scan) => stepper.scan(scan))
  return {
    rows: (block: RowBlock): void => grid.rows(block),
    finish(): Commissioning {
      grid.finish()
      return commissioningOf(layout, steps)
    },
  }
}

/** The same from detector steps. */
export function commissioningOf(layout: Layout, steps: readonly Step[]): Commissioning {
  const half = (steps[0]?.stepMs ?? 0) / 2
  return {
    commissioning: 1,
    skid: layout.skid.skid,
    from: steps.length === 0 ? null : iso(steps[0]!.tMs - half),
    to: steps.length === 0 ? null : iso(steps.at(-1)!.tMs + half),
    segments: layout.segments.map((_, i) => segmentOf(layout, i, steps)),
  }
}

interface Level extends LevelMean {
  readonly stretch: Stretch
  readonly tempK: number
  readonly lnFlow: number
  readonly y: readonly { readonly tMs: number; readonly y: number }[]
  readonly mean: number
  readonly re: number | null
  /** Between laminar and turbulent in this very channel. */
  readonly uncertain: boolean
}

function segmentOf(layout: Layout, i: number, steps: readonly Step[]): CommissionedSegment {
  const seg = layout.segments[i]!
  const { uPa } = dpUncertainty(layout.skid, seg.spec)
  const found = stretchesOf(steps, seg.streams, seg.temperatures)
  const zero = zeroOf(layout, i, steps, found.rest)
  const zeroSd = zero?.sdPa ?? uPa ?? 0
  const levels = levelsOf(layout, i, steps, found.steady, zero?.pa ?? 0)
  const exponent = fitExponent(levels, zeroSd)
  const over = fitLine(
    levels.map((l) => l.lnFlow),
    levels.map((l) => l.mean),
    levels,
    zeroSd,
  )
  const two = fitTwoTerms(levels)
  const ratio = scatterOf(levels)
  const re = levels.flatMap((l) => (l.re === null ? [] : [l.re]))
  const reynolds =
    re.length === 0
      ? null
      : {
          low: Math.min(...re),
          high: Math.max(...re),
          transitional: Math.max(...re) > transition[0] && Math.min(...re) < transition[1],
        }
  const hydraulics = hydraulicsOf(layout, i, levels, zeroSd, exponent?.slope ?? null)
  const bounded = (n: number): number => Math.min(2, Math.max(1, n))
  const line = exponent === null ? [] : residuals(levels, exponent.slope)
  const half = (steps[0]?.stepMs ?? 0) / 2
  const facts = {
    zero,
    uPa,
    levels,
    found,
    exponent,
    ratio,
    hydraulics,
    reynolds,
    held: seg.spec.dp.kind === 'held',
    hasChannel: seg.spec.channel !== null,
    hasTemperature: seg.temperatures.length > 0,
  }
  return {
    segment: seg.spec.id,
    ...judge(facts),
    zero:
      zero === null
        ? null
        : { mbar: mbar(zero.pa), sdMbar: mbar(zero.sdPa), uMbar: uPa === null ? null : mbar(uPa), steps: zero.steps },
    levels: levels.map((l, j) => ({
      from: iso(steps[l.stretch.from]!.tMs - half),
      to: iso(steps[l.stretch.to - 1]!.tMs + half),
      steps: l.y.length,
      flowMlMin: mlMinFromM3s(l.flowM3S),
      tempC: cFromK(l.tempK),
      dpBar: barFromPa(l.dpPa),
      re: l.re,
      residualPct: line[j] === undefined ? null : 100 * line[j],
    })),
    exponent:
      exponent === null || over === null
        ? null
        : {
            n: bounded(exponent.slope),
            low: bounded(exponent.slope - 1.96 * exponent.sd),
            high: bounded(exponent.slope + 1.96 * exponent.sd),
            residualPct: 100 * exponent.residual,
            // Never such that n leaves its bounds.
            over: over.slope + bounded(exponent.slope) - exponent.slope,
            sd: over.sd,
          },
    twoTerms: two === null ? null : { a: two.a, b: two.b, residualPct: 100 * two.residual, linearShare: two.linearShare },
    reynolds,
    hydraulics,
    ratio:
      ratio === null
        ? null
        : { sigma: ratio.sigma, correlation: ratio.phi, driftPct: 100 * ratio.drift, driftSePct: 100 * ratio.driftSe },
  }
}

const mbar = (pa: number): number => 1000 * barFromPa(pa)

/** Mean ΔP less head over all standstills, Pa; its sd from the scatter, at least half the range between standstills. */
function zeroOf(layout: Layout, i: number, steps: readonly Step[], rest: readonly Stretch[]) {
  const { headAtRest } = createObserver(layout)
  const means: number[] = []
  const all: number[] = []
  for (const r of rest) {
    const dp: number[] = []
    for (let k = r.from; k < r.to; k++) {
      const p = steps[k]!.dpPa[i] ?? null
      if (p !== null) dp.push(p - headAtRest(i, steps[k]!))
    }
    if (dp.length < stretchRules.least) continue
    means.push(dp.reduce((a, b) => a + b, 0) / dp.length)
    all.push(...dp)
  }
  if (means.length === 0) return null
  const pa = all.reduce((a, b) => a + b, 0) / all.length
  const sd = Math.sqrt(all.reduce((a, b) => a + (b - pa) ** 2, 0) / Math.max(1, all.length - 1))
  return { pa, sdPa: Math.max(sd / Math.sqrt(all.length), (Math.max(...means) - Math.min(...means)) / 2), steps: all.length }
}

/** Each steady stretch as one level, its ln ΔP over the hydraulics by `derive/observe.ts` with the zero taken off. */
function levelsOf(layout: Layout, i: number, steps: readonly Step[], steady: readonly Stretch[], zeroPa: number): Level[] {
  const observer = createObserver(
    layout,
    undefined,
    layout.segments.map((_, j) => (j === i ? zeroPa : 0)),
  )
  const channel = observer.channels[i] ?? null
  const levels: Level[] = []
  for (const stretch of steady) {
    const seen: SegmentStep[] = []
    const y: { tMs: number; y: number }[] = []
    for (let k = stretch.from; k < stretch.to; k++) {
      const s = observer.step(steps[k]!, true)[i]!
      if (s.observation === null) continue
      seen.push(s)
      y.push({ tMs: steps[k]!.tMs, y: s.observation.y })
    }
    const ref = observer.state.reference[i] ?? null
    if (seen.length < stretchRules.least || ref === null) continue
    const mean = (of: (s: SegmentStep) => number) => seen.reduce((a, s) => a + of(s), 0) / seen.length
    const dpPa = mean((s) => s.observation!.dpPa)
    const kgS = mean((s) => s.massFlowKgS!)
    const flowM3S = mean((s) => s.volFlowM3S ?? s.massFlowKgS! / 1000)
    const viscPaS = ref.viscPaS * Math.exp(mean((s) => s.observation!.lnVisc))
    const rhoKgM3 = kgS / flowM3S
    const model = channel === null ? null : cleanDp(channel, kgS, rhoKgM3, viscPaS)
    const level = y.reduce((a, p) => a + p.y, 0) / y.length
    const scatter = Math.sqrt(y.reduce((a, p) => a + (p.y - level) ** 2, 0) / (y.length - 1))
    levels.push({
      stretch,
      dpPa,
      flowM3S,
      rhoKgM3,
      viscPaS,
      tempK: mean((s) => s.tempK!),
      lnFlow: mean((s) => s.observation!.lnFlow),
      y,
      mean: level,
      // A level is one draw of the slow wander, however long it is held.
      sd: Math.hypot(scatter / Math.sqrt(y.length), Math.sqrt(wanderVar(dpPa))),
      re: model === null ? null : model.re,
      uncertain: model?.uncertain ?? false,
    })
  }
  return levels
}

/** Distance of each level from the power n of flow through their mean, ln. */
function residuals(levels: readonly LevelMean[], n: number): number[] {
  const c = levels.map((l) => Math.log((l.dpPa * l.rhoKgM3) / l.viscPaS ** 2) - n * Math.log((l.flowM3S * l.rhoKgM3) / l.viscPaS))
  const w = levels.map((l) => 1 / l.sd ** 2)
  const mean = c.reduce((a, b, j) => a + w[j]! * b, 0) / w.reduce((a, b) => a + b, 0)
  return c.map((x) => x - mean)
}

/**
 * Scatter of ln ratio about the levels' means: sd, lag-1 correlation, and the drift common to all levels over the whole test, with its standard error: of the
 * noise, and of the wander, which over a level of length L ≪ τ is a walk of 2w²/τ an hour and so tilts a line by w √(2.4/(τ L)).
 */
function scatterOf(levels: readonly Level[]) {
  if (levels.length === 0) return null
  const n = levels.reduce((a, l) => a + l.y.length, 0)
  let [ss, lag, tt, ty, wandering] = [0, 0, 0, 0, 0]
  for (const l of levels) {
    const mid = l.y.reduce((a, p) => a + p.tMs, 0) / l.y.length
    const before = tt
    l.y.forEach((p, k) => {
      const e = p.y - l.mean
      const h = (p.tMs - mid) / 3.6e6
      ss += e * e
      tt += h * h
      ty += h * e
      if (k > 0) lag += e * (l.y[k - 1]!.y - l.mean)
    })
    const lengthH = (l.y.at(-1)!.tMs - l.y[0]!.tMs) / 3.6e6
    wandering += (tt - before) ** 2 * wanderVar(l.dpPa) * (2.4 / (disturbances.wanderTauH * Math.max(lengthH, 1e-6)))
  }
  const phi = ss > 0 ? Math.min(0.95, Math.max(0, lag / ss)) : 0
  const perHour = tt > 0 ? ty / tt : 0
  const left = Math.max(0, ss - perHour * ty)
  const sigma = Math.sqrt(left / Math.max(1, n - levels.length - 1))
  const spanH = (levels.at(-1)!.y.at(-1)!.tMs - levels[0]!.y[0]!.tMs) / 3.6e6
  const se = tt > 0 ? Math.sqrt((sigma ** 2 / tt) * ((1 + phi) / (1 - phi)) + wandering / tt ** 2) : 0
  return { sigma, phi, drift: perHour * spanH, driftSe: se * spanH }
}

/** ΔP over that of the file's own bore and liquids. A bore d·F^(−1/(3 + n)), or a viscosity μ·F^(1/(2 − n)), explains it alone. */
function hydraulicsOf(layout: Layout, i: number, levels: readonly Level[], zeroSd: number, n: number | null) {
  const spec = layout.segments[i]!.spec.channel
  const channel = spec === null ? null : channelOf(spec)
  const top = levels.reduce<Level | null>((m, l) => (m === null || l.dpPa > m.dpPa ? l : m), null)
  if (channel === null || top === null) return null
  const model = cleanDp(channel, top.flowM3S * top.rhoKgM3, top.rhoKgM3, top.viscPaS)
  const factor = top.dpPa / (model.frictionPa + model.bendPa)
  const power = n === null ? 1 : Math.min(2, Math.max(1, n))
  return {
    factor,
    sd: factor * Math.hypot(top.sd, zeroSd / top.dpPa),
    boreMm: spec?.diameterMm == null || spec.coreMm != null ? null : spec.diameterMm * factor ** (-1 / (3 + power)),
    viscosityFactor: power > 1.9 ? null : factor ** (1 / (2 - power)),
  }
}
