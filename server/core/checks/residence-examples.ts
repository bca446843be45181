import { taylorAris } from '../rtd/dispersion.ts'
import { pulseMoments } from '../rtd/pulse.ts'
import { type Rtd, residual, washoutVolumes } from '../rtd/rtd.ts'
import type { WorkedExample } from './worked-example.ts'

const subject = 'residence time'
const levenspiel = 'O. Levenspiel, Chemical Reaction Engineering, pulse example (from memory)'
const pulse = () => pulseMoments([0, 5, 10, 15, 20, 25, 30, 35], [0, 3, 5, 5, 4, 2, 1, 0])
const rows: readonly (readonly [string, Rtd, number, number, number])[] = [
  ['one stirred tank', { kind: 'tanks', n: 1 }, 3, 5, 0.01],
  ['one stirred tank', { kind: 'tanks', n: 1 }, 5, 0.7, 0.05],
  ['two tanks', { kind: 'tanks', n: 2 }, 4, 0.3, 0.02],
  ['three tanks', { kind: 'tanks', n: 3 }, 3, 0.62, 0.01],
  ['three tanks', { kind: 'tanks', n: 3 }, 5, 0.004, 0.03],
  ['a segregated laminar tube', { kind: 'laminar' }, 4, 1.6, 0.03],
]

export const residenceExamples: readonly WorkedExample[] = [
  { subject, name: 'pulse: mean', source: levenspiel, printed: 15, unit: 'min', tolerance: 1e-9, compute: () => pulse().mean },
  {
    subject,
    name: 'pulse: variance',
    source: levenspiel,
    printed: 47.5,
    unit: 'min²',
    tolerance: 1e-9,
    compute: () => pulse().variance,
  },
  {
    subject,
    name: 'pulse: D/uL, closed vessel',
    source: levenspiel,
    printed: 0.12,
    unit: '',
    tolerance: 0.002,
    compute: () => 1 / (pulse().peClosed ?? Number.NaN),
  },
  {
    subject,
    name: 'pulse: tanks in series',
    source: levenspiel,
    printed: 4.74,
    unit: '',
    tolerance: 0.002,
    compute: () => pulse().tanks,
  },
  ...rows.map(
    ([name, rtd, volumes, printed, tolerance]): WorkedExample => ({
      subject,
      name: `left in ${name} after ${volumes} volumes`,
      source: 'hand computation, closed formulas',
      printed,
      unit: '%',
      tolerance,
      compute: () => 100 * residual(rtd, volumes),
    }),
  ),
  {
    subject,
    name: 'closed ends, Pe 10: volumes to 1 %',
    source: 'Laplace inversion in 50-digit arithmetic',
    printed: 2.35561997504,
    unit: '',
    tolerance: 1e-4,
    compute: () => washoutVolumes({ kind: 'dispersion', pe: 10, ends: 'closed' }, 0.01),
  },
  {
    subject,
    name: 'open ends, Pe 10: volumes to 1 %',
    source: "Levenspiel's E integrated in 50-digit arithmetic",
    printed: 2.88520927979,
    unit: '',
    tolerance: 1e-4,
    compute: () => washoutVolumes({ kind: 'dispersion', pe: 10, ends: 'open' }, 0.01),
  },
  {
    subject,
    name: 'Taylor-Aris: Pe of 1 mm bore, 10 m, 20 mm/s',
    source: 'closed formula by hand',
    printed: 95.99995392,
    unit: '',
    tolerance: 1e-8,
    compute: () => taylorAris(5e-4, 0.02, 10, 1e-9).pe,
  },
]
