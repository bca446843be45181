import { describe, expect, it } from 'vitest'
import { createExothermWatch } from '../../../server/core/exotherm/watch.ts'
import { gauss, random } from './world.ts'

interface Moves {
  readonly seed: number
  readonly hours: number
  /** Steps of the coolant's set-point, K over 3 min, and of all feeds, at seconds. */
  readonly coolant?: readonly [tS: number, byK: number][]
  readonly feed?: readonly [tS: number, factor: number][]
  readonly extraK?: (tS: number) => number
}

/**
 * A quench at +20 °C that takes in two cold streams of −15 °C and one, half of the whole, straight from a drum at 20 °C. Plug flow along a wall:
 * T = Tw + (Tin − Tw) e^(−NTU x), NTU = 1.6 h^−0.7 at x = 0.2 and 0.8, heat of 2 K in proportion to the feed; the wall 80 s behind the coolant.
 * The cold streams come by 6 K warmer when the feed doubles, having had less time to cool.
 */
function verdicts(m: Moves, foreign: readonly boolean[] | null) {
  const u = random(m.seed)
  const watch = createExothermWatch({
    scanS: 1,
    reactors: [
      { segment: 'Q1', thermocouples: 2, coolant: 'TT-191', streams: 3, limiting: 0, ...(foreign === null ? {} : { foreign }) },
    ],
  })
  const phase = 6 * u()
  let wall = 20
  let h = 1
  const over: number[] = []
  for (let tS = 0; tS < m.hours * 3600; tS++) {
    let coolant = 20 + 0.15 * Math.sin(tS / 70 + phase)
    let cold = -15
    for (const [at, by] of m.coolant ?? []) {
      const moved = by * Math.min(1, Math.max(0, (tS - at) / 180))
      coolant += moved
      cold += moved
    }
    let want = 1
    for (const [at, factor] of m.feed ?? []) if (tS >= at) want *= factor
    h += (want - h) / 20
    wall += (coolant - wall) / 80
    const inlet = 0.5 * (cold + 6 * (h - 1)) + 0.5 * 20
    const tempsC = [0.2, 0.8].map(
      (x) =>
        Math.round(
          10 *
            (wall +
              (inlet - wall) * Math.exp(-1.6 * h ** -0.7 * x) +
              2 * h * Math.min(1, 2 * x) +
              (m.extraK?.(tS) ?? 0) * x +
              0.1 * gauss(u)),
        ) / 10,
    )
    const flow = (kgS: number) => kgS * h * (1 + 0.004 * gauss(u))
    const [v] = watch.scan(1_900_000_000_000 + tS * 1000, [
      {
        tempsC,
        coolantC: coolant + 0.05 * gauss(u),
        flowsKgS: [flow(0.0015), flow(0.001), flow(0.0025)],
        production: true,
        armed: tS >= 300,
      },
    ])
    if (v!.over === true) over.push(tS)
  }
  return over
}
const known = [false, false, true]

describe('a quench that takes in a stream straight from its drum', () => {
  it('coolant steps of ±4 K, which its thermocouples follow by 0.4 to 0.7, raise nothing in 12 h', () => {
    const coolant: [number, number][] = [
      [3600, -4],
      [7000, 4],
    ]
    for (const seed of [1, 2, 3, 4]) expect(verdicts({ seed, hours: 3, coolant }, known)).toEqual([])
  })
  it('flow steps of ±20 %, under which a fluid colder than its coolant does not grow colder in proportion, raise nothing in 12 h', () => {
    const feed: [number, number][] = [
      [3600, 1.2],
      [6000, 1 / 1.2],
      [8000, 0.8],
    ]
    for (const seed of [5, 6, 7, 8]) expect(verdicts({ seed, hours: 3, feed }, known)).toEqual([])
  })
  it('an ignition of 10 K in 8 s is still found within 5 s before any step, and within 10 s an hour after a coolant step of −4 K', () => {
    const pulse = (at: number) => (t: number) => (t < at ? 0 : Math.min(10, (10 * (t - at)) / 8))
    const before = verdicts({ seed: 9, hours: 0.8, extraK: pulse(2400) }, known)
    expect(before[0]! - 2400).toBeGreaterThan(0)
    expect(before[0]! - 2400).toBeLessThanOrEqual(5)
    const after = verdicts({ seed: 9, hours: 2.2, coolant: [[3600, -4]], extraK: pulse(7200) }, known)
    expect(after[0]! - 7200).toBeGreaterThan(0)
    expect(after[0]! - 7200).toBeLessThanOrEqual(10)
  })
  it('where nobody said that a stream comes straight from a drum, an excess that stays as it is after a coolant step clears within 25 min', () => {
    const over = verdicts({ seed: 3, hours: 2.5, coolant: [[3600, -4]] }, null)
    expect(over.length).toBeGreaterThan(0)
    expect(over.at(-1)! - 3600).toBeLessThan(1500)
  })
  it('an excess of 3 K that comes without a move of coolant or feed is not taken for normal: it stands for two hours', () => {
    const over = verdicts({ seed: 4, hours: 3, extraK: (t) => (t < 3600 ? 0 : 6) }, known)
    expect(over.at(-1)).toBe(3 * 3600 - 1)
  })
})
