import { readFileSync } from 'node:fs'
import { expect, it } from 'vitest'
import { causeGuide, defaultRationales } from '../../server/core/alarms/default-rationale.ts'
import type { Occurrence } from '../../server/core/alarms/occurrence.ts'
import { alarmHelpOf } from '../../server/monitor/alarm-help.ts'
import { checkSkid } from '../../server/skid/check.ts'

const file = 'fixtures/skids/heron.yaml'
const skid = checkSkid(readFileSync(new URL(`../../${file}`, import.meta.url), 'utf8'), file).skid!
const alarm = (more: Partial<Occurrence>): Occurrence => ({
  id: 1,
  key: 'fouling:R2',
  kind: 'fouling',
  priority: 'low',
  segment: 'R2',
  tag: null,
  raisedMs: 0,
  clearedMs: null,
  value: null,
  limit: null,
  unit: null,
  message: '',
  cause: 'fouling',
  onset: null,
  detector: '',
  evidence: { for: [], against: [], notExcluded: [] },
  configuration: 0,
  annunciated: true,
  ...more,
})

// ALM-02, PRO-08
it('tells what to check and to do by the cause that was found: composition asks for the lot, a blockage for stopping the feeds', () => {
  const help = alarmHelpOf(() => skid)
  expect(help(alarm({}))!.action).toBe(defaultRationales.fouling.action)
  expect(help(alarm({ cause: 'composition' }))!.check).toBe(causeGuide.composition.check)
  expect(help(alarm({ cause: 'blockage' }))!.action).toContain('stop the feeds')
  expect(help(alarm({ cause: 'blockage' }))!.action).toContain('do not raise pressure')
})

it('never over what the site wrote for that segment, nor for an alarm of another kind', () => {
  const help = alarmHelpOf(() => skid)
  const own = skid.alarms['fouling:R1']!
  expect(help(alarm({ segment: 'R1', cause: 'composition' }))).toMatchObject({ check: own['check'], action: own['action'] })
  expect(help(alarm({ kind: 'dp-limit', key: 'dp-limit:R2:dpHighBar', cause: 'blockage' }))!.action).toBe(
    defaultRationales['dp-limit/high'].action,
  )
})
