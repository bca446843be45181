import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { MonitorError } from '../../../server/core/errors.ts'
import { taylorAris, turbulentPe, varianceClosed } from '../../../server/core/rtd/dispersion.ts'
import { pulseMoments } from '../../../server/core/rtd/pulse.ts'
import { type Rtd, residual, washoutVolumes } from '../../../server/core/rtd/rtd.ts'
import { hasShared, sharedCases } from '../thermal/shared-cases.ts'

const num = (min: number, max: number) => fc.double({ min, max, noNaN: true })
const models: fc.Arbitrary<Rtd> = fc.oneof(
  num(0.5, 200).map((n): Rtd => ({ kind: 'tanks', n })),
  fc
    .tuple(num(1, 300), fc.constantFrom('open' as const, 'flux' as const, 'closed' as const))
    .map(([pe, ends]): Rtd => ({ kind: 'dispersion', pe, ends })),
  fc.constant<Rtd>({ kind: 'laminar' }),
  fc.constant<Rtd>({ kind: 'coil' }),
  fc.tuple(fc.constantFrom('laminar' as const, 'coil' as const), num(0.001, 0.8)).map(([kind, beta]): Rtd => ({ kind, beta })),
  fc.tuple(num(0, 0.9), num(1, 20)).map(([plugShare, n]): Rtd => ({ kind: 'plugThenTanks', plugShare, n })),
)

it('reproduces the washout table of practice REC-15: 3, 4, 5 volumes through 1, 2, 3 tanks and a segregated laminar tube', () => {
  const percent = (rtd: Rtd) => [3, 4, 5].map((v) => Number((100 * residual(rtd, v)).toPrecision(2)))
  expect(percent({ kind: 'tanks', n: 1 })).toEqual([5, 1.8, 0.67])
  expect(percent({ kind: 'tanks', n: 2 })).toEqual([1.7, 0.3, 0.05])
  expect(percent({ kind: 'tanks', n: 3 })).toEqual([0.62, 0.052, 0.0039])
  expect(percent({ kind: 'laminar' })).toEqual([2.8, 1.6, 1])
})

it('sums Poisson terms for whole tanks: Q(N, N theta) = sum (N theta)^k/k! e^(-N theta) to 1e-12', () => {
  fc.assert(
    fc.property(fc.integer({ min: 1, max: 30 }), num(0.01, 4), (n, theta) => {
      let term = Math.exp(-n * theta)
      let sum = 0
      for (let k = 0; k < n; k++) {
        sum += term
        term *= (n * theta) / (k + 1)
      }
      expect(Math.abs(residual({ kind: 'tanks', n }, theta) / sum - 1)).toBeLessThan(1e-11)
    }),
  )
})

it('washout inverts residual: 1 - F(washout(r)) = r, falling in theta, for every model', () => {
  fc.assert(
    fc.property(models, num(-6, -0.05), (rtd, log) => {
      const r = 10 ** log
      expect(Math.abs(Math.log(residual(rtd, washoutVolumes(rtd, r)) / r))).toBeLessThan(1e-4)
      expect(residual(rtd, 1.3)).toBeLessThanOrEqual(residual(rtd, 1.2) + 1e-9)
    }),
    { numRuns: 150 },
  )
})

it('has the stated mean: the area under 1 - F is 1 volume (1 + 2/Pe between open ends) within 0.3 %', () => {
  const area = (rtd: Rtd, to: number) => {
    const h = to / 4000
    let sum = 0
    for (let i = 0; i < 4000; i++) sum += residual(rtd, (i + 0.5) * h) * h
    return sum
  }
  const mean = (rtd: Rtd) => (rtd.kind === 'dispersion' && rtd.ends === 'open' ? 1 + 2 / rtd.pe : 1)
  const all: Rtd[] = [
    { kind: 'tanks', n: 3.5 },
    { kind: 'dispersion', pe: 8, ends: 'open' },
    { kind: 'dispersion', pe: 8, ends: 'flux' },
    { kind: 'dispersion', pe: 8, ends: 'closed' },
    { kind: 'coil' },
    { kind: 'plugThenTanks', plugShare: 0.4, n: 2 },
  ]
  for (const rtd of all) expect(Math.abs(area(rtd, rtd.kind === 'coil' ? 200 : 15) / mean(rtd) - 1)).toBeLessThan(3e-3)
  // 1/(4 theta^2) keeps 1/(4 * 400) of its mean beyond 400 volumes
  expect(Math.abs(area({ kind: 'laminar' }, 400) - 1)).toBeLessThan(3e-3)
})

it('closed ends: variance from the curve is 2/Pe - 2(1 - e^-Pe)/Pe2 (van der Laan), Pe 2 to 100', () => {
  for (const pe of [2, 5, 20, 100]) {
    let second = 0
    const h = 0.004
    for (let t = h / 2; t < 16; t += h) second += 2 * t * residual({ kind: 'dispersion', pe, ends: 'closed' }, t) * h
    expect(Math.abs((second - 1) / varianceClosed(pe) - 1)).toBeLessThan(2e-3)
  }
})

it('tends to one stirred tank as Pe goes to 0 between closed ends, and to plug flow as Pe grows', () => {
  for (const theta of [0.3, 1, 2, 4])
    expect(Math.abs(residual({ kind: 'dispersion', pe: 0.01, ends: 'closed' }, theta) - Math.exp(-theta))).toBeLessThan(3e-3)
  expect(residual({ kind: 'dispersion', pe: 5000, ends: 'closed' }, 0.9)).toBeGreaterThan(0.999)
  expect(residual({ kind: 'dispersion', pe: 5000, ends: 'closed' }, 1.1)).toBeLessThan(0.001)
})

it('recomputes the pulse example of Levenspiel (from memory): mean 15 min, variance 47.5, D/uL 0.120, N 4.74', () => {
  const m = pulseMoments([0, 5, 10, 15, 20, 25, 30, 35], [0, 3, 5, 5, 4, 2, 1, 0])
  expect(m.mean).toBeCloseTo(15, 10)
  expect(m.variance).toBeCloseTo(47.5, 10)
  expect(m.tanks).toBeCloseTo(4.737, 3)
  expect(1 / (m.peClosed ?? 0)).toBeCloseTo(0.12, 3)
})

it('Taylor-Aris: 0.5 mm radius, 20 mm/s, 10 m, 1e-9 m2/s gives D 2.0833e-3 m2/s, Pe 96.0 and settled after 200 s', () => {
  const t = taylorAris(5e-4, 0.02, 10, 1e-9)
  expect(t.dispersionM2S).toBeCloseTo(2.0833343e-3, 9)
  expect(t.pe).toBeCloseTo(95.99995, 4)
  expect(t.settled).toBe(true)
  expect(taylorAris(5e-4, 0.02, 3.9, 1e-9).settled).toBe(false)
  expect(turbulentPe(1000, 0.02)).toBeCloseTo(1000 / (5.05 * 0.05), 6)
})

it('refuses models and fractions out of range', () => {
  for (const bad of [
    () => residual({ kind: 'tanks', n: 0 }, 1),
    () => residual({ kind: 'laminar' }, -1),
    () => washoutVolumes({ kind: 'laminar' }, 0),
    () => washoutVolumes({ kind: 'dispersion', pe: 10, ends: 'closed' }, 1e-9),
    () => pulseMoments([0, 1, 2], [0, 0, 0]),
  ]) {
    expect(bad).toThrow(MonitorError)
  }
})

/** Share still inside after each θ, of flux-weighted particles that drift with 2(1 - r²) and wander across with β (direct random walk). */
function walked(beta: number, thetas: readonly number[], particles: number): number[] {
  let seed = 20_240_607
  const uniform = () => {
    seed = (Math.imul(seed, 1664525) + 1013904223) >>> 0
    return (seed + 0.5) / 2 ** 32
  }
  const step = 0.01
  // uniform steps of the same variance as Gaussian ones: 2 β step in each direction
  const reach = Math.sqrt(6 * beta * step)
  const inside = thetas.map(() => 0)
  const end = thetas.at(-1) ?? 0
  for (let p = 0; p < particles; p++) {
    const q = 1 - Math.sqrt(1 - uniform())
    let [x, y, z, t, r2] = [Math.sqrt(q), 0, 0, 0, q]
    while (z < 1 && t <= end) {
      const before = 1 - r2
      x += reach * (2 * uniform() - 1)
      y += reach * (2 * uniform() - 1)
      r2 = x * x + y * y
      if (r2 > 1) {
        const back = (2 - Math.sqrt(r2)) / Math.sqrt(r2)
        x *= back
        y *= back
        r2 = x * x + y * y
      }
      z += (before + 1 - r2) * step
      t += step
    }
    for (const [k, theta] of thetas.entries()) if (t > theta) inside[k] = (inside[k] ?? 0) + 1
  }
  return inside.map((n) => n / particles)
}

it('laminar flow with diffusion across: never below random walks of 20 000 particles, and within a factor 12 of them', () => {
  for (const [beta, thetas] of [
    [0.005, [0.8, 1.5, 3, 5]],
    [0.05, [0.8, 1.2, 2, 2.8]],
    [0.3, [0.8, 1, 1.3, 1.8]],
    [0.7, [0.8, 1, 1.2, 1.5]],
  ] as const) {
    for (const [k, share] of walked(beta, thetas, 20_000).entries()) {
      const envelope = residual({ kind: 'laminar', beta }, thetas[k] ?? 0)
      expect(envelope).toBeGreaterThan(share * 0.98)
      expect(envelope).toBeLessThan(12 * share)
      expect(residual({ kind: 'coil', beta }, (thetas[k] ?? 0) + 1)).toBeLessThanOrEqual(
        Math.max(residual({ kind: 'coil' }, (thetas[k] ?? 0) + 1), 0),
      )
    }
  }
})

it('diffusion pays where it has time: 1e-4 left after 50 volumes segregated, after 4.4 at beta 0.05 (walks: 3.9), and nothing gained at beta 0', () => {
  expect(washoutVolumes({ kind: 'laminar' }, 1e-4)).toBe(50)
  const v = washoutVolumes({ kind: 'laminar', beta: 0.05 }, 1e-4)
  expect(v).toBeGreaterThan(3.9)
  expect(v).toBeLessThan(5)
  expect(washoutVolumes({ kind: 'laminar', beta: 0 }, 1e-2)).toBeCloseTo(washoutVolumes({ kind: 'laminar' }, 1e-2), 6)
})

describe.runIf(hasShared)('shared check values 09 (runs where the folder exists)', () => {
  it('tanks in series: 1 - F to 1e-8, washout to 1e-8, E as the slope of F', () => {
    for (const { i, out } of sharedCases('09_tanks.json')) {
      const rtd: Rtd = { kind: 'tanks', n: i.num('N') }
      for (const [k, theta] of i.list('theta').entries()) {
        const want = out.list('one_minus_F')[k] ?? Number.NaN
        expect(Math.abs(residual(rtd, theta) - want)).toBeLessThan(1e-8 * want + 1e-12)
        const slope = (residual(rtd, theta - 1e-4) - residual(rtd, theta + 1e-4)) / 2e-4
        expect(Math.abs(slope - (out.list('E')[k] ?? Number.NaN))).toBeLessThan(1e-4)
      }
      for (const [k, r] of i.list('residual').entries())
        expect(Math.abs(washoutVolumes(rtd, r) / (out.list('theta_at_residual')[k] ?? Number.NaN) - 1)).toBeLessThan(1e-8)
      expect(1 / i.num('N')).toBeCloseTo(out.num('variance'), 10)
    }
  })

  it('axial dispersion between open, flux and closed ends: F to 1e-6, washout to 1e-4', () => {
    for (const { i, out } of sharedCases('09_dispersion.json')) {
      const ends = [
        ['open', 'open_open_F', 'open_open_theta_at_residual'],
        ['flux', 'flux_F_inverse_gaussian', 'flux_theta_at_residual'],
        ['closed', 'closed_closed_F', 'closed_closed_theta_at_residual'],
      ] as const
      for (const [end, f, at] of ends) {
        const rtd: Rtd = { kind: 'dispersion', pe: i.num('Pe'), ends: end }
        for (const [k, theta] of i.list('theta').entries())
          expect(Math.abs(1 - residual(rtd, theta) - (out.list(f)[k] ?? Number.NaN))).toBeLessThan(1e-6)
        for (const [k, r] of i.list('residual').entries())
          expect(Math.abs(washoutVolumes(rtd, r) / (out.list(at)[k] ?? Number.NaN) - 1)).toBeLessThan(1e-4)
      }
      expect(varianceClosed(i.num('Pe'))).toBeCloseTo(out.num('closed_closed_variance'), 8)
    }
  })

  it('laminar, plug with tanks, Taylor-Aris and the pulse example to 1e-6', () => {
    for (const { i, out } of sharedCases('09_misc_rtd.json')) {
      const model = i.has('model') ? i.text('model') : ''
      if (model.startsWith('laminar'))
        expect(washoutVolumes({ kind: 'laminar' }, i.num('residual')) / out.num('theta')).toBeCloseTo(1, 6)
      else if (model.startsWith('plug'))
        expect(
          washoutVolumes({ kind: 'plugThenTanks', plugShare: i.num('plug_fraction'), n: i.num('N') }, i.num('residual')) /
            out.num('theta'),
        ).toBeCloseTo(1, 6)
      else if (model === 'Taylor-Aris')
        expect(
          taylorAris(i.num('radius_m'), i.num('velocity_m_s'), i.num('length_m'), i.num('molecular_diffusivity_m2_s')).pe /
            out.num('Pe'),
        ).toBeCloseTo(1, 6)
      else {
        const m = pulseMoments(i.list('time_min'), i.list('tracer_g_L'))
        expect(
          [
            m.mean / out.num('mean_min'),
            m.variance / out.num('variance'),
            m.variance2 / out.num('sigma_theta2'),
            m.tanks / out.num('N_tanks'),
          ].every((q) => Math.abs(q - 1) < 1e-6),
        ).toBe(true)
        expect(1 / (m.peClosed ?? 0) / out.num('D_over_uL_closed')).toBeCloseTo(1, 6)
      }
    }
  })
})
