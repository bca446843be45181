import { expect, it } from 'vitest'
import { insightLines } from '../../server/cli/insight-lines.ts'
import type { DepositReport, OutletReport, Report } from '../../server/core/report.ts'

const deposit = (share: number, plugged: boolean): DepositReport => ({
  ratio: 2,
  low: 1.9,
  high: 2.1,
  readings: [
    { kind: 'uniform', lengthShare: 1, boreRatio: 0.84, thicknessMm: 0.12, depositMl: 3, volumeLost: 0.3 },
    { kind: 'local', lengthShare: 0.1, boreRatio: 0.55, thicknessMm: 0.33, depositMl: 1, volumeLost: 0.07 },
    ...(plugged
      ? [{ kind: 'plugged-branch' as const, lengthShare: null, boreRatio: 0, thicknessMm: null, depositMl: null, volumeLost: 0.5 }]
      : []),
  ],
  cannotTell: [],
  couldTell: [],
  capture: { share, low: null, high: null, solidMlPerHour: 0.41 },
})
const report = (more: Partial<Pick<Report, 'streams' | 'outlet'>> & { deposit?: DepositReport }): Report =>
  ({
    streams: [],
    outlet: [],
    alarms: [{ id: 3, kind: 'exotherm' }],
    segments: [{ segment: 'R1', deposit: more.deposit ?? null, heat: null }],
    ...more,
  }) as unknown as Report
const lines = (more: Parameters<typeof report>[0]) => insightLines(report(more), (iso) => iso.slice(11, 19))

it('says a film, a narrow place and a plugged branch where the ratio holds one, and that one pressure drop does not tell which', () => {
  expect(lines({ deposit: deposit(0.1, true) })).toEqual([
    'R1: ratio 2.000 (1.900 to 2.100) is an even film of 0.12 mm, or a bore narrowed to 55 % over 10 % of the length, or a plugged branch; one pressure drop does not tell which',
    'R1: as an even film it is 10 % of the lithium hydroxide that the water given makes (0.41 mL an hour)',
  ])
  expect(lines({ deposit: deposit(0.1, false) })[0]).not.toContain('plugged')
})

it('says that the water given cannot explain a growth that needs more than all of its solid', () => {
  expect(lines({ deposit: deposit(19.3, false) })[1]).toMatch(
    /would need 19 times that: more water, a loose or local deposit, or another solid$/,
  )
})

const window: OutletReport = {
  alarm: 3,
  segment: 'R1',
  outlet: 'Q1',
  from: '2031-05-05T19:30:46.000Z',
  to: '2031-05-05T19:34:50.000Z',
  firstMl: 1,
  lastMl: 2,
  divertedMl: 1398,
  unknownSeconds: 0,
  epsilon: 0.005,
  models: [],
}
it('gives an outlet window with its volume, an open one without end, one that is not reached yet without beginning', () => {
  const outlet = (more: Partial<OutletReport>) => lines({ outlet: [{ ...window, ...more }] })[0]
  expect(outlet({})).toBe(
    'exotherm in R1: what it touched leaves Q1 from 19:30:46 to 19:34:50, 1.40 L (by volume, 0.5 % left out at either end)',
  )
  expect(outlet({ to: null, divertedMl: null })).toContain('from 19:30:46 on (by volume')
  expect(outlet({ from: null, to: null, divertedMl: null })).toBe(
    'exotherm in R1: what it touched has not come to the end of Q1 yet',
  )
})

it('shows viscosity factors with their interval, and nothing at all where nothing is known', () => {
  const factor = { factor: 1.106, low: 0.854, high: 1.431, level: 0.9, segments: 4 }
  expect(
    lines({
      streams: [
        { stream: 'A', viscosityFactor: factor },
        { stream: 'B', viscosityFactor: null },
      ],
    }),
  ).toEqual(["viscosity over the solvent's, learnt on the baselines (90 %): A 1.11 (0.85 to 1.43)"])
  expect(lines({})).toEqual([])
})
