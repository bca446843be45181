import type { Skid, TagSpec } from '../skid.ts'

/** Why a reading is not good. The order is that of the counters in the state; append only. */
export const reasons = [
  'good',
  'missing',
  'unreadable',
  'source-bad',
  'source-uncertain',
  'out-of-range',
  'over-range',
  'loop-failure',
  'loop-undefined',
  'open-circuit',
  'spike',
  'impossible-rate',
  'frozen',
  'late',
  'duplicate',
  'bad-time',
] as const
export type Reason = (typeof reasons)[number]
export type Grade = 'good' | 'uncertain' | 'bad'

export const gradeOf: Record<Reason, Grade> = {
  good: 'good',
  missing: 'bad',
  unreadable: 'bad',
  'source-bad': 'bad',
  'source-uncertain': 'uncertain',
  'out-of-range': 'bad',
  'over-range': 'uncertain',
  'loop-failure': 'bad',
  'loop-undefined': 'uncertain',
  'open-circuit': 'bad',
  spike: 'bad',
  'impossible-rate': 'bad',
  frozen: 'uncertain',
  late: 'bad',
  duplicate: 'bad',
  'bad-time': 'bad',
}

/** What one tag's readings are held against, all in the tag's own unit. */
export interface TagRule {
  /** A word or state: counted, never judged as a number. */
  readonly text: boolean
  /** Raw loop current: value = offset + factor · mA; 1 and 0 where the log already holds the value. */
  readonly factor: number
  readonly offset: number
  /** Outside [badLow, badHigh] a reading is bad, outside [sureLow, sureHigh] uncertain. */
  readonly badLow: number
  readonly badHigh: number
  readonly sureLow: number
  readonly sureHigh: number
  readonly loop: boolean
  /** At or beyond this a thermocouple is open; ±Infinity where no burn-out direction is known. */
  readonly openHigh: number
  readonly openLow: number
  /** Least jump that may be called a spike; Infinity where none may. */
  readonly spikeStep: number
  /** A jump between neighbours beyond this is impossible, however many readings agree on it; Infinity where none is. */
  readonly mostStep: number
  /** A reading unchanged for this long may be frozen, s; Infinity for tags that may stand still. */
  readonly frozenS: number
}

/**
 * The NE 43 bands on a live-zero loop, as shares of span beyond the range: 3.8 mA = −1.25 %, 3.6 mA = −2.5 %, 20.5 mA = +3.125 %,
 * 21 mA = +6.25 %. Source: NAMUR NE 43 (from memory). Tags without a loop use the same widths as a plausibility band around the range.
 */
const band = { failLow: -0.4 / 16, sureLow: -0.2 / 16, sureHigh: 0.5 / 16, failHigh: 1 / 16 }

const frozenSeconds: Partial<Record<TagSpec['quantity'], number>> = {
  pressure: 60,
  differentialPressure: 60,
  temperature: 90,
  massFlow: 30,
  volumeFlow: 30,
  density: 60,
  dewPoint: 90,
  conductivity: 90,
}

export function ruleOf(tag: TagSpec): TagRule {
  const text = tag.quantity === 'text' || tag.quantity === 'state'
  const open = Number.POSITIVE_INFINITY
  if (tag.range === null || text)
    return {
      text,
      factor: 1,
      offset: 0,
      badLow: -open,
      badHigh: open,
      sureLow: -open,
      sureHigh: open,
      loop: false,
      openHigh: open,
      openLow: -open,
      spikeStep: open,
      mostStep: open,
      frozenS: text ? open : (frozenSeconds[tag.quantity] ?? open),
    }
  const [lo, hi] = tag.range
  const span = hi - lo
  const raw = tag.unit === 'mA'
  return {
    text,
    factor: raw ? span / 16 : 1,
    offset: raw ? lo - span / 4 : 0,
    badLow: lo + band.failLow * span,
    badHigh: hi + band.failHigh * span,
    sureLow: lo + band.sureLow * span,
    sureHigh: hi + band.sureHigh * span,
    loop: raw || tag.signal === '4-20mA',
    // Without a stated direction either end of the range of a thermocouple is taken for an open circuit.
    openHigh: tag.burnout === 'high' || (tag.burnout === null && thermocouple(tag)) ? hi : open,
    openLow: tag.burnout === 'low' || (tag.burnout === null && thermocouple(tag)) ? lo : -open,
    mostStep: tag.quantity === 'temperature' ? 0.15 * span : open,
    spikeStep: 0.02 * span,
    frozenS: frozenSeconds[tag.quantity] ?? open,
  }
}

const thermocouple = (tag: TagSpec): boolean => tag.quantity === 'temperature' && tag.sensor !== null && /^[A-Z]$/i.test(tag.sensor)

export const rulesOf = (skid: Skid): TagRule[] => skid.tags.map(ruleOf)
