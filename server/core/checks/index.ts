import { channelExamples } from './channel-examples.ts'
import { depositExamples } from './deposit-examples.ts'
import { flowExamples } from './flow-examples.ts'
import { heatExamples } from './heat-examples.ts'
import { liquidExamples } from './liquid-examples.ts'
import { residenceExamples } from './residence-examples.ts'
import { statisticsExamples } from './statistics-examples.ts'
import type { WorkedExample } from './worked-example.ts'

/** Every published figure that `self-check` recomputes; one file a subject, added here, examples of one subject next to each other. */
export const workedExamples: readonly WorkedExample[] = [
  ...flowExamples,
  ...channelExamples,
  ...heatExamples,
  ...residenceExamples,
  ...liquidExamples,
  ...depositExamples,
  ...statisticsExamples,
]
