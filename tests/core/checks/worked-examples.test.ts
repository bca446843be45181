import { expect, it } from 'vitest'
import { workedExamples } from '../../../server/core/checks/index.ts'
import { checkExample, type WorkedExample } from '../../../server/core/checks/worked-example.ts'

it.each(
  workedExamples.map((e) => [`${e.subject}: ${e.name} = ${e.printed} ${e.unit} within ${e.tolerance} (${e.source})`, e] as const),
)('%s', (_, example) => {
  const { passed, computed } = checkExample(example)
  expect({ passed, computed }).toMatchObject({ passed: true })
})

const wrong: WorkedExample = {
  subject: 'flow',
  name: 'two',
  source: 'hand',
  printed: 2,
  unit: '',
  tolerance: 0.01,
  compute: () => 2.1,
}
it('fails a figure 5 % off a 1 % tolerance, and one that is no number', () => {
  expect(checkExample(wrong)).toMatchObject({ passed: false, computed: 2.1 })
  expect(checkExample(wrong).deviation).toBeCloseTo(0.05, 9)
  expect(checkExample({ ...wrong, compute: () => Number.NaN }).passed).toBe(false)
})
