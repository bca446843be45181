import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { createBank } from '../../../server/core/bank/bank.ts'
import { createFilter, type FilterState } from '../../../server/core/bank/filter.ts'
import { disturbances as d, type Row, rowOf, type SegmentObservation, stateMap } from '../../../server/core/bank/model.ts'
import { randomOf } from '../../../server/core/sim/random.ts'
import { duo, observer, trio } from './world.ts'

type Matrix = number[][]
const zeros = (n: number, m = n): Matrix => Array.from({ length: n }, () => new Array<number>(m).fill(0))
const times = (a: Matrix, b: Matrix): Matrix => a.map((row) => b[0]!.map((_, j) => row.reduce((s, v, k) => s + v * b[k]![j]!, 0)))
const turned = (a: Matrix): Matrix => a[0]!.map((_, j) => a.map((row) => row[j]!))
const plus = (a: Matrix, b: Matrix, f = 1): Matrix => a.map((row, i) => row.map((v, j) => v + f * b[i]![j]!))

/** Gauss-Jordan with row exchange: the inverse and ln |det| of a positive definite matrix. */
function inverse(a: Matrix): { inverse: Matrix; lnDet: number } {
  const n = a.length
  const m = a.map((row, i) => [...row, ...row.map((_, j) => (i === j ? 1 : 0))])
  let lnDet = 0
  for (let c = 0; c < n; c++) {
    let top = c
    for (let i = c; i < n; i++) if (Math.abs(m[i]![c]!) > Math.abs(m[top]![c]!)) top = i
    ;[m[c], m[top]] = [m[top]!, m[c]!]
    const pivot = m[c]![c]!
    lnDet += Math.log(Math.abs(pivot))
    m[c] = m[c]!.map((v) => v / pivot)
    for (let i = 0; i < n; i++) if (i !== c) m[i] = m[i]!.map((v, j) => v - m[i]![c]! * m[c]![j]!)
  }
  return { inverse: m.map((row) => row.slice(n)), lnDet }
}

const map = stateMap(duo)
const n = map.size
const filter = createFilter(duo, map)
const tapStart = [7e5, 5e5, 3e5]
const full = (row: Row): number[] => {
  const h = new Array<number>(n).fill(0)
  row.index.forEach((k, i) => {
    h[k]! += row.value[i]!
  })
  return h
}
const observation = (over: Partial<SegmentObservation> = {}): SegmentObservation => ({
  y: 0.02,
  dpPa: 2e5,
  lnFlow: 0,
  lnVisc: 0,
  n0: 1.2,
  k0: 0.8,
  share: [1],
  tapPa: tapStart,
  profileSpreadK: 0,
  stepVar: 1e-6,
  ...over,
})
const started = (): FilterState => {
  const f = filter.fresh()
  filter.startSegment(f, 0, observation())
  filter.startSegment(f, 1, observation({ y: -0.01, dpPa: 1.5e5 }))
  return f
}
const matrixOf = (f: FilterState): Matrix => Array.from({ length: n }, (_, i) => Array.from(f.p.slice(i * n, (i + 1) * n)))

describe('one scalar measurement after the other', () => {
  it('gives the state and covariance of the joint update x + K(y − Hx), P − KHP to 1e-9, over random steps', () => {
    const one = fc.record({
      y: fc.tuple(fc.double({ min: -0.1, max: 0.1, noNaN: true }), fc.double({ min: -0.1, max: 0.1, noNaN: true })),
      flow: fc.double({ min: -0.2, max: 0.2, noNaN: true }),
      visc: fc.double({ min: -0.2, max: 0.2, noNaN: true }),
      tap: fc.double({ min: -5e4, max: 5e4, noNaN: true }),
    })
    fc.assert(
      fc.property(fc.array(one, { minLength: 1, maxLength: 8 }), (list) => {
        const f = started()
        let x: Matrix = Array.from(f.x, (v) => [v])
        let p = matrixOf(f)
        for (const m of list) {
          const rows = [0, 1].map((s) =>
            rowOf(duo, map, s, observation({ lnFlow: m.flow, lnVisc: m.visc, tapPa: [7e5 + m.tap, 5e5, 3e5 - m.tap] }), tapStart),
          )
          const noise = [2e-5, 3e-5]
          const h = rows.map(full)
          const ph = times(p, turned(h))
          const gain = times(ph, inverse(plus(times(h, ph), [[noise[0]!, 0], [0, noise[1]!]])).inverse) // biome-ignore format: a matrix
          x = plus(x, times(gain, plus([[m.y[0]], [m.y[1]]], times(h, x), -1)))
          p = plus(p, times(gain, turned(ph)), -1)
          rows.forEach((row, s) => {
            filter.update(f, row, m.y[s]!, noise[s]!)
          })
          for (let i = 0; i < n; i++) {
            expect(Math.abs(f.x[i]! - x[i]![0]!)).toBeLessThan(1e-9 * Math.max(1, Math.abs(x[i]![0]!)))
            for (let j = 0; j < n; j++)
              expect(Math.abs(f.p[i * n + j]! - p[i]![j]!)).toBeLessThan(1e-9 * Math.max(1, Math.sqrt(p[i]![i]! * p[j]![j]!)))
          }
        }
      }),
      { numRuns: 40, seed: 21 },
    )
  })

  it('walks as its disturbances say: Σ(ln S + r²/S) over 60 steps is that of one batch covariance with exp(−Δt/τ) and min(t, t′)', () => {
    const r = randomOf(4, 'batch')
    const f = started()
    const prior = Array.from(f.x)
    const p0 = matrixOf(f)
    const hours = 1 / 120
    const ys: number[] = []
    const hs: number[][] = []
    const steps: number[] = []
    const segs: number[] = []
    let filtered = 0
    for (let k = 1; k <= 30; k++) {
      filter.advance(f, hours, [2e5, 2e5], [false, true, false])
      for (const s of [0, 1]) {
        const row = rowOf(
          duo,
          map,
          s,
          observation({ lnFlow: 0.1 * Math.sin(k), lnVisc: 0.05 * Math.cos(k), tapPa: [7e5 + 900 * k, 5e5, 3e5] }),
          tapStart,
        )
        const y = 0.005 * r.normal() + (s === 0 ? 0.02 : -0.01)
        const u = filter.update(f, row, y, 1e-5)
        filtered += Math.log(u.variance) + u.innovation ** 2 / u.variance
        ys.push(y)
        hs.push(full(row))
        steps.push(k)
        segs.push(s)
      }
    }
    // Prior covariance of every state at step a with every state at step b, written down from the definition of each disturbance.
    const wander2 = d.wander ** 2 + (d.wanderPa / 2e5) ** 2
    const decayed = (i: number): { tau: number; sd2: number } | null =>
      [0, 1].some((s) => map.wander(s) === i) ? { tau: d.wanderTauH, sd2: wander2 } : map.meter.includes(i) ? { tau: d.meterTauH, sd2: d.meter ** 2 } : null // biome-ignore format: one line
    const walk = (i: number): number =>
      [0, 1].some((s) => map.level(s) === i) ? d.levelWalk ** 2 : map.visc.includes(i) ? d.viscosityWalk ** 2 : map.tapZero.includes(i) ? d.tapDriftingWalkPa ** 2 : 0 // biome-ignore format: one line
    const cov = (i: number, a: number, j: number, b: number): number => {
      const fade = (q: number, k: number) => Math.exp(-(k * hours) / (decayed(q)?.tau ?? Number.POSITIVE_INFINITY))
      const from0 = p0[i]![j]! * fade(i, a) * fade(j, b)
      if (i !== j) return from0
      const e = decayed(i)
      const low = Math.min(a, b)
      return (
        from0 +
        (e === null
          ? walk(i) * low * hours
          : e.sd2 * Math.exp((-Math.abs(a - b) * hours) / e.tau) * (1 - Math.exp((-2 * low * hours) / e.tau)))
      )
    }
    const big = zeros(ys.length)
    for (let a = 0; a < ys.length; a++)
      for (let b = 0; b < ys.length; b++) {
        let v = a === b ? 1e-5 : 0
        for (let i = 0; i < n; i++)
          if (hs[a]![i] !== 0)
            for (let j = 0; j < n; j++) if (hs[b]![j] !== 0) v += hs[a]![i]! * hs[b]![j]! * cov(i, steps[a]!, j, steps[b]!)
        big[a]![b] = v
      }
    const { inverse: inv, lnDet } = inverse(big)
    const e = ys.map((y, a) => y - hs[a]!.reduce((s, v, i) => s + v * prior[i]!, 0))
    const batch = lnDet + e.reduce((s, v, a) => s + v * e.reduce((q, w, b) => q + inv[a]![b]! * w, 0), 0)
    expect(segs.length).toBe(60)
    expect(filtered).toBeCloseTo(batch, 6)
  })

  it('without any walk gives the batch least squares with the same prior: x₀ + P₀Hᵀ(HP₀Hᵀ + R)⁻¹(y − Hx₀) to 1e-9', () => {
    const r = randomOf(9, 'least squares')
    const f = started()
    const x0: Matrix = Array.from(f.x, (v) => [v])
    const p0 = matrixOf(f)
    const h: Matrix = []
    const y: Matrix = []
    for (let k = 0; k < 20; k++) {
      const row = rowOf(duo, map, k % 2, observation({ lnFlow: 0.3 * r.normal(), lnVisc: 0.3 * r.normal() }), tapStart)
      const v = 0.05 * r.normal()
      filter.update(f, row, v, 4e-6)
      h.push(full(row))
      y.push([v])
    }
    const ph = times(p0, turned(h))
    const s = plus(
      times(h, ph),
      h.map((_, i) => h.map((_, j) => (i === j ? 4e-6 : 0))),
    )
    const x = plus(x0, times(times(ph, inverse(s).inverse), plus(y, times(h, x0), -1)))
    for (let i = 0; i < n; i++) expect(Math.abs(f.x[i]! - x[i]![0]!)).toBeLessThan(1e-9)
  })
})

describe('a clean constant segment', () => {
  it('leaves innovations that are white and of unit variance over 40 h, and a level within 3 sd of the true one', () => {
    const f = started()
    const r = randomOf(3, 'clean')
    const white = 0.002
    const wander2 = d.wander ** 2 + (d.wanderPa / 2e5) ** 2
    const phi = Math.exp(-1 / 120 / d.wanderTauH)
    let w = Math.sqrt(wander2) * r.normal()
    const z: number[] = []
    for (let k = 0; k < 4800; k++) {
      filter.advance(f, 1 / 120, [2e5, 2e5], [false, false, false])
      w = phi * w + Math.sqrt(wander2 * (1 - phi * phi)) * r.normal()
      const u = filter.update(f, rowOf(duo, map, 0, observation(), tapStart), 0.05 + w + white * r.normal(), white ** 2)
      if (k >= 20) z.push(u.innovation / Math.sqrt(u.variance))
    }
    const mean = z.reduce((a, b) => a + b, 0) / z.length
    const variance = z.reduce((a, b) => a + b * b, 0) / z.length
    expect(Math.abs(mean)).toBeLessThan(3 / Math.sqrt(z.length))
    // The model allows for slow walks that this clean run does not make, so a little below 1 is right.
    expect(variance).toBeGreaterThan(0.93)
    expect(variance).toBeLessThan(1.05)
    for (const lag of [1, 2, 5, 20]) {
      const c = z.slice(lag).reduce((a, b, i) => a + b * z[i]!, 0) / z.length / variance
      expect(Math.abs(c), `lag ${lag}`).toBeLessThan(3 / Math.sqrt(z.length))
    }
    const sd = Math.sqrt(f.p[map.level(0) * n + map.level(0)]!)
    expect(sd).toBeLessThan(0.005)
    expect(Math.abs(f.x[map.level(0)]! - 0.05)).toBeLessThan(3 * sd)
  })

  it('teaches the bank its white noise within 25 % in 2 h, raises nothing in 12 h, and its levels stay within 0.5 % of the true ones from half an hour on', () => {
    const at = observer(duo, { noisePa: 400, wander: 0.0022, seed: 5 })
    const bank = createBank(duo, 30_000)
    const events: unknown[] = []
    let worst = 0
    for (let k = 0; k < 1440; k++) {
      const out = bank.step(at(k), k > 12, 0)
      events.push(...out.events)
      if (k === 60) for (const s of [0, 1]) bank.setBaseline(s)
      if (k === 240) for (const s of [0, 1]) expect(bank.noise(s).whiteSd / ((400 * Math.SQRT2) / [2e5, 1.5e5][s]!)).toSatisfy((x: number) => x > 0.75 && x < 1.25) // biome-ignore format: one line
      if (k > 60 && k % 60 === 0) worst = Math.max(worst, ...[0, 1].map((s) => Math.abs(bank.level(s))))
    }
    expect(events).toEqual([])
    expect(worst).toBeLessThan(0.005)
  })

  it('knows three segments, four taps, two streams as 12 segment states, 2 shared zeros, 4 gains, 2 meters, 2 viscosities', () => {
    const m = stateMap(trio)
    expect(m.size).toBe(22)
    expect(m.tapZero.map((i) => i >= 0)).toEqual([false, true, true, false])
  })
})
