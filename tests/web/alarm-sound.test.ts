import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { alarmStates } from '../../server/core/alarms/alarm-state.ts'
import { callsOf, signals, silenced, soundNow } from '../../web/model/alarm-sound.ts'
import { alarmOf } from '../helpers/scene.ts'

const call = (key: string, priority: 'high' | 'medium' | 'low') => ({ key, priority })

describe('the alarm sound', () => {
  // ALM-11
  it('only an active alarm that nobody has acknowledged calls: none that is shelved, suppressed, out of service, returned or latched', () => {
    const rows = alarmStates.map((state, i) => alarmOf(i + 1, { state, active: true, priority: 'high' }))
    expect(callsOf(7, rows)).toEqual([{ key: `7:${alarmStates.indexOf('UNACK') + 1}`, priority: 'high' }])
  })
  it('sounds the most urgent of all that call, and nothing when none does', () => {
    expect(soundNow([call('a', 'low'), call('b', 'high'), call('c', 'medium')], null).sounds).toBe('high')
    expect(soundNow([], null)).toEqual({ sounds: null, silence: null })
  })
  it('silence holds for what called when it was asked for, and ends with the next new call, which sounds with all that still call', () => {
    const two = [call('a', 'high'), call('b', 'low')]
    const quiet = silenced(two)
    expect(soundNow(two, quiet).sounds).toBeNull()
    const one = soundNow([two[1]!], quiet)
    expect(one.sounds).toBeNull()
    expect(soundNow([two[1]!, call('c', 'low')], one.silence)).toEqual({ sounds: 'low', silence: null })
    // What was silenced, went and came again is new.
    expect(soundNow(two, one.silence).sounds).toBe('high')
    expect(soundNow([], quiet)).toEqual({ sounds: null, silence: null })
  })
  it('over random courses: it is quiet exactly while nothing calls or silence was asked for since the newest call', () => {
    const step = fc.record({ on: fc.subarray(['a', 'b', 'c', 'd']), press: fc.boolean() })
    fc.assert(
      fc.property(fc.array(step, { maxLength: 30 }), (steps) => {
        let silence: ReturnType<typeof silenced> = null
        let known = new Set<string>()
        let asked = false
        for (const { on, press } of steps) {
          const calls = on.map((k) => call(k, 'low'))
          if (on.some((k) => !known.has(k))) asked = false
          known = new Set(on)
          const now = soundNow(calls, silence)
          silence = now.silence
          if (on.length === 0) asked = false
          expect(now.sounds).toBe(on.length === 0 || asked ? null : 'low')
          if (press && now.sounds !== null) {
            silence = silenced(calls)
            asked = true
          }
        }
      }),
    )
  })
  // DSP-02
  it('tells priorities apart by the count of strokes alone: three, two, one as the teeth of the marks; the more urgent is higher and comes sooner again', () => {
    const { high, medium, low } = signals
    expect([high.strokes, medium.strokes, low.strokes]).toEqual([3, 2, 1])
    expect(high.hz > 1.25 * medium.hz && medium.hz > 1.25 * low.hz).toBe(true)
    expect(high.everyS < medium.everyS && medium.everyS < low.everyS).toBe(true)
    for (const s of [high, medium, low]) expect(s.strokes * (s.strokeS + s.pauseS)).toBeLessThan(s.everyS)
  })
})
