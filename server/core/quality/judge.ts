import { cell } from '../reading.ts'
import { type Reason, reasons, type TagRule } from './tag-rules.ts'

/** Index of each reason in `reasons`; the hot path works on these numbers. */
export const why = Object.fromEntries(reasons.map((r, i) => [r, i])) as Record<Reason, number>
const { good, missing, unreadable } = why
const sourceBad = why['source-bad']
const sourceUncertain = why['source-uncertain']
const openCircuit = why['open-circuit']
const loopFailure = why['loop-failure']
const loopUndefined = why['loop-undefined']
const outOfRange = why['out-of-range']
const overRange = why['over-range']
const impossibleRate = why['impossible-rate']
const isFrozen = why.frozen

/**
 * What quality remembers of every tag, one array a field, index = tag. Mutated in place: a day of 24 channels at 10 Hz is twenty
 * million calls, and a fresh state each would cost more than the judgement. Numbers only, all finite, so it survives JSON.
 */
export interface JudgeState {
  /** Last accepted value and when; `seen` says whether there is one. */
  last: number[]
  lastMs: number[]
  seen: number[]
  /** Run of identical readings: length and begin; longest run that ended by itself; how often the reading changed. */
  same: number[]
  sameMs: number[]
  longest: number[]
  changes: number[]
  /** Typical absolute difference between neighbours, own unit. */
  wiggle: number[]
  /** Readings in a row that jumped away, and where to. */
  jumps: number[]
  jumpTo: number[]
  /** Counts by reason, row-major [tag][reason]. */
  counts: number[]
}

export const judgeStart = (tags: number): JudgeState => {
  const zeros = () => new Array<number>(tags).fill(0)
  return {
    last: zeros(),
    lastMs: zeros(),
    seen: zeros(),
    same: zeros(),
    sameMs: zeros(),
    longest: zeros(),
    changes: zeros(),
    wiggle: zeros(),
    jumps: zeros(),
    jumpTo: zeros(),
    counts: new Array<number>(tags * reasons.length).fill(0),
  }
}

/** A healthy quiet sensor may repeat itself; it is frozen after three times its own longest run, never before these. */
const frozen = { samples: 30, timesLongest: 3, fewChanges: 20, fewChangesS: 600 }
/** Readings that must agree on a new level before a jump is taken for a step; a pause this long ends all suspicion, ms. */
const spike = { agree: 3, wiggles: 8, forgetMs: 30_000, impossibleMs: 300_000 }

/** Rules of all tags, a column a field: what every reading looks at lies side by side. */
export type RuleColumns = { readonly [K in keyof TagRule]: Float64Array } & {
  /** Strictly between these nothing of range, loop or open circuit can be wrong. */
  readonly plainLow: Float64Array
  readonly plainHigh: Float64Array
}

export function ruleColumns(rules: readonly TagRule[]): RuleColumns {
  const column = (of: (rule: TagRule) => number | boolean) => Float64Array.from(rules, (rule) => Number(of(rule)))
  return {
    text: column((r) => r.text),
    factor: column((r) => r.factor),
    offset: column((r) => r.offset),
    badLow: column((r) => r.badLow),
    badHigh: column((r) => r.badHigh),
    sureLow: column((r) => r.sureLow),
    sureHigh: column((r) => r.sureHigh),
    loop: column((r) => r.loop),
    openHigh: column((r) => r.openHigh),
    openLow: column((r) => r.openLow),
    spikeStep: column((r) => r.spikeStep),
    mostStep: column((r) => r.mostStep),
    frozenS: column((r) => r.frozenS),
    plainLow: column((r) => Math.max(r.badLow, r.sureLow, r.openLow)),
    plainHigh: column((r) => Math.min(r.badHigh, r.sureHigh, r.openHigh)),
  }
}

/**
 * Judges the readings of one row and writes each one's reason index (`why`) into `out`, by tag; what the row says nothing of is skipped.
 * Order: what the source says, the loop and range, open circuit, a jump that the next readings do not confirm (rejected, shown, counted; the
 * third in a row that agrees is a real step), a value that stands still while liquid flows. Rules SIG-01, -04, -05, -06; figures: common practice.
 * A whole row at once, since a call a reading would box its numbers, twenty million times a day.
 *
 * codes, values  the row begins at `at`; values in the unit of the log (mA for a raw loop)
 * flowing        true while pumps run: a tag may well stand still at rest
 */
export function judgeRow(
  state: JudgeState,
  rules: RuleColumns,
  codes: ArrayLike<number>,
  values: ArrayLike<number>,
  at: number,
  tMs: number,
  flowing: boolean,
  out: Uint8Array,
): void {
  const { last, lastMs, same, longest, wiggle, jumps } = state
  const { factor, offset, spikeStep, plainLow, plainHigh } = rules
  for (let t = 0; t < out.length; t++) {
    const code = codes[at + t]!
    if (code === cell.absent) continue
    if (code !== cell.value && code !== cell.uncertain) {
      out[t] = code === cell.missing ? missing : code === cell.unreadable ? unreadable : sourceBad
      continue
    }
    out[t] = code === cell.uncertain ? sourceUncertain : good
    if (rules.text[t] === 1) continue
    const value = offset[t]! + factor[t]! * values[at + t]!
    const plain = value > plainLow[t]! && value < plainHigh[t]!
    if (!plain) {
      if (value >= rules.openHigh[t]! || value <= rules.openLow[t]!) {
        out[t] = openCircuit
        continue
      }
      if (value < rules.badLow[t]! || value > rules.badHigh[t]!) {
        out[t] = rules.loop[t] === 1 ? loopFailure : outOfRange
        continue
      }
    }
    if (state.seen[t] === 0) {
      state.seen[t] = 1
      last[t] = value
      lastMs[t] = tMs
      same[t] = 1
      state.sameMs[t] = tMs
    } else {
      const step = Math.abs(value - last[t]!)
      const usual = wiggle[t]!
      const most = spikeStep[t]!
      if (step > most && step > spike.wiggles * usual) {
        const refused = jump(state, rules, t, values, at, tMs)
        if (refused !== good) {
          out[t] = refused
          continue
        }
      }
      jumps[t] = 0
      if (step === 0) {
        same[t] = same[t]! + 1
      } else {
        if (same[t]! > longest[t]!) longest[t] = same[t]!
        same[t] = 1
        state.sameMs[t] = tMs
        state.changes[t] = state.changes[t]! + 1
        last[t] = value
      }
      wiggle[t] = usual + (Math.min(step, 6 * usual + most) - usual) / 64
      lastMs[t] = tMs
      if (flowing && same[t]! >= frozen.samples && standsStill(state, rules, t, tMs)) {
        out[t] = isFrozen
        continue
      }
    }
    if (!plain && (value < rules.sureLow[t]! || value > rules.sureHigh[t]!))
      out[t] = rules.loop[t] === 1 ? loopUndefined : overRange
  }
}

/** A reading that jumped away from its neighbours: why it is refused, or `good` once the jump is a step or the last reading too old to tell. */
function jump(state: JudgeState, rules: RuleColumns, t: number, values: ArrayLike<number>, at: number, tMs: number): number {
  const value = rules.offset[t]! + rules.factor[t]! * values[at + t]!
  const step = Math.abs(value - state.last[t]!)
  const wiggle = state.wiggle[t]!
  // A spike comes back; a rise that goes on the same way, each time by a believable step, is no jump however far it gets: a runaway must be seen.
  const away = state.jumpTo[t]! - state.last[t]!
  const goesOn =
    state.jumps[t]! > 0 && away * (value - state.jumpTo[t]!) > 0 && Math.abs(value - state.jumpTo[t]!) <= rules.mostStep[t]!
  const impossible = step > rules.mostStep[t]! && !goesOn
  if (tMs - state.lastMs[t]! >= (impossible ? spike.impossibleMs : spike.forgetMs)) return good
  if (impossible) return impossibleRate
  const agrees =
    goesOn || (state.jumps[t]! > 0 && Math.abs(value - state.jumpTo[t]!) < Math.max(0.25 * step, spike.wiggles * wiggle))
  state.jumps[t] = agrees ? state.jumps[t]! + 1 : 1
  state.jumpTo[t] = value
  if (state.jumps[t]! >= spike.agree) return good
  // A pump that pulsates by more than this is learnt, not rejected for ever.
  state.wiggle[t] = wiggle + (Math.min(step, 6 * wiggle + rules.spikeStep[t]!) - wiggle) / 64
  return why.spike
}

function standsStill(state: JudgeState, rules: RuleColumns, t: number, tMs: number): boolean {
  const standing = (tMs - state.sameMs[t]!) / 1000
  const least = rules.frozenS[t]!
  const enough = state.changes[t]! < frozen.fewChanges ? Math.max(least, frozen.fewChangesS) : least
  return standing >= enough && state.same[t]! > frozen.timesLongest * state.longest[t]!
}
