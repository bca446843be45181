import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { Act } from '../../../server/core/sequence.ts'
import { type ConfigurationState, createConfiguration } from '../../../server/core/settings/configuration.ts'
import { flatten, type SettingValue } from '../../../server/core/settings/flat.ts'
import { applyChanges, isChangeable, settingOf } from '../../../server/core/settings/slots.ts'
import { heron } from '../../helpers/skids.ts'

const skid = heron()
const person = 'R. Tamsin'
type SettingsAct = Extract<Act, { kind: 'settings' }>
const settings = (version: number, tMs: number, effectiveMs: number, changes: readonly [string, SettingValue][]): SettingsAct => ({
  kind: 'settings', version, tMs, effectiveMs, person, reason: 'trial of the limits', changes: changes.map(([path, now]) => ({ path, old: settingOf(skid, path), new: now })),
}) // biome-ignore format: a list

describe('what may change within a run', () => {
  it.each([
    ['segments.R1.limits.dpHighBar', 5, true],
    ['segments.R1.limits.dpHighBar', null, true],
    ['segments.R1.limits.dpHighBar', -1, false],
    ['segments.R1.limits.dpHighBar', 'six', false],
    ['segments.R1.limits.temperatureLowC', -60, true],
    ['segments.R1.limits.temperatureLowC', -300, false],
    ['segments.R1.limits.feedRatio.high', 1.2, true],
    ['segments.PC.limits.feedRatio.high', 1.2, false],
    ['segments.XX.limits.dpHighBar', 5, false],
    ['segments.R1.channel.diameterMm', 2, false],
    ['tags.PT-101.column', 'x', false],
    ['streams.A.waterPpm', 180, true],
    ['streams.A.waterPpm', 2e6, false],
    ['detection.riseToFindPct', 3, true],
    ['detection.riseToFindPct', 0, false],
    ['alarms.flow.priority', 'high', true],
    ['alarms.flow.priority', 'urgent', false],
    ['alarms.flow:R1.onDelaySeconds', 30, true],
    ['alarms.flow.action', ' ', false],
    ['alarms.flow.constructor', 'x', false],
    ['alarms.flew.priority', 'high', false],
    ['suppression.rest.phases', ['shutdown', 'hold'], true],
    ['suppression.rest.phases', ['asleep'], false],
    ['suppression.rest.alarms', ['flow', 'temperature-limit:R1'], true],
    ['suppression.__proto__.alarms', ['flow'], false],
    ['disturbances.wander', 0.003, true],
    ['disturbances.toString', 1, false],
  ] as const)('%s to %j: %s', (path, now, ok) => {
    const out = applyChanges(skid, [{ path, new: now as SettingValue }])
    expect(out.left.length === 0).toBe(ok)
    expect(settingOf(out.skid, path)).toEqual(ok ? now : settingOf(skid, path))
    if (!ok) expect(out.skid).toBe(skid)
  })

  it('changes what it names and nothing else', () => {
    const paths = Object.keys(flatten(skid)).filter((p) => isChangeable(skid, p) && typeof flatten(skid)[p] === 'number')
    expect(paths).toHaveLength(50)
    for (const path of paths) {
      const now = (flatten(skid)[path] as number) * 0.5 + 1
      const { skid: changed } = applyChanges(skid, [{ path, new: now }])
      expect(flatten(changed)).toEqual({ ...flatten(skid), [path]: now })
    }
  })
})

describe('the configuration in force on a run', () => {
  it('takes a change for now at its place, one for later when a scan begins at its time, in order of effect and not of number', () => {
    const c = createConfiguration(skid)
    expect(c.version()).toBe(0)
    expect(c.take(settings(1, 1000, 9000, [['segments.R1.limits.dpHighBar', 5]]), 1000)).toEqual([])
    expect(c.take(settings(2, 2000, 2000, [['segments.R1.limits.dpHighBar', 4]]), 2000)).toHaveLength(1)
    expect([c.version(), settingOf(c.skid(), 'segments.R1.limits.dpHighBar')]).toEqual([2, 4])
    expect(c.due(8999)).toEqual([])
    expect(c.due(9000)).toHaveLength(1)
    expect([c.version(), settingOf(c.skid(), 'segments.R1.limits.dpHighBar')]).toEqual([1, 5])
    expect(c.state.applied.map((a) => [a.version, a.fromMs])).toEqual([
      [0, -1],
      [2, 2000],
      [1, 9000],
    ])
  })

  it('is named by the version that its run says before the first reading; what cannot stand is left out and said', () => {
    const c = createConfiguration(skid)
    c.take(settings(4, 0, 0, []), -1)
    const [took] = c.take(settings(5, 0, 0, [['tags.PT-101.column', 'x'], ['segments.R1.limits.dpHighBar', 5]]), -1) // biome-ignore format: a list
    expect(took!.left).toEqual(['tags.PT-101.column: cannot change within a run'])
    expect(settingOf(c.skid(), 'segments.R1.limits.dpHighBar')).toBe(5)
    expect(c.state.applied.map((a) => a.version)).toEqual([4, 5])
  })

  const paths = ['segments.R1.limits.dpHighBar', 'segments.R2.limits.temperatureHighC', 'streams.A.waterPpm', 'detection.riseToFindPct', 'tags.PT-101.unit'] // biome-ignore format: a list
  const act = fc.record({
    dtMs: fc.integer({ min: 0, max: 50 }),
    later: fc.integer({ min: -20, max: 200 }),
    changes: fc.array(fc.tuple(fc.constantFrom(...paths), fc.oneof(fc.integer({ min: -5, max: 40 }), fc.constant(null))), {
      maxLength: 3,
    }),
  })
  // REC-06
  it('at any time is the skid file with all versions laid over it whose time has come, in the order they took effect; cut anywhere it goes on the same', () => {
    fc.assert(
      fc.property(fc.array(act, { maxLength: 12 }), fc.integer({ min: 0, max: 600 }), (list, cutMs) => {
        const whole = createConfiguration(skid)
        let cut: ReturnType<typeof createConfiguration> | null = null
        const known: { version: number; takesMs: number; at: number; changes: SettingsAct['changes'] }[] = []
        let at = 0
        let next = 0
        let dueAt = 0
        for (let tMs = 0; tMs <= 600; tMs += 10) {
          while (next < list.length && dueAt + list[next]!.dtMs <= tMs) {
            dueAt += list[next]!.dtMs
            const a = settings(next + 1, dueAt, dueAt + list[next]!.later, list[next]!.changes as [string, SettingValue][])
            for (const c of [whole, cut]) c?.take(a, tMs)
            // A change for now stands where it is in the sequence; one for later after every change of before its time.
            known.push({
              version: a.version,
              takesMs: a.effectiveMs <= a.tMs ? tMs - 10 : Math.ceil(a.effectiveMs / 10) * 10,
              at: at++,
              changes: a.changes,
            })
            next++
          }
          for (const c of [whole, cut]) c?.due(tMs)
          const inForce = known
            .filter((k) => k.takesMs <= tMs)
            .toSorted((a, b) => a.takesMs - b.takesMs || effective(a, list) - effective(b, list) || a.at - b.at)
          const folded = applyChanges(
            skid,
            inForce.flatMap((k) => k.changes),
          ).skid
          expect(flatten(whole.skid())).toEqual(flatten(folded))
          if (cut !== null) expect(cut.state).toEqual(whole.state)
          if (cut === null && tMs >= cutMs)
            cut = createConfiguration(skid, JSON.parse(JSON.stringify(whole.state)) as ConfigurationState)
        }
      }),
      { numRuns: 60 },
    )
  })
  /** Time that a planned change was to take effect, for those that the same scan lets in. */
  function effective(k: { at: number; version: number }, list: readonly { dtMs: number; later: number }[]): number {
    const own = list.slice(0, k.at + 1).reduce((sum, a) => sum + a.dtMs, 0)
    return list[k.at]!.later <= 0 ? -1 : own + list[k.at]!.later
  }
})
