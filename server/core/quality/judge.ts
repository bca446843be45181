import { cell, type RowBlock } from '../reading.ts'
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

/** What quality remembers of every tag, one array a field, index = tag. Numbers only, all finite, so it survives JSON. */
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

const fields = ['last', 'lastMs', 'seen', 'same', 'sameMs', 'longest', 'changes', 'wiggle', 'jumps', 'jumpTo'] as const
const [atLast, atLastMs, atSeen, atSame, atSameMs, atLongest, atChanges, atWiggle, atJumps, atJumpTo] = fields.map((_, i) => i) as [
  number, number, number, number, number, number, number, number, number, number,
] // biome-ignore format: a list
const stride = 16

/** A `JudgeState` at work: all of a tag lies side by side, as it is taken up and put down with every scan. */
export interface JudgeMemory {
  readonly tags: Float64Array
  readonly counts: Float64Array
}

export function judgeMemory(state: JudgeState): JudgeMemory {
  const tags = new Float64Array(state.last.length * stride)
  fields.forEach((field, f) => {
    state[field].forEach((value, t) => {
      tags[t * stride + f] = value
    })
  })
  return { tags, counts: Float64Array.from(state.counts) }
}

export function judgeState({ tags, counts }: JudgeMemory): JudgeState {
  const state = judgeStart(tags.length / stride)
  fields.forEach((field, f) => {
    for (let t = 0; t < state[field].length; t++) state[field][t] = tags[t * stride + f]!
  })
  state.counts = Array.from(counts)
  return state
}

/** Reasons whose readings count into a cell's mean: good and uncertain ones, never bad, frozen or late ones. */
const usable = Uint8Array.from(reasons, (r) =>
  Number(r === 'good' || r === 'over-range' || r === 'source-uncertain' || r === 'loop-undefined'),
)

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

/** What the readings of a cell come to, by tag. */
export interface Gathered {
  /** Sum and number of the readings that count into the mean: good and uncertain ones, never bad or frozen ones. */
  readonly sum: Float64Array
  readonly used: Float64Array
  /** Last reason a reading was not good. */
  readonly flaw: Float64Array
}

/**
 * Judges readings of some rows, tag by tag, counts each one's reason and adds up those that may be used; what a row says nothing of is skipped.
 * Order: what the source says, the loop and range, open circuit, a jump that the next readings do not confirm (rejected, shown, counted; the
 * third in a row that agrees is a real step), a value that stands still while liquid flows. Rules SIG-01, -04, -05, -06; figures: common practice.
 * A tag's readings of a cell together, its memory in local numbers: twenty million calls a day would box theirs.
 *
 * block     values in the unit of the log (mA for a raw loop); rows from `from` to before `to` are judged
 * flowing   true while pumps run: a tag may well stand still at rest
 */
export function judgeRows(
  { tags: m, counts }: JudgeMemory,
  rules: RuleColumns,
  { width, tMs, values, codes }: Pick<RowBlock, 'width' | 'tMs' | 'values' | 'codes'>,
  from: number,
  to: number,
  flowing: boolean,
  into: Gathered,
): void {
  const tags = rules.text.length
  for (let t = 0, own = 0; t < tags; t++, own += stride) {
    const text = rules.text[t] === 1
    const factor = rules.factor[t]!
    const offset = rules.offset[t]!
    const most = rules.spikeStep[t]!
    const plainLow = rules.plainLow[t]!
    const plainHigh = rules.plainHigh[t]!
    let seen = m[own + atSeen]!
    let last = m[own + atLast]!
    let lastMs = m[own + atLastMs]!
    let same = m[own + atSame]!
    let sameMs = m[own + atSameMs]!
    let longest = m[own + atLongest]!
    let changes = m[own + atChanges]!
    let wiggle = m[own + atWiggle]!
    let jumps = m[own + atJumps]!
    let sum = into.sum[t]!
    let used = 0
    let goods = 0
    for (let i = from, at = from * width + t; i < to; i++, at += width) {
      const code = codes[at]!
      const raw = values[at]!
      let reason = good
      if (code !== cell.value) {
        if (code === cell.absent) continue
        reason =
          code === cell.uncertain
            ? sourceUncertain
            : code === cell.missing
              ? missing
              : code === cell.unreadable
                ? unreadable
                : sourceBad
      }
      if (!text && (reason === good || reason === sourceUncertain)) {
        const value = offset + factor * raw
        const nowMs = tMs[i]!
        const plain = value > plainLow && value < plainHigh
        let refused = good
        if (!plain) {
          if (value >= rules.openHigh[t]! || value <= rules.openLow[t]!) refused = openCircuit
          else if (value < rules.badLow[t]! || value > rules.badHigh[t]!) refused = rules.loop[t] === 1 ? loopFailure : outOfRange
        }
        const step = Math.abs(value - last)
        if (seen === 1 && refused === good && step > most && step > spike.wiggles * wiggle) {
          m[own + atJumps] = jumps
          refused = jump(m, own, rules.mostStep[t]!, value, last, nowMs - lastMs, wiggle)
          jumps = m[own + atJumps]!
          // A pump that pulsates by more than this is learnt, not rejected for ever.
          if (refused === why.spike) wiggle = wiggle + (Math.min(step, 6 * wiggle + most) - wiggle) / 64
        }
        if (refused !== good) reason = refused
        else {
          if (seen === 0) {
            seen = 1
            last = value
            same = 1
            sameMs = nowMs
          } else {
            jumps = 0
            if (step === 0) same++
            else {
              if (same > longest) longest = same
              same = 1
              sameMs = nowMs
              changes++
              last = value
            }
            const cap = 6 * wiggle + most
            wiggle = wiggle + (Math.min(step, cap) - wiggle) / 64
          }
          lastMs = nowMs
          if (flowing && same >= frozen.samples && standsStill((nowMs - sameMs) / 1000, rules.frozenS[t]!, same, longest, changes))
            reason = isFrozen
          else if (!plain && (value < rules.sureLow[t]! || value > rules.sureHigh[t]!))
            reason = rules.loop[t] === 1 ? loopUndefined : overRange
        }
      }
      if (reason === good) {
        sum += raw
        goods++
        continue
      }
      counts[t * reasons.length + reason]!++
      into.flaw[t] = reason
      if (usable[reason] === 1) {
        sum += raw
        used++
      }
    }
    counts[t * reasons.length + good]! += goods
    into.sum[t] = sum
    into.used[t]! += goods + used
    m[own + atSeen] = seen
    m[own + atLast] = last
    m[own + atLastMs] = lastMs
    m[own + atSame] = same
    m[own + atSameMs] = sameMs
    m[own + atLongest] = longest
    m[own + atChanges] = changes
    m[own + atWiggle] = wiggle
    m[own + atJumps] = jumps
  }
}

/**
 * A reading that jumped away from its neighbours: why it is refused, or `good` once the jump is a step or the last reading, `ageMs` old, too old to tell.
 */
function jump(m: Float64Array, own: number, mostStep: number, value: number, last: number, ageMs: number, wiggle: number): number {
  const step = Math.abs(value - last)
  const jumps = m[own + atJumps]!
  const to = m[own + atJumpTo]!
  // A spike comes back; a rise that goes on the same way, each time by a believable step, is no jump however far it gets: a runaway must be seen.
  const goesOn = jumps > 0 && (to - last) * (value - to) > 0 && Math.abs(value - to) <= mostStep
  const impossible = step > mostStep && !goesOn
  if (ageMs >= (impossible ? spike.impossibleMs : spike.forgetMs)) return good
  if (impossible) return impossibleRate
  const agrees = goesOn || (jumps > 0 && Math.abs(value - to) < Math.max(0.25 * step, spike.wiggles * wiggle))
  const now = agrees ? jumps + 1 : 1
  m[own + atJumps] = now
  m[own + atJumpTo] = value
  return now >= spike.agree ? good : why.spike
}

/** Whether a value that stood still for so many seconds and `same` readings stands longer than is its way. */
function standsStill(standingS: number, leastS: number, same: number, longest: number, changes: number): boolean {
  const enough = changes < frozen.fewChanges ? Math.max(leastS, frozen.fewChangesS) : leastS
  return standingS >= enough && same > frozen.timesLongest * longest
}
