import { expect, it } from 'vitest'
import { checkSkid, problemLine } from '../../server/skid/check.ts'
import { base } from './base.ts'

const check = (more: string, text = base) => checkSkid(`${text.trimEnd()}\n${more}`, 'plover.yaml')
const said = (more: string, text = base): string[] =>
  check(more, text).problems.map((p) => problemLine('plover.yaml', p).replace(/^plover\.yaml:\d+:\d+: /, ''))

// ALM-09
it('suppression is logic with a name: these alarms while the phase is one of these', () => {
  const { skid, problems } = check(
    'suppression:\n  low-flow-at-rest: { alarms: [flow, "dp-limit:R1"], phases: [hold, shutdown] }\n',
  )
  expect(problems).toEqual([])
  expect(skid!.suppression).toEqual({ 'low-flow-at-rest': { alarms: ['flow', 'dp-limit:R1'], phases: ['hold', 'shutdown'] } })
  expect(check('').skid!.suppression).toBeUndefined()
})

it.each([
  ['an unknown phase', 'suppression: { rest: { alarms: [flow], phases: [asleep] } }', /phases\[0\] is the text 'asleep'; expected one of startup/],
  ['an unknown alarm', 'suppression: { rest: { alarms: [flew], phases: [hold] } }', /'flew' is no alarm; expected one of fouling, .*did you mean 'flow'\?/],
  ['a segment that is not there', 'suppression: { rest: { alarms: ["flow:R9"], phases: [hold] } }', /'flow:R9' names a segment that is not there/],
  ['no phases', 'suppression: { rest: { alarms: [flow] } }', /'phases' is missing/],
  ['an alarm named by two logics', 'suppression: { rest: { alarms: [flow], phases: [hold] }, wash: { alarms: ["flow:R1"], phases: [flush] } }', /'flow:R1' is suppressed by 'rest' already; expected one logic for an alarm/],
  ['a name of several words', 'suppression: { at rest: { alarms: [flow], phases: [hold] } }', /unknown key 'at rest' in suppression; .*'at-rest'/],
])('refuses %s on its line', (_, more, line) => {
  expect(said(more).join('\n')).toMatch(line)
}) // biome-ignore format: a table

it('refuses suppression by the phase where the log has no phase column', () => {
  const text = base.replace('phaseColumn: phase\n', '')
  expect(said('suppression: { rest: { alarms: [flow], phases: [hold] } }', text).join()).toContain(
    "'rest' suppresses by the phase; expected phaseColumn",
  )
})

it('sizes of disturbances lie over the defaults by name; an unknown one is refused', () => {
  expect(check('disturbances: { wander: 0.003, wanderTauH: 1 }').skid!.disturbances).toEqual({ wander: 0.003, wanderTauH: 1 })
  expect(said('disturbances: { wonder: 0.003 }').join()).toContain("did you mean 'wander'?")
  expect(said('disturbances: { meterTauH: 0 }').join()).toContain('a number above 0')
})
