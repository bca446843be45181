import { expect, it } from 'vitest'
import type { Io } from '../../server/cli/command.ts'
import { selfCheckCommand, selfCheckPage, selfCheckWith } from '../../server/cli/self-check.ts'
import { workedExamples } from '../../server/core/checks/index.ts'
import { checkExample, type WorkedExample } from '../../server/core/checks/worked-example.ts'

const wrong: WorkedExample = {
  subject: 'flow',
  name: 'two',
  source: 'hand',
  printed: 2,
  unit: '',
  tolerance: 0.01,
  compute: () => 2.1,
}
const io = (texts: string[]): Io => ({
  out: async (text) => {
    texts.push(text)
  },
  err: (text) => texts.push(`err: ${text}`),
  errIsTerminal: false,
  outIsTerminal: false,
  nowMs: () => 0,
  signal: new AbortController().signal,
})

it('exits 0 with every example on the page, 1 when one fails, 2 for an argument', async () => {
  const texts: string[] = []
  expect(await selfCheckCommand.run([], io(texts))).toBe(0)
  for (const e of workedExamples) expect(texts[0]).toContain(e.name)
  expect(texts[0]).toContain(`${workedExamples.length} examples, ${workedExamples.length} within tolerance, 0 not.`)
  expect(texts[0]).toMatch(/Signature/)
  expect(await selfCheckWith([wrong]).run([], io(texts))).toBe(1)
  expect(texts.at(-1)).toMatch(/two .*FAIL/)
  expect(await selfCheckCommand.run(['x'], io(texts))).toBe(2)
  expect(selfCheckPage([checkExample(wrong)])).toContain('0 within tolerance, 1 not')
})
