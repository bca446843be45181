import { cusumRunLength } from '../design/run-length.ts'
import { normalCdf, normalQuantile } from '../stats/normal.ts'
import type { WorkedExample } from './worked-example.ts'

const subject = 'statistics'
const montgomery = 'D. C. Montgomery, Statistical Quality Control, CUSUM with k 0.5 (from memory)'
/** Two-sided, k = 0.5: decision interval h, shift in σ, mean run length printed. */
const rows: readonly (readonly [number, number, number])[] = [
  [4, 0, 168],
  [4, 1, 8.38],
  [5, 0, 465],
  [5, 1, 10.4],
  [5, 2, 4.01],
]

export const statisticsExamples: readonly WorkedExample[] = [
  ...rows.map(
    ([h, shift, printed]): WorkedExample => ({
      subject,
      name: `mean run length of a CUSUM, h ${h}, shift ${shift} σ`,
      source: montgomery,
      printed,
      unit: 'samples',
      tolerance: 0.005,
      compute: () => cusumRunLength({ k: 0.5, h, sided: 'two' }, shift),
    }),
  ),
  {
    subject,
    name: 'normal distribution function at 1.96',
    source: 'any table',
    printed: 0.975,
    unit: '',
    tolerance: 1e-4,
    compute: () => normalCdf(1.96),
  },
  {
    subject,
    name: 'normal quantile of 0.95',
    source: 'any table',
    printed: 1.645,
    unit: '',
    tolerance: 1e-4,
    compute: () => normalQuantile(0.95),
  },
]
