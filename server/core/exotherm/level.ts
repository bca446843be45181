/**
 * What one thermocouple shows in excess of the lagged coolant, and how much of it is heat of reaction:
 *
 *   z = c + (c − o)(h − 1) − b v + e
 *
 * z  30-s mean of T − lagged coolant, K      h  limiting feed over its reference [-]
 * v  lagged coolant less what it was when the reference was taken, K
 * c  excess at the reference feed and coolant, K; random walk of `walk` K per root hour
 * o  the part of it that does not go with the feed, K: the thermocouple's own offset against the coolant's, and what a warm inlet or a moving hot
 *    spot make of the feed; prior 0 ± √(0.7² + (0.3 c)²); taught only by a feed more than 3 % off its reference, since
 *    a feed and a temperature that both wander would soon prove anything
 * b  the share of a move of the coolant that does not arrive, [0, 1]: what enters with a temperature of its own still keeps e^(−NTU x) of it
 *    at x along the wall. With s the mass share of streams that have not passed this coolant before, prior 0.3 s ± 0.25 s, so 0 for
 *    a reactor whose feeds were all precooled; taught only by a coolant more than 0.5 K off
 * so that c − o, the part that goes with the feed, is known from the start to within that. A gain that floats instead turns every flow step into
 * an alarm. A fluid colder than its coolant (c < 0) owes that to its inlet: its distance goes as e^(−NTU x), NTU about h^−0.7, so that by 0.4 of
 * proportion is the prior there. Three-state Kalman filter; a block off by more than `far`, and by more than 2.5 sd of what the filter itself
 * doubts, hardly teaches (its variance is raised by the fourth power of how far). Valid for |h − 1| up to about 0.5. Source: own study of methods
 * on simulated skids; b from the plug flow along a wall (any text on heat exchangers).
 */
export interface Level {
  c: number
  o: number
  b: number
  pcc: number
  pco: number
  poo: number
  pcb: number
  pob: number
  pbb: number
  /** Below this the doubt of b does not fall: another coolant moves the other streams another time. */
  leastPbb: number
  /** Blocks taken up so far. */
  n: number
}

const offsetSd = 0.7
const noiseSd = 0.12
const walk = 0.1
const far = 0.35
const gainSd = 0.3
const deadFeed = 0.03
const deadCoolantK = 0.5
const shareMean = 0.3
const shareSd = 0.25
const shareLeastSd = 0.08
const coldGain = 0.4

export const freshLevel = (): Level => ({
  c: 0,
  o: 0,
  b: 0,
  pcc: 1,
  pco: 0,
  poo: offsetSd * offsetSd,
  pcb: 0,
  pob: 0,
  pbb: 0,
  leastPbb: 0,
  n: 0,
})

/** Once c is known: how far the gain may be from it, and how much of a move of the coolant may not arrive where the mass share `foreign` is new to it. */
export function openGain(l: Level, foreign: number): void {
  l.poo += (gainSd * l.c) ** 2
  if (l.c < 0) l.o += (1 - coldGain) * l.c
  l.b = shareMean * foreign
  l.pbb = (shareSd * foreign) ** 2
  l.leastPbb = (shareLeastSd * foreign) ** 2
}

/** Opens c to whatever comes next, since what is normal has changed; o and b stay. */
export function reopen(l: Level): void {
  l.pcc = 1
  l.pco = l.pcb = 0
}

/** What the level explains at feed h and with the coolant v off its reference, K. */
export const explained = (l: { readonly c: number; readonly o: number; readonly b: number }, h: number, v: number): number =>
  l.c * h - l.o * (h - 1) - l.b * v

const beyond = (x: number, dead: number): number => (Math.abs(x) < dead ? 0 : x - Math.sign(x) * dead)

/** One block mean. `settling`: not yet armed, so c simply follows; nothing is an outlier yet. */
export function learn(l: Level, zK: number, h: number, v: number, blockS: number, settling: boolean): void {
  if (l.n === 0) l.c = zK
  l.n++
  l.pcc += settling ? 0.25 : (walk * walk * blockS) / 3600
  const ho = -beyond(h - 1, deadFeed)
  const hb = l.pbb === 0 ? 0 : -beyond(v, deadCoolantK)
  const off = zK - explained(l, h, v)
  const kc = l.pcc * h + l.pco * ho + l.pcb * hb
  const ko = l.pco * h + l.poo * ho + l.pob * hb
  const kb = l.pcb * h + l.pob * ho + l.pbb * hb
  const own = h * kc + ho * ko + hb * kb
  const ratio = settling ? 1 : Math.max(1, Math.abs(off) / Math.max(far, 2.5 * Math.sqrt(own)))
  const s = own + noiseSd * noiseSd * ratio ** 4
  l.c += (kc / s) * off
  l.o += (ko / s) * off
  l.b = Math.min(1, Math.max(0, l.b + (kb / s) * off))
  l.pcc -= (kc * kc) / s
  l.pco -= (kc * ko) / s
  l.poo -= (ko * ko) / s
  l.pcb -= (kc * kb) / s
  l.pob -= (ko * kb) / s
  l.pbb = Math.max(l.leastPbb, l.pbb - (kb * kb) / s)
}
