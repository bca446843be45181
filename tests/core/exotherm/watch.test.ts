import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { ExothermVerdict, ReactorScan } from '../../../server/core/exotherm/types.ts'
import { createExothermWatch } from '../../../server/core/exotherm/watch.ts'
import { twoReactors, type WorldOptions, world } from './world.ts'

interface Seen {
  tS: number
  verdict: ExothermVerdict
}
/** First over of every spell (a spell ends after 60 s not over), by reactor. */
function spells(
  o: WorldOptions,
  change: (k: number, s: [ReactorScan, ReactorScan]) => readonly ReactorScan[] | null = (_k, s) => s,
) {
  const watch = createExothermWatch(twoReactors(o.scanS))
  const found: [Seen[], Seen[]] = [[], []]
  const last = [-1e9, -1e9]
  let coldS: number | null = null
  const at: ExothermVerdict[] = []
  world(o).forEach(({ tMs, scans }, k) => {
    const given = change(k, scans)
    if (given === null) return
    watch.scan(tMs, given).forEach((verdict, i) => {
      const tS = k * o.scanS
      if (i === 0) at[k] = verdict
      if (verdict.cold) coldS ??= tS
      if (verdict.over !== true) return
      if (tS - last[i]! > 60) found[i]!.push({ tS, verdict })
      last[i] = tS
    })
  })
  return { found, all: [...found[0], ...found[1]], coldS, at }
}
const pulse =
  (atS: number, highK: number, riseS: number, holdS = 60) =>
  (tS: number) =>
    tS < atS
      ? 0
      : tS < atS + riseS + holdS
        ? Math.min(highK, (highK * (tS - atS)) / riseS)
        : highK * Math.exp(-(tS - atS - riseS - holdS) / 60)

describe('excursions on two cooled reactors, 0.1 K noise, 0.2 K wobble of the coolant, 95 s wall lag', () => {
  it('finds an ignition of 10 K in 8 s within 5 s, dates its start to within 5 s, and 15 s later names the thermocouple where it is hottest', () => {
    for (const seed of [1, 2, 3, 4]) {
      const { found, at } = spells({ scanS: 1, hours: 1, seed, extraK: pulse(2400, 10, 8) })
      const first = found[0][0]!
      expect([at[2415]!.hottest, at[2415]!.hotSpot]).toEqual([1, 1])
      expect(first.tS - 2400).toBeGreaterThanOrEqual(0)
      expect(first.tS - 2400).toBeLessThanOrEqual(5)
      expect(Math.abs(first.verdict.startMs! - (1_900_000_000_000 + 2400e3))).toBeLessThanOrEqual(5000)
      expect(first.verdict.cause).toBe('reaction')
    }
  })
  it('finds a hot spot walking in at 1 K a minute within 60 s', () => {
    for (const seed of [1, 2, 3, 4]) {
      const { found } = spells({ scanS: 1, hours: 1, seed, extraK: pulse(2400, 5, 300) })
      expect(found[0][0]!.tS - 2400).toBeGreaterThan(0)
      expect(found[0][0]!.tS - 2400).toBeLessThanOrEqual(60)
    }
  })
  it('is quiet over flow steps of ±15 % and coolant steps of ±4 K in 12 h of clean running', () => {
    const flowSteps: [number, number][] = [
      [4000, 1.15],
      [7000, 1 / 1.15],
      [9000, 0.85],
    ]
    const coolantSteps: [number, number][] = [
      [5500, 4],
      [8000, -4],
    ]
    for (const seed of [11, 12, 13, 14]) expect(spells({ scanS: 1, hours: 3, seed, flowSteps, coolantSteps }).all).toEqual([])
  })
  it('keeps its seconds at other scans: 10 K in 8 s found within 4 s at 0.1 s, 15 s at 5 s, and two scans at 60 s', () => {
    for (const [scanS, withinS, hours] of [
      [0.1, 4, 0.4],
      [5, 15, 1],
      [60, 120, 6],
    ] as const) {
      const at = hours * 2400
      const { found } = spells({ scanS, hours, seed: 5, extraK: pulse(at, 10, 8, 600) })
      expect(found[0].length).toBe(1)
      expect(found[0][0]!.tS - at).toBeGreaterThanOrEqual(0)
      expect(found[0][0]!.tS - at).toBeLessThanOrEqual(withinS)
    }
  })
  it('one scan 3 K too high on one thermocouple raises nothing at 0.1 s, 1 s, 5 s or 60 s', () => {
    for (const scanS of [0.1, 1, 5, 60]) {
      const at = Math.round(2400 / scanS)
      const spike = (k: number, s: [ReactorScan, ReactorScan]): ReactorScan[] =>
        k === at ? [{ ...s[0], tempsC: [s[0].tempsC[0]! + 3, ...s[0].tempsC.slice(1)] }, s[1]] : s
      expect(spells({ scanS, hours: scanS < 1 ? 0.7 : 1.2, seed: 6 }, spike).all).toEqual([])
    }
  })
  // EXO-09
  it('flags a cold excursion of 3 K in 2 min as cold, not as an excess', () => {
    const { all, coldS } = spells({ scanS: 1, hours: 1, seed: 7, extraK: (t) => -pulse(2000, 3, 120, 300)(t) })
    expect(coldS! - 2000).toBeGreaterThan(0)
    expect(coldS! - 2000).toBeLessThan(120)
    expect(all.filter((s) => s.tS < 2420)).toEqual([])
  })
})

describe('what is missing', () => {
  it('a flow step of 14 % inside a gap of 10 min raises nothing, whether scans come empty or not at all', () => {
    const empty = (s: ReactorScan): ReactorScan => ({
      ...s,
      tempsC: s.tempsC.map(() => null),
      coolantC: null,
      flowsKgS: [null, null],
    })
    for (const how of ['empty', 'none'] as const) {
      for (const seed of [21, 22, 23]) {
        const gone = (k: number, s: [ReactorScan, ReactorScan]) =>
          k < 4000 || k >= 4600 ? s : how === 'none' ? null : s.map(empty)
        expect(spells({ scanS: 1, hours: 1.5, seed, flowSteps: [[4550, 1.14]], coolantSteps: [[4100, 2]] }, gone).all).toEqual([])
      }
    }
  })
  it('a flow step of 25 % whose first three readings, 5 s apart, are not believed raises nothing, nor does a feed that is not read for 5 min', () => {
    const unread = (from: number, n: number) => (k: number, s: [ReactorScan, ReactorScan]) =>
      k <= from || k > from + n ? s : s.map((r) => ({ ...r, flowsKgS: [null, null] }))
    for (const seed of [24, 25, 26, 27]) {
      expect(spells({ scanS: 5, hours: 1.5, seed, flowSteps: [[3600, 1.25]], quickS: 8 }, unread(720, 3)).all).toEqual([])
      expect(spells({ scanS: 5, hours: 1.5, seed }, unread(720, 60)).all).toEqual([])
    }
  })
  it('goes on with the thermocouples that are left, and says nothing when none is', () => {
    const lost = (n: number) => (k: number, s: [ReactorScan, ReactorScan]) =>
      k < 1500 ? s : [{ ...s[0], tempsC: s[0].tempsC.map((t, j) => (j < n ? null : t)) }, s[1]]
    expect(spells({ scanS: 1, hours: 1, seed: 8, extraK: pulse(2400, 10, 8) }, lost(2)).found[0][0]!.tS - 2400).toBeLessThanOrEqual(
      6,
    )
    const watch = createExothermWatch(twoReactors(1))
    const last = world({ scanS: 1, hours: 0.5, seed: 8 })
      .map(({ tMs, scans }, k) => watch.scan(tMs, lost(3)(k, scans)))
      .at(-1)!
    expect([last[0]!.over, last[0]!.excessC, last[0]!.hottest]).toEqual([null, null, null])
    expect(last[1]!.over).toBe(false)
  })
  it('a coolant reading lost for good still lets a 10 K ignition be found, and raises nothing by itself', () => {
    const blind = (k: number, s: [ReactorScan, ReactorScan]) => (k < 1200 ? s : s.map((r) => ({ ...r, coolantC: null })))
    const { found } = spells({ scanS: 1, hours: 1, seed: 9, extraK: pulse(2400, 10, 8) }, blind)
    expect(found[0].map((s) => s.tS - 2400).every((t) => t >= 0 && t < 10)).toBe(true)
    expect(found[0]).toHaveLength(1)
  })
  it('a coolant reading that spikes by 6 K every 17 s raises nothing, and a 10 K ignition is still found within 6 s', () => {
    const spiky = (k: number, s: [ReactorScan, ReactorScan]) =>
      k < 900 || k % 17 > 1 ? s : s.map((r) => ({ ...r, coolantC: r.coolantC! + (k % 3 === 0 ? 6 : -6) }))
    for (const seed of [41, 42]) {
      const { found } = spells({ scanS: 1, hours: 1, seed, extraK: pulse(2400, 10, 8) }, spiky)
      expect(found[0]).toHaveLength(1)
      expect(found[0][0]!.tS - 2400).toBeGreaterThanOrEqual(0)
      expect(found[0][0]!.tS - 2400).toBeLessThanOrEqual(6)
    }
  })
  it('without a coolant thermocouple: an inlet that brings 15 K along is no excursion, a rise of 5 K past it is', () => {
    const run = (extra: number) => {
      const watch = createExothermWatch({ scanS: 1, reactors: [{ segment: 'R1', thermocouples: 2, coolant: null, streams: 1 }] })
      let first: number | null = null
      for (let t = 0; t < 3600; t++) {
        const inlet = 20 + 15 * Math.min(1, Math.max(0, (t - 1800) / 20))
        const outlet = 21 + 15 * Math.min(1, Math.max(0, (t - 1870) / 40)) + (t > 3000 ? Math.min(extra, (t - 3000) / 4) : 0)
        const wave = 0.03 * Math.sin(t * 2.1)
        const v = watch.scan(t * 1000, [
          { tempsC: [inlet + wave, outlet - wave], coolantC: null, flowsKgS: [0.001], production: true, armed: t > 300 },
        ])
        if (v[0]!.over === true) first ??= t
      }
      return first
    }
    expect(run(0)).toBe(null)
    const found = run(5)!
    expect(found).toBeGreaterThan(3000)
    expect(found).toBeLessThan(3020)
  })
  it('not armed or not in production: no verdict', () => {
    const off = (_k: number, s: [ReactorScan, ReactorScan]) => s.map((r) => ({ ...r, armed: false }))
    expect(spells({ scanS: 1, hours: 0.5, seed: 3, extraK: pulse(900, 10, 8) }, off).all).toEqual([])
    const stopped = (_k: number, s: [ReactorScan, ReactorScan]) => s.map((r) => ({ ...r, production: false }))
    expect(spells({ scanS: 1, hours: 0.5, seed: 3, extraK: pulse(900, 10, 8) }, stopped).all).toEqual([])
  })
})

describe('causes', () => {
  it('says dosing when the feed ratio is high, coolant when both reactors of a circuit warm together, flow when the feed has moved', () => {
    const dosing = (_k: number, s: [ReactorScan, ReactorScan]) => s.map((r) => ({ ...r, ratioHigh: true }))
    expect(spells({ scanS: 1, hours: 1, seed: 3, extraK: pulse(2400, 6, 40) }, dosing).found[0][0]!.verdict.cause).toBe('dosing')
    const both = (k: number, s: [ReactorScan, ReactorScan]) => {
      const by = Math.max(0, (k - 2400) / 60)
      return s.map((r) => ({ ...r, tempsC: r.tempsC.map((t) => t! + by) }))
    }
    expect(spells({ scanS: 1, hours: 0.8, seed: 3 }, both).all[0]!.verdict.cause).toBe('coolant')
    expect(
      spells({ scanS: 1, hours: 1, seed: 3, flowSteps: [[2390, 0.8]], extraK: pulse(2400, 10, 8) }).found[0][0]!.verdict.cause,
    ).toBe('flow')
  })
})

describe('state', () => {
  const rows = world({ scanS: 5, hours: 1.5, seed: 31, flowSteps: [[2000, 1.1]], extraK: pulse(3000, 6, 60) })
  it('goes on from JSON as if nothing had happened, wherever it is cut; so nothing later than a scan speaks in it', () => {
    const whole = createExothermWatch(twoReactors(5))
    const verdicts = rows.map(({ tMs, scans }) => JSON.stringify(whole.scan(tMs, scans)))
    expect(verdicts.some((v) => v.includes('"over":true'))).toBe(true)
    fc.assert(
      fc.property(fc.integer({ min: 1, max: rows.length - 1 }), (cut) => {
        const first = createExothermWatch(twoReactors(5))
        for (const { tMs, scans } of rows.slice(0, cut)) first.scan(tMs, scans)
        const second = createExothermWatch(twoReactors(5), JSON.parse(JSON.stringify(first.state)))
        expect(rows.slice(cut).map(({ tMs, scans }) => JSON.stringify(second.scan(tMs, scans)))).toEqual(verdicts.slice(cut))
      }),
      { numRuns: 12 },
    )
  })
  it('holds finite numbers only and does not grow, whatever is missing', () => {
    const maybe = (base: number) => fc.option(fc.double({ min: base - 5, max: base + 5, noNaN: true }), { freq: 3 })
    const scan = fc.record({
      dtS: fc.constantFrom(1, 1, 1, 30, 2000),
      temps: fc.array(maybe(-25), { minLength: 5, maxLength: 5 }),
      coolantC: maybe(-30),
      flows: fc.array(fc.option(fc.double({ min: 0, max: 0.003, noNaN: true })), { minLength: 2, maxLength: 2 }),
      production: fc.boolean(),
      armed: fc.boolean(),
    })
    fc.assert(
      fc.property(fc.array(scan, { minLength: 50, maxLength: 150 }), (scans) => {
        const watch = createExothermWatch(twoReactors(1))
        const shape = (v: unknown): string =>
          v !== null && typeof v === 'object' ? `{${Object.entries(v).map(([k, x]) => `${k}${shape(x)}`)}}` : ''
        const before = shape(watch.state)
        let tMs = 0
        for (const s of scans) {
          tMs += s.dtS * 1000
          const one = (tempsC: (number | null)[]) => ({
            tempsC,
            coolantC: s.coolantC,
            flowsKgS: s.flows,
            production: s.production,
            armed: s.armed,
          })
          for (const v of watch.scan(tMs, [one(s.temps.slice(0, 3)), one(s.temps.slice(3))])) {
            for (const x of Object.values(v)) if (typeof x === 'number') expect(Number.isFinite(x)).toBe(true)
          }
        }
        expect(shape(watch.state)).toBe(before)
        JSON.stringify(watch.state, (_k, x) => {
          if (typeof x === 'number' && !Number.isFinite(x)) throw new Error('not finite')
          return x
        })
      }),
      { numRuns: 60 },
    )
  })
})
