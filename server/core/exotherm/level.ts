/**
 * What one thermocouple shows in excess of the lagged coolant, and how much of it is heat of reaction:
 *
 *   z = c + (c − o)(h − 1) + e
 *
 * z  30-s mean of T − lagged coolant, K      h  limiting feed over its reference [-]
 * c  excess at the reference feed, K; random walk of `walk` K per root hour
 * o  the part of it that does not go with the feed, K: the thermocouple's own offset against the coolant's, and what a warm inlet or a moving hot
 *    spot make of the feed; prior 0 ± √(0.7² + (0.3 c)²); taught only by a feed more than 3 % off its reference, since
 *    a feed and a temperature that both wander would soon prove anything
 * so that c − o, the part that goes with the feed, is known from the start to within that. A gain that floats instead turns every flow step into
 * an alarm. Two-state Kalman filter; a block off by more than `far`, and by more than 2.5 sd of what the filter itself doubts, hardly teaches
 * (its variance is raised by the fourth power of how far). Valid for |h − 1| up to about 0.5. Source: own study of methods on simulated skids.
 */
export interface Level {
  c: number
  o: number
  pcc: number
  pco: number
  poo: number
  /** Blocks taken up so far. */
  n: number
}

const offsetSd = 0.7
const noiseSd = 0.12
const walk = 0.1
const far = 0.35
const gainSd = 0.3
const deadFeed = 0.03

export const freshLevel = (): Level => ({ c: 0, o: 0, pcc: 1, pco: 0, poo: offsetSd * offsetSd, n: 0 })

/** Once c is known: how far the gain may be from it. */
export function openGain(l: Level): void {
  l.poo += (gainSd * l.c) ** 2
}

/** What the level explains at feed h, K. */
export const explained = (l: { readonly c: number; readonly o: number }, h: number): number => l.c * h - l.o * (h - 1)

/** One block mean. `settling`: not yet armed, so c simply follows; nothing is an outlier yet. */
export function learn(l: Level, zK: number, h: number, blockS: number, settling: boolean): void {
  if (l.n === 0) l.c = zK
  l.n++
  l.pcc += settling ? 0.25 : (walk * walk * blockS) / 3600
  const b = Math.abs(h - 1) < deadFeed ? 0 : 1 - h + Math.sign(h - 1) * deadFeed
  const off = zK - explained(l, h)
  const kc = l.pcc * h + l.pco * b
  const ko = l.pco * h + l.poo * b
  const ratio = settling ? 1 : Math.max(1, Math.abs(off) / Math.max(far, 2.5 * Math.sqrt(h * kc + b * ko)))
  const noise = noiseSd * noiseSd * ratio ** 4
  const s = h * kc + b * ko + noise
  l.c += (kc / s) * off
  l.o += (ko / s) * off
  l.pcc -= (kc * kc) / s
  l.pco -= (kc * ko) / s
  l.poo -= (ko * ko) / s
}
