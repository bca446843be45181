import { describe, expect, it } from 'vitest'
import { zeroSuspect } from '../../../server/core/bank/verdicts.ts'
import { findingOf } from '../../../server/core/fouling/evidence.ts'
import { duo, type Happening, run, trio } from './world.ts'

/** Noise-free, and the noise of a usual pressure transmitter with the wander the model expects. */
const quiet: Happening = {}
const noisy = (seed: number): Happening => ({ noisePa: 300, wander: 0.0022, seed })
const worlds = [['noise-free', quiet], ...[1, 2, 3, 4].map((s) => [`seed ${s}`, noisy(s)] as const)] as const
const since = (k: number, from: number) => Math.max(0, k - from)

describe.each(worlds)('what the bank makes of a change: %s', (_, world) => {
  // FOU-08
  it('an end tap that drifts 10 mbar a minute: upwards nothing tells it from a deposit (within 2 nats), which is raised with the tap not excluded; downwards the tap is named', () => {
    const drift = (sign: number) =>
      run(duo, { ...world, tapPa: (t, k) => (t === 0 ? sign * 500 * Math.min(40, since(k, 150)) : 0) }, 240).happened
    const up = drift(1)[0]!.event
    expect(up).toMatchObject({ kind: 'deposit', segment: 0 })
    const tap = up.rivals.find((r) => r.kind === 'tap-ramp' && r.of === 0)!
    // A tap that no neighbour mirrors stands there less the six nats of its handicap.
    expect(Math.abs(up.likelihood - (tap.likelihood + 6))).toBeLessThan(2)
    expect(findingOf(duo, up).notExcluded.some((n) => n.includes('slow drift of PT-1'))).toBe(true)
    const down = drift(-1).map((x) => x.event)
    expect(down.some((e) => e.kind === 'instrument' && e.tag === 'PT-1')).toBe(true)
    expect(down.filter((e) => e.kind === 'deposit')).toEqual([])
  })

  it('a rise of 2 % in 10 min in S1 is a deposit in S1, found within 15 min of its begin and below 1.05', () => {
    const { happened } = run(duo, { ...world, lnR: (s, k) => (s === 0 ? 0.001 * since(k, 150) : 0) }, 200)
    const first = happened[0]!
    expect(first.event).toMatchObject({ kind: 'deposit', segment: 0 })
    expect(first.k).toBeGreaterThan(150)
    expect(first.k).toBeLessThanOrEqual(180)
    expect(0.001 * (first.k - 150)).toBeLessThan(Math.log(1.05))
    expect(happened.filter((x) => x.event.kind === 'deposit' && x.event.segment !== 0)).toEqual([])
  })

  it('10 mbar in a minute, up or down, mirrored at the shared tap PT-2 over 20 min is its drift and never a deposit', () => {
    for (const sign of [1, -1]) {
      const { happened, lnRatio } = run(
        duo,
        { ...world, tapPa: (t, k) => (t === 1 ? sign * 500 * Math.min(40, since(k, 150)) : 0) },
        240,
      )
      expect(happened.map((x) => x.event.kind)).not.toContain('deposit')
      expect(happened.map((x) => x.event.kind)).not.toContain('blockage')
      const instrument = happened.find((x) => x.event.kind === 'instrument')!
      expect(instrument.event).toMatchObject({ tag: 'PT-2', neighbours: true })
      expect(Math.abs(lnRatio[0]!)).toBeLessThan(0.02)
    }
  })

  it('a jump of 60 mbar at PT-2 is its zero and no drift, with the size within 10 mbar where a birth meets it and 20 mbar where it falls between two', () => {
    for (const [from, within] of [
      [151, 1000],
      [150, 2000],
    ] as const) {
      // biome-ignore format: a table
      const { happened } = run(duo, { ...world, tapPa: (t, k) => (t === 1 && k >= from ? 6000 : 0) }, 200)
      const { event } = happened[0]!
      expect(event).toMatchObject({ kind: 'instrument', tag: 'PT-2', neighbours: true, ramp: false })
      expect(Math.abs((event as { sizePa: number }).sizePa - 6000)).toBeLessThan(within)
      expect(happened).toHaveLength(1)
    }
  })

  it('a liquid 6 % more viscous is a change of stream A, and no segment’s', () => {
    const { happened } = run(duo, { ...world, lnVisc: (_s, k) => (k >= 150 ? 0.06 : 0) }, 200)
    expect(happened[0]!.event).toMatchObject({ kind: 'stream', stream: 0 })
    expect(Math.abs((happened[0]!.event as { size: number }).size - 0.06)).toBeLessThan(0.012)
    expect(happened.map((x) => x.event.kind)).not.toContain('deposit')
    expect(findingOf(duo, happened[0]!.event).cause).toBe('composition')
  })

  it('a lone rise of 20 % at once in the interior S2 is a blockage there, with 18 to 22 % as its size', () => {
    const { happened } = run(trio, { ...world, lnR: (s, k) => (s === 1 && k >= 150 ? Math.log(1.2) : 0) }, 200)
    expect(happened[0]!.event).toMatchObject({ kind: 'blockage', segment: 1 })
    expect(Math.expm1((happened[0]!.event as { size: number }).size)).toBeCloseTo(0.2, 1)
    expect(findingOf(trio, happened[0]!.event).cause).toBe('blockage')
    expect(happened).toHaveLength(1)
  })

  it('a lone rise of 6 % in S1, whose inlet tap nothing else checks, names PT-1 and does not exclude a true step', () => {
    const { happened } = run(duo, { ...world, lnR: (s, k) => (s === 0 && k >= 150 ? Math.log(1.06) : 0) }, 210)
    const { event } = happened[0]!
    expect(event).toMatchObject({ kind: 'instrument', tag: 'PT-1', neighbours: false, ramp: false })
    expect((event as { sizePa: number }).sizePa).toBeGreaterThan(0)
    const finding = findingOf(duo, event)
    expect(finding.cause).toBe('sensor')
    expect(finding.notExcluded).toContain('a true step of resistance in S1')
  })

  it('a flow 20 % lower whose exponent is 0.15 off raises nothing: what is found of it began with the move', () => {
    const { happened } = run(trio, { ...world, exponentError: 0.15, lnFlow: (k) => (k >= 150 ? Math.log(0.8) : 0) }, 260)
    for (const { event } of happened) {
      expect(['step', 'stream']).toContain(event.kind)
      expect(event.nearMove).toBe(true)
    }
  })

  it('two flow steps teach the exponent: the second of the same size moves the ratio by less than 0.5 %', () => {
    const { lnRatio } = run(
      trio,
      { ...world, exponentError: 0.15, lnFlow: (k) => (k >= 120 && k < 200 ? Math.log(0.8) : k >= 260 ? Math.log(0.8) : 0) },
      300,
    )
    for (const r of lnRatio) expect(Math.abs(r!)).toBeLessThan(0.009)
  })
})

describe('what an instrument can be blamed for', () => {
  it('an end tap of 25 bar span for up to 0.25 bar, 1 % of it; a shared tap never: its other neighbour would show it', () => {
    expect(zeroSuspect(duo, 0, 24_900)).toEqual({ tag: 'PT-1', sizePa: 24_900 })
    expect(zeroSuspect(duo, 0, 25_100)).toBeNull()
    expect(zeroSuspect(duo, 1, 10_000)).toEqual({ tag: 'PT-3', sizePa: -10_000 })
    expect(zeroSuspect(trio, 1, 10_000)).toBeNull()
  })
})

describe('the evidence beside a verdict', () => {
  it('of a deposit next to an end tap names each rival as excluded or not, and never excludes a slow drift of that tap', () => {
    const { happened } = run(duo, { ...noisy(7), lnR: (s, k) => (s === 0 ? 0.002 * since(k, 150) : 0) }, 190)
    const { event } = happened[0]!
    expect(event.kind).toBe('deposit')
    const f = findingOf(duo, event)
    expect(f.notExcluded).toContain('slow drift of PT-1, which no other segment checks')
    const named = [...f.against, ...f.notExcluded].join('; ')
    for (const rival of ['a single step in S1', 'zero of PT-1 off', 'zero of PT-2 off', 'stream A']) expect(named).toContain(rival)
  })
})

describe('a deposit that is found', () => {
  it('leaves the filter: its later growth to 2.0 moves neither the neighbour’s ratio nor the clean level by 1 %', () => {
    const { bank, lnRatio, happened } = run(
      duo,
      { ...noisy(3), lnR: (s, k) => (s === 0 ? Math.min(Math.LN2, 0.004 * since(k, 150)) : 0) },
      420,
    )
    expect(happened.map((x) => x.event.kind)).toEqual(['deposit'])
    expect(bank.isFouled(0)).toBe(true)
    expect(lnRatio[0]!).toBeCloseTo(Math.LN2, 1)
    expect(Math.abs(lnRatio[1]!)).toBeLessThan(0.01)
    expect(Math.abs(bank.level(0))).toBeLessThan(0.01)
  })

  it('two deposits at once are both found, each in its segment', () => {
    const { happened } = run(
      trio,
      { ...noisy(5), lnR: (s, k) => (s === 0 ? 0.002 * since(k, 150) : s === 2 ? 0.003 * since(k, 170) : 0) },
      230,
    )
    expect(
      happened
        .filter((x) => x.event.kind === 'deposit')
        .map((x) => (x.event as { segment: number }).segment)
        .sort(),
    ).toEqual([0, 2])
  })

  it('one bad step of +30 % in an hour of clean running is no news', () => {
    const { happened } = run(trio, { ...noisy(6), lnR: (s, k) => (s === 1 && k === 150 ? 0.3 : 0) }, 220)
    expect(happened).toEqual([])
  })
})
