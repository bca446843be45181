import fc from 'fast-check'
import { expect, it } from 'vitest'
import { dpUncertainty } from '../../../server/core/figures/dp-uncertainty.ts'
import { derivedPage } from '../../../server/core/figures/figures-text.ts'
import { operationOf } from '../../../server/core/figures/operation.ts'
import { isOrganolithium } from '../../../server/core/figures/organolithium.ts'
import { type SegmentFigures, skidFigures } from '../../../server/core/figures/segment-figures.ts'
import { changed, heron, usual } from '../flush/heron.ts'

const of = (id: string, skid = heron, given: Parameters<typeof skidFigures>[1] = usual): SegmentFigures => {
  const found = skidFigures(skid, given).segments.find((s) => s.segment === id)
  if (found === undefined) throw new Error(`no segment ${id}`)
  return found
}
const bar = (f: SegmentFigures) => (f.dp?.dpPa ?? Number.NaN) / 1e5
/** The temperatures of the hand table in the skid file: precoolers at 0, reactors at -20, quench at 20 °C. */
const table = {
  ...usual,
  temperatures: {
    'TT-101': 0,
    'TT-102': 0,
    'TT-103': 0,
    'TT-111': -20,
    'TT-112': -20,
    'TT-113': -20,
    'TT-121': -20,
    'TT-122': -20,
    'TT-131': 20,
    'TT-132': 20,
  },
}

it('meets the hand table of the demo skid: clean pressure drop and Re of PA, PB, PC, R1, R2 within 2 %', () => {
  const rows: readonly (readonly [string, number, number])[] = [
    ['PA', 1.15, 1754],
    ['PB', 0.68, 1899],
    ['PC', 0.32, 232],
    ['R1', 2.5, 1360],
    ['R2', 1.57, 1381],
  ]
  for (const [id, dpBar, re] of rows) {
    expect(Math.abs(bar(of(id, heron, table)) / dpBar - 1)).toBeLessThan(0.02)
    expect(Math.abs((of(id, heron, table).dp?.re ?? 0) / re - 1)).toBeLessThan(0.02)
  }
})

// EXO-01
it('gives R1 by hand: residence time 63.6 mL / 164.3 mL/min = 23.2 s, De 186, adiabatic rise 73 K, MTSR at least inlet plus rise', () => {
  const f = of('R1', heron, table)
  expect(f.residenceS).toBeCloseTo((63.6 / (6 / 0.8853 / 60 + 2.04 / 0.6605 / 60)) * 60e-3, 1)
  expect(Math.abs((f.dp?.de ?? 0) / 186 - 1)).toBeLessThan(0.01)
  // 6.777 mol/h · 160 kJ/mol over 6 kg/h · 1.71 + 2.04 kg/h · 2.25 kJ/(kg K)
  expect(Math.abs((f.heat?.adiabaticRiseK ?? 0) / ((6.777 * 160) / (6 * 1.712 + 2.04 * 2.25)) - 1)).toBeLessThan(0.01)
  expect((f.heat?.mtsrK ?? 0) - 253.15).toBeGreaterThanOrEqual((f.heat?.adiabaticRiseK ?? 0) - 1e-9)
  expect(f.heat?.hotSpotK ?? 0).toBeLessThan((f.heat?.adiabaticRiseK ?? 0) + 253.15)
})

it('keeps U below both the inner film and the outer film brought to the inner area, with a range around it', () => {
  const h = of('R1').heat
  expect(h?.uWM2K ?? 0).toBeLessThan(h?.filmWM2K ?? 0)
  expect(h?.uWM2K ?? 0).toBeLessThan(500 * (4.5 / 1.5))
  expect(h?.uLowWM2K ?? 0).toBeLessThan(h?.uWM2K ?? 0)
  expect(h?.uHighWM2K ?? 0).toBeGreaterThan(h?.uWM2K ?? 0)
})

it('counts LiOH where wet feeds meet the organolithium: 85 ppm of 6 kg/h make 464 mm3/h in R1, none in the precoolers or the quench', () => {
  // 6 kg/h · 85e-6 / 18.015 · 23.948 / 1.46 g/cm3
  expect((of('R1').liohM3S ?? 0) * 3600e9).toBeCloseTo((((6000 * 85e-6) / 18.015) * 23.948) / 1.46e-3, 3)
  for (const id of ['PA', 'PB', 'PC', 'Q1']) expect(of(id).liohM3S).toBe(0)
  expect((of('R2').liohM3S ?? 0) * 3600e9).toBeCloseTo((((600 * 60e-6) / 18.015) * 23.948) / 1.46e-3, 3)
})

it('halves the run for twice the water, and shortens it with a lower limit', () => {
  const wetter = { ...heron, streams: heron.streams.map((s) => ({ ...s, waterPpm: s.waterPpm === null ? null : 2 * s.waterPpm })) }
  expect((of('R1').runLengthS ?? 0) / (of('R1', wetter).runLengthS ?? 1)).toBeCloseTo(2, 9)
  expect(
    of(
      'R1',
      changed((s) => ({ limits: { ...s.limits, dpHighBar: 4 } })),
    ).runLengthS ?? 0,
  ).toBeLessThan(of('R1').runLengthS ?? 0)
})

// SIG-08
it('puts 0.25 % of 25 bar on two taps to ±0.088 bar (stated as ±0.09), in any unit, and warns below 3 u and 1 u', () => {
  const spec = heron.segments.find((s) => s.id === 'R1')
  if (spec === undefined) throw new Error('no R1')
  expect((dpUncertainty(heron, spec).uPa ?? 0) / 1e5).toBeCloseTo(0.0884, 4)
  const psi = {
    ...heron,
    tags: heron.tags.map((t) => (t.quantity === 'pressure' ? { ...t, unit: 'kPa' as const, range: [0, 2500] as const } : t)),
  }
  expect(dpUncertainty(psi, spec).uPa).toBeCloseTo(dpUncertainty(heron, spec).uPa ?? 0, 6)
  const slow = (factor: number) =>
    of('R1', heron, { ...usual, flows: { A: 6 * factor, B: 2.04 * factor, C: 0.6 * factor, D: 12 * factor } }).warnings.join(' ')
  expect(slow(1)).not.toMatch(/3 u|no baseline/)
  expect(slow(0.15)).toMatch(/below 3 u of its taps \(PT-111, PT-112\)/)
  expect(slow(0.03)).toMatch(/below its own uncertainty u .* no baseline/)
})

// SIG-11
it('does not care about the unit of a flow: kg/h, g/min, mL/min of the same stream give the same figures', () => {
  fc.assert(
    fc.property(fc.double({ min: 1, max: 12, noNaN: true }), (kgH) => {
      const as = (unit: 'kg/h' | 'g/min', factor: number) =>
        of(
          'R1',
          { ...heron, tags: heron.tags.map((t) => (t.tag === 'FT-101' ? { ...t, unit } : t)) },
          { ...usual, flows: { ...usual.flows, A: kgH * factor } },
        )
      expect(bar(as('g/min', 1000 / 60)) / bar(as('kg/h', 1))).toBeCloseTo(1, 9)
    }),
    { numRuns: 20 },
  )
})

it('says what it assumed when nothing is given: flows at 45 % of the tightest limit, the feed ratio, 15 K below the high limit', () => {
  const { assumptions, segments } = skidFigures(heron)
  expect(assumptions.join('\n')).toMatch(
    /flow of A not given: \d+ % of the range of FT-101 assumed, where no clean pressure drop passes 45 %/,
  )
  const loads = segments.map((s, i) => s.dp!.dpPa / (heron.segments[i]!.limits.dpHighBar! * 1e5))
  expect(Math.max(...loads)).toBeCloseTo(0.45, 9)
  const free = { ...heron, segments: heron.segments.map((s) => ({ ...s, limits: { ...s.limits, dpHighBar: null } })) }
  expect(skidFigures(free).assumptions.join('\n')).toMatch(/flow of A not given: half the range of FT-101 assumed/)
  expect(assumptions.join('\n')).toMatch(/flow of B not given: taken from A at the middle of the feed-ratio limits, 1.05 mol\/mol/)
  expect(assumptions.join('\n')).toMatch(/R1: no temperature given, -20 °C assumed/)
  expect(segments.every((s) => s.dp !== null)).toBe(true)
  const b = operationOf(heron).streams.find((s) => s.id === 'B')?.volumeFlowM3S ?? 0
  const a = operationOf(heron).streams.find((s) => s.id === 'A')?.volumeFlowM3S ?? 0
  expect((b * 2.3) / a).toBeCloseTo(1.05, 9)
})

// SIG-04, SIG-08, FOU-05
it('shows what a ratio of 1.5 may be, what a plugged branch would show, what water takes of the reagent, and u of the thermometers', () => {
  const f = of('R1')
  // 85 ppm in 6 kg/h and none counted of B: 28.3 mmol/h of water over 7.11 mol/h of n-hexyllithium.
  expect(f.reagentLost).toBeCloseTo((85e-6 * 6000) / 18.015 / 7.11, 3)
  expect(of('Q1').reagentLost).toBeNull()
  expect(f.deposit!.readings[0]!.boreRatio).toBeCloseTo(1.5 ** -0.25, 1)
  expect(f.pluggedRatio).toBeGreaterThan(2)
  expect(of('PB').pluggedRatio).toBeNull()
  expect(f.temperatureUK).toBeCloseTo(0.92, 2)
  const page = derivedPage(heron, usual)
  expect(page).toMatch(/organolithium lost to it +0\.4 %, at worst 0\.8 % \(Li2O\)/)
  expect(page).toMatch(/What a pressure drop tells of a deposit\n {2}- One pressure drop at one flow does not tell/)
})

it('leaves figures null and names what is needed where the file is silent, and a page comes out all the same', () => {
  const bare = changed(() => ({ channel: null, volumeMl: null }), 'R1')
  const f = of('R1', bare)
  expect([f.dp, f.heat, f.volumeM3, f.residenceS, f.runLengthS]).toEqual([null, null, null, null, null])
  expect(f.missing.join(' ')).toMatch(/need channel with bore and length/)
  expect(derivedPage(bare)).toMatch(/R1 {2}reactor 1/)
  expect(derivedPage(heron)).not.toMatch(/NaN|Infinity|undefined|null/)
})

it('says so when a liquid is far outside its range instead of failing the page', () => {
  const f = of('R1', heron, { ...usual, temperatures: { 'TT-111': 400 } })
  expect(f.dp).toBeNull()
  expect(f.missing.join(' ')).toMatch(/no properties at 400/)
})

it('knows an organolithium by its name', () => {
  expect(['n-hexyllithium', 'n-BuLi', 's-butyllithium', 'PhLi'].every(isOrganolithium)).toBe(true)
  expect(['thiophene', 'lithium chloride', 'hydrochloric acid', 'N,N-dimethylformamide'].some(isOrganolithium)).toBe(false)
})
