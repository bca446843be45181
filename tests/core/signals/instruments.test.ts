import { describe, expect, it } from 'vitest'
import { twoSegments } from '../../helpers/skids.ts'
import { hear, type Reading } from './world.ts'

const skid = twoSegments()
/** The same number to the last digit from 700 s on. */
const frozenAt = (key: 'p1' | 'flow') =>
  hear(skid, 1300, (k) => (k >= 700 ? { still: key } : {})).filter((a) => a.kind === 'sensor')
const sensors = (n: number, of: (k: number) => Reading) =>
  hear(skid, n, of).filter((a) => a.kind === 'sensor' || a.kind === 'no-data' || a.kind === 'monitor')

describe('a reading that fails', () => {
  // SIG-04
  it('an open thermocouple (burn-out high, 200 °C) is a sensor alarm of its tag after 30 s, never a temperature or exotherm alarm, and clears 30 s after it is well', () => {
    const all = hear(skid, 900, (k) => (k >= 600 && k < 660 ? { t1: 200 } : {}))
    expect(all.map((a) => [a.kind, a.tag])).toEqual([['sensor', 'TT-1']])
    expect(all[0]!.raisedS - 600).toBeGreaterThanOrEqual(30)
    expect(all[0]!.raisedS - 600).toBeLessThanOrEqual(33)
    expect(all[0]!.clearedS! - 660).toBeGreaterThanOrEqual(30)
    expect(all[0]!.clearedS! - 660).toBeLessThanOrEqual(33)
  })

  it('20 s of it are no alarm', () => {
    expect(sensors(900, (k) => (k >= 600 && k < 620 ? { t1: 200 } : {}))).toEqual([])
  })

  // SIG-05
  it('a pressure that stands still is told after 8 min, a flow after 2 min, each within half a minute', () => {
    const frozen = (key: 'p1' | 'flow') => {
      const alarms = frozenAt(key)
      expect(alarms).toHaveLength(1)
      return alarms[0]!.raisedS - 700
    }
    const p = frozen('p1')
    expect(p).toBeGreaterThan(450)
    expect(p).toBeLessThan(510)
    const f = frozen('flow')
    expect(f).toBeGreaterThan(100)
    expect(f).toBeLessThan(150)
  })

  it('a tag without readings for 60 s while the others go on is told by name; the log as a whole is not silent', () => {
    const [alarm, ...more] = sensors(900, (k) => (k >= 600 && k < 700 ? { p3: null } : {}))
    expect(more).toEqual([])
    expect(alarm).toMatchObject({ kind: 'no-data', tag: 'PT-3', priority: 'low' })
    expect(alarm!.raisedS - 600).toBeGreaterThanOrEqual(60)
    expect(alarm!.raisedS - 600).toBeLessThanOrEqual(63)
  })
})

describe('readings that jump', () => {
  const jumpy = (k: number) => k >= 600 && k % 10 === 0
  it('one tag that jumps away by 3 bar and back every 10 s is an instrument, told within two minutes', () => {
    const [alarm, ...more] = sensors(900, (k) => (jumpy(k) ? { p1: 9.5 } : {}))
    expect(more).toEqual([])
    expect(alarm).toMatchObject({ kind: 'sensor', tag: 'PT-1' })
    expect(alarm!.raisedS - 600).toBeLessThan(130)
  })

  // 3 % of readings, at places that only look drawn; the mean of five gaps is 167 s.
  const rare = (k: number) => k >= 600 && (k * 7919) % 33 === 0
  it('3 % of wild readings are an instrument, told within five minutes: a thermocouple that jumps by 90 K, a flow below its range', () => {
    for (const reading of [{ t1: 110 }, { t1: -70 }, { flow: -6 }]) {
      const [alarm, ...more] = sensors(1200, (k) => (rare(k) ? reading : {}))
      expect(more).toEqual([])
      expect(alarm).toMatchObject({ kind: 'sensor', tag: 't1' in reading ? 'TT-1' : 'FT-1' })
      expect(alarm!.raisedS - 600).toBeLessThan(300)
    }
  })

  it('a slug of gas of 50 s that shakes one tap and now and then another blames no instrument', () => {
    expect(
      sensors(900, (k) => (k >= 600 && k < 650 ? { p1: k % 3 === 0 ? 9.5 : 7, ...(k % 7 === 0 ? { p2: 7.5 } : {}) } : {})),
    ).toEqual([])
  })

  it('two that jump together are gas or a pump: no instrument is blamed', () => {
    expect(sensors(900, (k) => (jumpy(k) ? { p1: 9.5, p2: 7.5 } : {}))).toEqual([])
  })
})

describe('a coarse or a violent reading', () => {
  it('a tap in steps of 0.33 bar about its value from the first row on is no faulty instrument', () => {
    expect(sensors(600, (k) => ({ p3: 3 + 0.33 * (((k * 7919) % 5) - 2) }))).toEqual([])
  })

  it('a temperature that runs away by 8 K/s, more than a spike at each row, is believed: high limit within 10 s of 40 °C, and no instrument is blamed', () => {
    const all = hear(skid, 700, (k) => ({ t1: k < 600 ? 20 : Math.min(140, 20 + 8 * (k - 600)) }))
    expect(all.filter((a) => a.kind === 'sensor')).toEqual([])
    const limit = all.find((a) => a.kind === 'temperature-limit')!
    expect(limit.raisedS - 603).toBeLessThanOrEqual(10)
    expect(all.map((a) => a.kind)).toContain('exotherm')
  })

  it('one that leaps by 100 K at once and stays is still refused, however many readings agree', () => {
    const all = hear(skid, 700, (k) => ({ t1: k < 600 ? 20 : 120 }))
    expect(all.map((a) => a.kind)).toEqual(['sensor'])
  })
})

describe('the log itself', () => {
  it('a pause of 60 s is no-data after 10 s, once, for the whole log and no single tag', () => {
    const alarms = sensors(900, (k) => (k >= 600 && k < 660 ? { none: true } : {}))
    expect(alarms.map((a) => [a.kind, a.tag])).toEqual([['no-data', null]])
    expect(alarms[0]!.raisedS - 600).toBeGreaterThanOrEqual(10)
    expect(alarms[0]!.raisedS - 600).toBeLessThanOrEqual(13)
    expect(alarms[0]!.clearedS).not.toBeNull()
  })

  // SIG-10
  it('a row stamped a day ahead raises the clock alarm and nothing else', () => {
    const alarms = sensors(900, (k) => (k === 700 ? { shiftMs: 86_400_000 } : {}))
    expect(alarms.map((a) => a.key)).toEqual(['monitor:clock'])
  })

  it('a healthy quarter of an hour raises nothing', () => {
    expect(hear(skid, 900, () => ({}))).toEqual([])
  })
})
