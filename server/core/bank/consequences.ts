import type { Layout } from '../derive/layout.ts'
import type { BankEvent, BankState } from './bank-state.ts'
import type { StateMap } from './model.ts'
import { touches, type Verdict, verdictRules, zeroSuspect } from './verdicts.ts'

/** What follows from a verdict: where its size goes in the model, and what is told of it. Changes `s` and `f` in place. */
export function createConsequences(bank: {
  readonly layout: Layout
  readonly map: StateMap
  readonly f: { readonly x: Float64Array; readonly p: Float64Array }
  readonly s: BankState
  watched(segment: number): boolean
}) {
  const { layout, map, f, s, watched } = bank

  function putInto(index: number, size: number, variance: number): void {
    f.x[index]! += size
    f.p[index * map.size + index]! += variance
  }
  function shiftReference(seg: number, size: number): void {
    const t = s.tracks[seg]!
    if (t.cRef !== null) t.cRef += size
  }
  /** A deposit stands: the segment leaves the filter with its clean parameters. */
  function freeze(seg: number): void {
    const t = s.tracks[seg]!
    t.fouled = true
    t.clean = { c: f.x[map.level(seg)]!, a: f.x[map.flowExp(seg)]!, k: f.x[map.viscExp(seg)]! }
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
    freeze,
    deposit(v: Verdict): BankEvent {
      freeze(v.column.of)
      return { kind: 'deposit', segment: v.column.of, size: v.size * v.ageSteps, ...common(v) }
    },
    /** Any other explanation that was accepted. */
    other(v: Verdict): BankEvent {
      const variance = 1 / v.column.j + (0.1 * v.size) ** 2
      switch (v.column.kind) {
        case 'stream':
          putInto(map.visc[v.column.of]!, v.size, variance)
          return { kind: 'stream', stream: v.column.of, size: v.size, ...common(v) }
        case 'tap-ramp':
        case 'tap-step':
          return tapEvent(v, variance)
        default:
          return stepEvent(v, v.column.of, v.size, variance)
      }
    },
  }
}
