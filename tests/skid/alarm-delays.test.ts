import { readFileSync } from 'node:fs'
import { expect, it } from 'vitest'
import { checkSkid } from '../../server/skid/check.ts'

const file = 'fixtures/skids/heron.yaml'
const text = readFileSync(new URL(`../../${file}`, import.meta.url), 'utf8')
const notes = (fields: string): readonly string[] =>
  checkSkid(text.replace('    timeToRespondSeconds: 1200\n', fields), file).notes.filter((n) => n.startsWith('alarms.'))

// ALM-04
it('an alarm with 60 s to respond, 20 s of delay, 3 s of its own and a minute for a person is 23 s short, and is named', () => {
  expect(notes('    timeToRespondSeconds: 60\n    onDelaySeconds: 20\n')).toEqual([
    'alarms.fouling:R1: its delays and a minute to understand and act take 23 s more than its timeToRespondSeconds: it cannot be relied on',
  ])
  expect(notes('    timeToRespondSeconds: 83\n    onDelaySeconds: 20\n')).toEqual([])
  expect(notes('    timeToRespondSeconds: 1200\n')).toEqual([])
})
