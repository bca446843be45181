import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { createConfiguration } from '../../server/core/settings/configuration.ts'
import { flatten, type SettingValue } from '../../server/core/settings/flat.ts'
import { applyChanges } from '../../server/core/settings/slots.ts'
import { decideChanges, type Ground } from '../../server/settings/decide.ts'
import { checkChanged } from '../../server/settings/effective.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { fixture } from '../helpers/skids.ts'

const text = readFileSync(fixture('skids/heron.yaml'), 'utf8')
const skid = loadSkid(text, 'heron.yaml')
const ground = (): Ground => ({ skid, text, file: 'heron.yaml', configuration: createConfiguration(skid).state })
const reason = 'trial of other settings'

describe('a skid file with changes laid over it', () => {
  const change = fc.constantFrom(
    { path: 'segments.R1.limits.dpHighBar', new: 3.3 },
    { path: 'segments.R1.limits.dpHighHighBar', new: null },
    { path: 'segments.R2.limits.feedRatio.low', new: 0.9 },
    { path: 'segments.PC.limits.temperatureHighC', new: 12 },
    { path: 'streams.A.waterPpm', new: 210 },
    { path: 'streams.B.reagent.concentrationMolL', new: 1.4 },
    { path: 'alarms.flow.priority', new: 'low' },
    { path: 'alarms.fouling:R1.cause', new: 'salt' },
    { path: 'alarms.fouling:R1.timeToRespondSeconds', new: null },
    { path: 'alarms.sensor:R2.onDelaySeconds', new: 20 },
    { path: 'detection.riseToFindPct', new: 4 },
    { path: 'disturbances.wander', new: 0.003 },
  )
  it('read anew is the configuration that the pipeline makes of file and changes', () => {
    fc.assert(
      fc.property(fc.uniqueArray(change, { selector: (c) => c.path, maxLength: 6 }), (changes) => {
        const { skid: read, problems } = checkChanged(text, 'heron.yaml', changes)
        expect(problems).toEqual([])
        expect(flatten(read!)).toEqual(flatten(applyChanges(skid, changes).skid))
      }),
      { numRuns: 40 },
    )
  })

  it('suppression made and taken away within a run is that of a file with and without it', () => {
    const withPhases = text.replace(/^scanSeconds/m, 'phaseColumn: phase\nscanSeconds')
    const make = [
      { path: 'suppression.rest.alarms', new: ['flow', 'dp-limit:R1'] },
      { path: 'suppression.rest.phases', new: ['shutdown'] },
    ]
    const { skid: read } = checkChanged(withPhases, 'heron.yaml', make)
    expect(read!.suppression).toEqual({ rest: { alarms: ['flow', 'dp-limit:R1'], phases: ['shutdown'] } })
    const gone = make.map((c) => ({ path: c.path, new: null }))
    expect(checkChanged(withPhases, 'heron.yaml', [...make, ...gone]).skid!.suppression).toBeUndefined()
    expect(applyChanges(skid, [...make, ...gone]).skid.suppression).toEqual({})
  })
})

describe('a change that a person asks for', () => {
  const ask =
    (path: string, now: number | string | string[] | null, why = reason, effectiveMs = 0) =>
    () =>
      decideChanges(ground(), 0, { changes: [{ path, new: now }], effectiveMs, reason: why })

  it('is given back with what it changes', () => {
    expect(ask('segments.R1.limits.dpHighBar', 3.3)()).toEqual([{ path: 'segments.R1.limits.dpHighBar', old: 6, new: 3.3 }])
  })

  // USR-05 REC-06
  it.each([
    ['without a reason of 5 characters', ask('segments.R1.limits.dpHighBar', 3.3, ' so '), 'reason of at least 5'],
    ['of a tag', ask('tags.PT-101.column', 'x'), 'cannot change within a run'],
    ['that changes nothing', ask('segments.R1.limits.dpHighBar', 6), 'is 6 already'],
    ['of no number', ask('segments.R1.limits.dpHighBar', 'x'), 'a number'],
    ['of a high limit above the high-high one', ask('segments.R1.limits.dpHighBar', 60), 'dpHighHighBar'],
    ['out of the range that a file may hold', ask('segments.R1.limits.temperatureHighC', 5000), '1000'],
    ['more than 30 days ahead', ask('segments.R1.limits.dpHighBar', 3.3, reason, 40 * 86_400_000), '30 days'],
    ['of an alarm suppressed by an unknown phase', ask('suppression.rest.phases', ['asleep']), 'phases'],
  ])('%s is refused and says why', (_, asked, says) => {
    expect(asked).toThrow(says)
  })

  const piece = fc.constantFrom('segments', 'R1', 'limits', 'dpHighBar', 'temperatureLowC', 'feedRatio', 'low', 'alarms', 'flow', 'flow:R1', 'priority', 'onDelaySeconds', 'suppression', 'rest', 'phases', 'detection', 'riseToFindPct', 'streams', 'A', 'waterPpm', 'disturbances', 'wander', '__proto__', 'constructor', '', 'tags', 'PT-101') // biome-ignore format: a list
  const value = fc.oneof(
    fc.double(),
    fc.constantFrom<number | string | boolean | null>(null, 0, -1, 5, 1e308, Number.NaN, true, '', 'high', '__proto__'),
    fc.array(fc.constantFrom<string | number>('flow', 'hold', 3), { maxLength: 2 }),
  )
  it('whatever is asked is refused in words or gives changes that the file could hold; nothing else happens', () => {
    fc.assert(
      fc.property(fc.array(fc.tuple(fc.array(piece, { maxLength: 5 }), value), { maxLength: 2 }), (asked) => {
        const changes = asked.map(([path, now]) => ({ path: path.join('.'), new: now as SettingValue }))
        try {
          const out = decideChanges(ground(), 0, { changes, effectiveMs: 0, reason })
          expect(checkChanged(text, 'heron.yaml', out).problems).toEqual([])
          expect(applyChanges(skid, out).left).toEqual([])
        } catch (error) {
          expect((error as { code?: string }).code).toBe('ACT_REFUSED')
        }
      }),
      { numRuns: 400 },
    )
    expect(({} as Record<string, unknown>)['phases']).toBeUndefined()
  })

  it('is refused where it would make what is planned later impossible', () => {
    const g = ground()
    const planned = {
      version: 2,
      person: 'P. Quill',
      reason,
      effectiveMs: 5000,
      changes: [{ path: 'segments.R1.limits.dpHighBar', old: 6, new: 7 }],
    }
    g.configuration.planned.push(planned)
    const lower = { changes: [{ path: 'segments.R1.limits.dpHighHighBar', new: 6.5 }], effectiveMs: 1000, reason }
    expect(() => decideChanges(g, 0, lower)).toThrow('with what is planned later')
    expect(decideChanges({ ...g, configuration: createConfiguration(skid).state }, 0, lower)).toHaveLength(1)
  })
})
