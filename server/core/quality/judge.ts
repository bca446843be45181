import { cell } from '../reading.ts'
import { type Reason, reasons, type TagRule } from './tag-rules.ts'

/** Index of each reason in `reasons`; the hot path works on these numbers. */
export const why = Object.fromEntries(reasons.map((r, i) => [r, i])) as Record<Reason, number>

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

/**
 * Judges one reading and returns its reason's index (`why`). Order: what the source says, the loop and range, open circuit, a jump
 * that the next readings do not confirm (rejected, shown, counted; the third in a row that agrees is a real step), a value that
 * stands still while liquid flows. Rules SIG-01, -04, -05, -06; figures: common practice.
 *
 * value  in the unit of the log (mA for a raw loop); flowing  true while pumps run: a tag may well stand still at rest.
 */
export function judge(
  state: JudgeState,
  rule: TagRule,
  tag: number,
  code: number,
  raw: number,
  tMs: number,
  flowing: boolean,
): number {
  if (code === cell.missing) return why.missing
  if (code === cell.unreadable) return why.unreadable
  if (code === cell.bad) return why['source-bad']
  if (rule.text) return code === cell.uncertain ? why['source-uncertain'] : why.good
  const value = rule.offset + rule.factor * raw
  if (value >= rule.openHigh || value <= rule.openLow) return why['open-circuit']
  if (value < rule.badLow || value > rule.badHigh) return rule.loop ? why['loop-failure'] : why['out-of-range']
  if (state.seen[tag] === 0) {
    state.seen[tag] = 1
    state.last[tag] = value
    state.lastMs[tag] = tMs
    state.same[tag] = 1
    state.sameMs[tag] = tMs
  } else {
    const step = Math.abs(value - state.last[tag]!)
    const wiggle = state.wiggle[tag]!
    if (
      step > rule.spikeStep &&
      step > spike.wiggles * wiggle &&
      tMs - state.lastMs[tag]! < (step > rule.mostStep ? spike.impossibleMs : spike.forgetMs)
    ) {
      if (step > rule.mostStep) return why['impossible-rate']
      const agrees = state.jumps[tag]! > 0 && Math.abs(value - state.jumpTo[tag]!) < Math.max(0.25 * step, spike.wiggles * wiggle)
      state.jumps[tag] = agrees ? state.jumps[tag]! + 1 : 1
      state.jumpTo[tag] = value
      if (state.jumps[tag]! < spike.agree) {
        // A pump that pulsates by more than this is learnt, not rejected for ever.
        state.wiggle[tag] = wiggle + (Math.min(step, 6 * wiggle + rule.spikeStep) - wiggle) / 64
        return why.spike
      }
    }
    state.jumps[tag] = 0
    if (value === state.last[tag]) {
      state.same[tag] = state.same[tag]! + 1
    } else {
      if (state.same[tag]! > state.longest[tag]!) state.longest[tag] = state.same[tag]!
      state.same[tag] = 1
      state.sameMs[tag] = tMs
      state.changes[tag] = state.changes[tag]! + 1
      state.last[tag] = value
    }
    state.wiggle[tag] = wiggle + (Math.min(step, 6 * wiggle + rule.spikeStep) - wiggle) / 64
    state.lastMs[tag] = tMs
    if (flowing && state.same[tag]! >= frozen.samples) {
      const standing = (tMs - state.sameMs[tag]!) / 1000
      const enough = state.changes[tag]! < frozen.fewChanges ? Math.max(rule.frozenS, frozen.fewChangesS) : rule.frozenS
      if (standing >= enough && state.same[tag]! > frozen.timesLongest * state.longest[tag]!) return why.frozen
    }
  }
  if (value < rule.sureLow || value > rule.sureHigh) return rule.loop ? why['loop-undefined'] : why['over-range']
  return code === cell.uncertain ? why['source-uncertain'] : why.good
}
