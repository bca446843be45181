import { describe, expect, it } from 'vitest'
import { handEventOf } from '../../server/core/settings/hand-events.ts'
import { entryKinds } from '../../web/model/entry-kinds.ts'
import { changeText, entryText, kindOf, pathText, readSetting, settingText } from '../../web/model/settings.ts'

describe('settings as a person reads and writes them', () => {
  it.each([
    [5.5, 'bar', '5.5 bar'],
    [-12, '°C', '−12 °C'],
    [null, 'bar', 'not set'],
    [true, null, 'yes'],
    [['flow', 'dp-limit:R1'], null, 'flow, dp-limit:R1'],
    ['high', null, 'high'],
  ] as const)('%j %s is %s', (value, unit, text) => {
    expect(settingText(value, unit)).toBe(text)
  })

  it.each([
    ['segments.R1.limits.dpHighBar', 'bar', 6, ' 5,5 ', 5.5],
    ['segments.R1.limits.temperatureLowC', '°C', null, '−55', -55],
    ['segments.R1.limits.dpHighBar', 'bar', 6, '', null],
    ['alarms.flow.priority', null, 'high', 'low', 'low'],
    ['alarms.flow.latching', null, null, 'no', false],
    ['alarms.flow.deadband', null, null, '0.2', 0.2],
    ['alarms.flow.action', null, null, 'call 5', 'call 5'],
    ['suppression.rest.phases', null, null, 'flush, hold', ['flush', 'hold']],
    ['disturbances.wander', null, null, '0.003', 0.003],
  ] as const)('%s in %s, typed %j', (path, unit, value, typed, read) => {
    expect(readSetting(kindOf({ path, unit, value: value as never }), typed)).toEqual({ value: read })
  })

  it('a word where a number belongs is told with its mend', () => {
    expect(readSetting({ kind: 'number' }, 'six')).toBe('“six” is no number – write it like 5.5')
  })

  it('says a change in one line, by words where the path has some', () => {
    expect(changeText({ path: 'segments.R1.limits.dpHighBar', unit: 'bar', old: 6, new: null })).toBe(
      'R1: pressure drop, high: 6 bar → not set',
    )
    expect(pathText('segments.R2.limits.feedRatio.low')).toBe('R2: feed ratio, low')
    expect(pathText('suppression.rest.alarms')).toBe('logic rest, alarms')
    expect(pathText('alarms.flow:R1.priority')).toBe('alarm flow:R1: priority')
    expect(pathText('segments.R1.channel.diameterMm')).toBe('segments.R1.channel.diameterMm')
  })

  it('says an entry with its value, unit, feed and note', () => {
    const base = { tMs: 0, person: 'R. Tamsin' }
    expect(entryText({ ...base, kind: 'event', event: 'Karl Fischer', value: 180, unit: 'ppm', of: 'A', note: 'drum 7' })).toBe(
      'Karl Fischer of A 180 ppm: drum 7',
    )
    expect(entryText({ ...base, kind: 'event', event: 'sample', value: null, unit: null, note: '' })).toBe('sample')
    expect(entryText({ ...base, kind: 'comment', alarm: null, text: 'seen' })).toBe('seen')
    expect(entryText({ ...base, kind: 'acknowledge', alarm: 1 })).toBeNull()
  })

  it('the page offers the kinds and units that the server takes', () => {
    for (const { kind, of, units } of entryKinds.filter((k) => k.kind !== 'comment')) {
      const known = handEventOf(kind)!
      expect([known.kind, known.of, Object.keys(known.units).sort()]).toEqual([kind, of, [...units].sort()])
    }
    expect(entryKinds).toHaveLength(7)
  })
})
